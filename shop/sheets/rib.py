"""Ribs, cradles and the strip that cradles are set up by, on paper."""

from __future__ import annotations

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from ...geom.drawing import Anchor, Drawing, Hand, Role, Stroke, thin
from ...geom.rib import Cradle, Rib
from ...geom.slot import parts
from ..job import Job
from ..ribs import cradle_sheet, facing, left_out, rib_sheet
from ..wording import degrees
from .layout import Layout, Spot

Array = NDArray[np.float64]

SMALL, PLAIN = 2.5, 3.0  # heights of lettering
_LEAST = 2.2
_WIDE = 160.0  # mm, the longest line of notes
_BESIDE: tuple[tuple[float, Anchor], ...] = ((9.0, "start"), (-9.0, "end"), (14.0, "start"))
_STRIP = 36.0  # mm, width of the strip


def rib_sheets(job: Job, hand: Hand = "right") -> list[Drawing]:
    """Every rib, as one looks outwards along the span."""
    return [_rib(job, made, i, hand) for i, made in enumerate(job.ribs, start=1)]


def cradle_sheets(job: Job, hand: Hand = "right") -> list[Drawing]:
    """Every cradle, as one looks outwards along the span, and the strip that says where they stand."""
    made = job.cradles
    strip = [_strip(job, made, hand)] if len(made) > 1 else []
    return [*(_cradle(job, made, i, hand) for i in range(len(made))), *strip]


class _Sheet:
    """What a drawing is made of while it is being made."""

    def __init__(self) -> None:
        self.layout = Layout()
        self.strokes: list[Stroke] = []

    def cut(self, ring: Array, role: Role = Role.CUT_OUTSIDE) -> shapely.Polygon:
        """Draw a closed outline."""
        line = thin(np.concatenate([ring, ring[:1]]))[:-1]
        self.strokes.append(Stroke(line, role, closed=True))
        shape = shapely.Polygon(line)
        self.layout.keep_clear(shape.exterior)
        return shape

    def engrave(self, line: Array, within: BaseGeometry) -> None:
        """Draw those parts of a line that lie on the piece."""
        cut = within.intersection(shapely.LineString(line))
        for part in getattr(cut, "geoms", [cut]):
            if part.length > 0.3:
                self.strokes.append(Stroke(np.asarray(part.coords), Role.ENGRAVE))
                self.layout.keep_clear(part)

    def put(self, text: str, within: shapely.Polygon) -> bool:
        """Write a text where the piece has room for it, near its middle."""
        x0, z0, x1, z1 = within.bounds
        centre = within.representative_point()
        sides = np.linspace(x0, x1, 17)[1:-1], np.linspace(z0, z1, 15)[1:-1]
        places = np.stack(np.meshgrid(*sides), axis=-1).reshape(-1, 2)
        off = np.abs(places - [centre.x, centre.y]) @ [1.0, 2.0]
        return self.layout.put_within(text, places[np.argsort(off)], within, heights=(PLAIN, SMALL, _LEAST))

    def say(self, notes: list[str], hand: Hand) -> None:
        """Write the notes below what is drawn, the first two large; a left hand's start at the left once mirrored."""
        points = np.concatenate([stroke.points for stroke in self.strokes])
        boxes = [label.box().bounds for label in self.layout.labels]
        x = float(points[:, 0].min() if hand == "right" else points[:, 0].max())
        y = min([float(points[:, 1].min()), *(box[1] for box in boxes)]) - 4.0
        anchor: Anchor = "start" if hand == "right" else "end"
        self.layout.write_notes(notes[:2], notes[2:], x, y, anchor=anchor, wide=_WIDE)

    def drawing(self, job: Job, name: str, title: str, notes: list[str], hand: Hand) -> Drawing:
        """The finished drawing."""
        made = Drawing(
            name=name,
            title=title,
            stamp=job.stamp,
            strokes=tuple(self.strokes),
            labels=tuple(self.layout.labels),
            notes=tuple(notes),
        )
        return made if hand == "right" else made.mirrored(hand)


def _rib(job: Job, made: Rib, number: int, hand: Hand) -> Drawing:
    sheet, words = _Sheet(), job.wording
    pieces = [sheet.cut(ring) for ring in made.pieces]
    holes = [sheet.cut(ring, Role.CUT_INSIDE) for ring in made.holes]
    solid = shapely.union_all(pieces).difference(shapely.union_all(holes))
    level = float(job.loft.chord_point(job.loft.axis, made.y)[2])
    x0, _, x1, _ = solid.bounds
    sheet.engrave(made.chord, solid)
    sheet.engrave(np.array([[x0 - 1.0, level], [x1 + 1.0, level]]), solid)
    for piece, name in zip(pieces, _names(made, pieces), strict=True):
        room = max(parts(piece.intersection(solid)), key=lambda g: g.area)
        short = f"rib {number} {name}".strip()
        if not sheet.put(f"{short}, y {words.plain(made.y)}, {hand} hand, {job.stamp}", room):
            sheet.put(short, room)
            for text in (f"y {words.plain(made.y)}", f"{hand} hand", job.stamp):
                sheet.put(text, room)
    washout = float(np.degrees(job.loft.washout(np.array(made.y), np.array(made.y))[0]))
    notes = [
        *_outline(job, made),
        f"Chord line {degrees(washout, 2)} nose down from the level line, which crosses it at the twist axis, "
        f"{words.length(level)} above the panel's origin.",
        *_slot(job, made),
    ]
    if made.slivers:
        notes.append(f"W{left_out(job, made)[1:]}.")
    if made.holes and job.record.ribs and job.record.ribs.margin is not None:
        notes.append(f"Lightening holes leave {words.length(job.record.ribs.margin)} all round.")
    notes.append(f"Wing file revision {job.stamp}")
    sheet.say([job.record.name, f"rib {number}, {hand.upper()} hand", *notes], hand)
    return sheet.drawing(job, f"rib-{number}", f"Rib {number}, y {words.length(made.y)}", notes, hand)


def _names(made: Rib, pieces: list[shapely.Polygon]) -> list[str]:
    """What each piece is called: nose or tail, as it lies to the web, numbered where there are several."""
    if made.slot is None:
        return [""]
    middle = made.slot.shape.centroid.x
    sides = ["nose" if piece.centroid.x < middle else "tail" for piece in pieces]
    return [side if sides.count(side) == 1 else f"{side} {sides[: i + 1].count(side)}" for i, side in enumerate(sides)]


def _outline(job: Job, made: Rib) -> list[str]:
    """What the outline is of, and what becomes of it through the sheet."""
    words, stated, thickness = job.wording, job.record.ribs, rib_sheet(job)
    outline = "the skin's inside" if stated and stated.outline == "inner" else "the outer surface"
    of = f"Rib at y {words.plain(made.y)}, outline of {outline}, as one looks outwards along the span."
    if thickness == 0.0:
        return [of, "Drawn as if it had no thickness: state that of its sheet, so that it may clear skin and web."]
    return [
        of,
        f"Its sheet, {words.length(thickness)}, lies half on each side of y. It is cut square, to what clears "
        f"{outline} all through, and so stands up to {words.length(made.short)} short of it on one face.",
    ]


def _slot(job: Job, made: Rib) -> list[str]:
    """How wide the slot is and what of: the sentences of a rib about the web, the flanges, and its parts."""
    words, stated = job.wording, job.record.ribs
    if made.slot is None or stated is None:
        return []
    free, laid = words.length(stated.clearance), facing(job)
    faced = f" with its facings, {words.length(laid)} each," if laid else ""
    unknown = ", its facings left out, as their thickness is not known" if laid is None else ""
    count = {1: "one part", 2: "two parts"}.get(len(made.pieces), f"{len(made.pieces)} parts")
    said = [
        f"Slot {words.length(made.slot.width)} wide, level across: the web{faced} as this rib meets it and {free} on "
        f"each face{unknown}. The web goes through from skin to skin, and the rib is in {count}."
    ]
    if job.flanges:
        names = ", ".join(of.flange.name for of in job.flanges)
        thick = words.length(job.flanges[0].flange.shape.thickness)
        said.append(f"Beside it room for the flanges {names}: their legs, {thick} thick, and {free} all about.")
    return said


def _cradle(job: Job, made: tuple[Cradle, ...], index: int, hand: Hand) -> Drawing:
    sheet, words, cradle, number = _Sheet(), job.wording, made[index], index + 1
    stated = job.record.cradles
    piece = sheet.cut(cradle.outline)
    x0, _, x1, top = piece.bounds
    if x0 < cradle.line < x1:
        sheet.engrave(np.array([[cradle.line, 0.0], [cradle.line, 12.0]]), piece)
        sheet.layout.put("strip", [Spot(cradle.line + 1.5, 5.0, "start")], height=SMALL, within=piece)
    for place in () if cradle.web is None else cradle.web:
        sheet.engrave(place + np.array([[0.0, 1.0], [0.0, -6.0]]), piece)
    if cradle.web is not None:
        x, z = cradle.web.mean(axis=0)
        sheet.layout.put("web", [Spot(x, z - d) for d in (9.5, 11.0, 13.0)], height=SMALL, within=piece)
    nose = cradle.saddle[0]
    sense = 1.0 if cradle.saddle[-1, 0] > nose[0] else -1.0
    spots = [Spot(nose[0] + sense * d, h, "start" if sense > 0 else "end") for h in (14.0, 8.0) for d in (2.0, 6.0)]
    sheet.layout.put("NOSE", spots, height=SMALL, within=piece)
    if not sheet.put(f"cradle {number}, y {words.plain(cradle.y)}, {hand} hand, {job.stamp}", piece):
        for text in (f"cradle {number}", f"y {words.plain(cradle.y)}", f"{hand} hand", job.stamp):
            sheet.put(text, piece)
    side = stated.surface if stated else "lower"
    washout = float(np.degrees(job.loft.washout(np.array(cradle.y), np.array(cradle.y))[0]))
    ends = [words.length(float(z)) for z in cradle.saddle[[0, -1], 1]]
    lie = "as it flies" if side == "lower" else "on its back"
    padded = f", {words.length(stated.padding)} of padding laid in" if stated and stated.padding else ""
    notes = [
        f"Cradle {number} of {len(made)}: the panel lies {lie}, its {side} skin in the saddles, at its washout (here "
        f"{degrees(washout, 2)}). All base lines stand on one flat, level bench.",
        f"Height {words.length(top)}; saddle {ends[0]} above the bench at its forward end, {ends[1]} aft{padded}.",
        _spacing(job, made, index),
        "The face that is drawn on stands at that y and looks to the root; its sheet, "
        f"{words.length(cradle_sheet(job))}, reaches outwards from there. Cut square, it holds the panel on one face "
        f"and stands up to {words.length(cradle.short)} short of it on the other.",
        f"Wing file revision {job.stamp}",
    ]
    sheet.say([job.record.name, f"cradle {number}, {hand.upper()} hand", *notes], hand)
    return sheet.drawing(job, f"cradle-{number}", f"Cradle {number}, y {words.length(cradle.y)}", notes, hand)


def _spacing(job: Job, made: tuple[Cradle, ...], index: int) -> str:
    words, cradle = job.wording, made[index]
    text = f"It stands at y {words.plain(cradle.y)}"
    if index:
        before = made[index - 1]
        aft = float(cradle.saddle[0, 0] - before.saddle[0, 0]) * np.sign(cradle.saddle[-1, 0] - cradle.saddle[0, 0])
        text += (
            f", {words.length(cradle.y - before.y)} from cradle {index}, its forward edge {words.length(abs(aft))} "
            f"further {'aft' if aft >= 0.0 else 'forward'}"
        )
    return f"{text}; the mark STRIP at its foot goes to its line on the strip."


def _strip(job: Job, made: tuple[Cradle, ...], hand: Hand) -> Drawing:
    """A strip along the web line, as seen from above, with a line across it where each cradle stands."""
    sheet, words = _Sheet(), job.wording
    y, x = np.array([c.y for c in made]), np.array([c.line for c in made])
    way = np.array([x[-1] - x[0], y[-1] - y[0]])
    long = float(np.linalg.norm(way))
    way /= long
    across = np.array([way[1], way[0]])  # the ribs' direction (x) as seen along the strip and across it
    along = (np.column_stack([x, y]) - [x[0], y[0]]) @ way
    ends = np.array([along.min() - 25.0, along.max() + 25.0])
    half = _STRIP / 2.0
    piece = sheet.cut(np.array([[ends[0], -half], [ends[1], -half], [ends[1], half], [ends[0], half]]))
    sheet.engrave(np.array([[ends[0], 0.0], [ends[1], 0.0]]), piece)
    lean = across[1] / across[0]
    lines = [np.array([[s - half * lean, half], [s + half * lean, -half]]) for s in along]
    for line in lines:
        sheet.engrave(line, piece)
    for i, s in enumerate(along):
        for text, h in ((f"cradle {i + 1}", 4.0), (f"y {words.plain(float(y[i]))}", -8.0)):
            spots = [Spot(float(s) + d, h, a) for d, a in _BESIDE]
            sheet.layout.put(text, spots, height=PLAIN, within=piece)
    title = f"cradle strip, {hand} hand, {job.stamp}"
    sheet.layout.put(
        title,
        [Spot(float(s), h) for s in np.linspace(ends[0], ends[1], 40) for h in (10.0, -14.0)],
        height=PLAIN,
        within=piece,
    )
    sheet.layout.put("ROOT", [Spot(float(ends[0]) + 3.0, h, "start") for h in (4.0, -8.0)], height=PLAIN, within=piece)
    sheet.layout.put("TIP", [Spot(float(ends[1]) - 3.0, h, "end") for h in (4.0, -8.0)], height=PLAIN, within=piece)
    gaps = ", ".join(words.plain(float(d)) for d in np.diff(y))
    places = ", ".join(words.plain(float(v)) for v in y)
    notes = [
        "Fix it to the bench below the web line, seen from above. Each cradle stands along its line across the strip, "
        "its mark STRIP on the line along it.",
        f"Cradles from root to tip at y {places} {words.units}, {gaps} apart.",
        f"Wing file revision {job.stamp}",
    ]
    sheet.say([job.record.name, f"where the cradles stand, {hand.upper()} hand", *notes], hand)
    return sheet.drawing(job, "cradle-strip", "Where the cradles stand", notes, hand)
