"""The web blank on paper: each face as one looks at it, with its marks and lettering."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import shapely
from numpy.typing import NDArray

from ...geom import blank, lettering, web
from ...geom.blank import Face
from ...geom.drawing import Anchor, Drawing, Hand, Hole, Label, Role, Stroke, thin
from ...geom.seat import Run
from ...geom.web import Side
from ..describe.strips import strip_notes
from ..job import Job
from ..units import MM_PER_INCH
from ..wording import degrees
from .caps import strip_marks
from .joint import joint_marks, joint_notes
from .layout import Layout, Spot

Array = NDArray[np.float64]
Place = tuple[float, float, Anchor]  # s, shift on the sheet, anchor

TICK = 4.0
SMALL, PLAIN = 2.5, 3.0  # heights of lettering
WIDE = 150.0  # mm, the longest line of notes: it leaves room on a sheet of paper for what stands beside it
_LINE = 1.7  # line spacing, in heights
_BEYOND = 1.5 + 2.0 * _LINE * SMALL  # mm from an edge, past a tick's bevel and its s
_SAID = 150.0  # mm, within which the saw's angle is said again: on every sheet of paper
_LIMIT = 0.35  # share of the web's height that the mark of a limit runs into the face


def web_blank(job: Job, hand: Hand = "right") -> list[Drawing]:
    """Front and rear face of the web blank, each as one looks at it, to be taped to its own side.

    The front face is seen from the front, so that s runs to the left on a right-hand panel.
    """
    return [_face_sheet(job, face, hand) for face in job.web.faces]


def pin_diameter(job: Job) -> float:
    """Diameter of the register holes, mm."""
    return blank.register_diameter(*job.web.faces, job.register)


@dataclass(frozen=True)
class View:
    """A face as it is looked at: x on the sheet is s, or -s seen from the front."""

    face: Face
    sense: float

    def on(self, points: Array) -> Array:
        """Points (k, 2) in (s, h) as they lie on the sheet."""
        return np.asarray(points * [self.sense, 1.0])

    def edge(self, side: Side) -> Array:
        """One edge of the face, (k, 2) in (s, h)."""
        return self.face.top if side == "top" else self.face.bottom

    def h(self, side: Side, s: float) -> float:
        """Height of one edge at s."""
        return self.face.heights(s)[1 if side == "top" else 0]

    def beyond(self, side: Side, s: float, half: float) -> float:
        """Outermost h of an edge within `half` of s, where lettering clears it."""
        line = self.edge(side)
        near = line[(line[:, 0] > s - half) & (line[:, 0] < s + half), 1]
        ends = [self.h(side, s - half), self.h(side, s + half)]
        return float(np.max([*near, *ends]) if side == "top" else np.min([*near, *ends]))


def _face_sheet(job: Job, face: Face, hand: Hand) -> Drawing:
    view = View(face, -1.0 if face.name == "front" else 1.0)
    layout = Layout()
    outline = [thin(view.on(line)) for line in (face.bottom, face.top[::-1])]
    strokes = [Stroke(np.concatenate(outline), Role.CUT_OUTSIDE, closed=True)]
    inside = shapely.Polygon(strokes[0].points)
    layout.keep_clear(inside.exterior)
    strokes += _datum(view, inside)
    strokes += _ribs(job, view)
    strokes += _ticks(job, view, layout)
    strokes += _saw_marks(job, view, layout, hand)
    for stroke in strokes[1:]:
        layout.keep_clear(shapely.LineString(stroke.points))
    pin = pin_diameter(job)
    holes = tuple(Hole(float(x), float(y), pin) for x, y in view.on(job.register))
    for hole in holes:
        layout.keep_clear(shapely.Point(hole.x, hole.y).buffer(pin / 2.0 + 0.5))
    strokes += joint_marks(job, view, layout, inside)
    strokes += strip_marks(job, view, layout, inside)
    strokes += _directions(job, view, layout, inside)
    _write_inside(job, view, layout, inside, hand)
    _write_titles(job, view, layout, inside, hand)
    drawing = Drawing(
        name=f"web-{face.name}",
        title=f"Web blank, {face.name} face",
        stamp=job.stamp,
        strokes=tuple(strokes),
        holes=holes,
        labels=tuple(layout.labels),
        notes=tuple(_notes(job, face)),
    )
    return drawing if hand == "right" else drawing.mirrored(hand)


def _datum(view: View, inside: shapely.Polygon) -> list[Stroke]:
    """The web line, wherever it runs inside the face."""
    x0, _, x1, _ = inside.bounds
    shown = inside.intersection(shapely.LineString([[x0 - 1.0, 0.0], [x1 + 1.0, 0.0]]))
    parts = [g for g in getattr(shown, "geoms", [shown]) if g.length > 1.0]
    return [Stroke(np.asarray(g.coords), Role.ENGRAVE) for g in parts]


def _ribs(job: Job, view: View) -> list[Stroke]:
    """Lines of the stations' rib planes."""
    return [Stroke(view.on(line), Role.ENGRAVE) for _, line in _rib_lines(job, view)]


def _rib_lines(job: Job, view: View) -> list[tuple[float, Array]]:
    y1, y2 = job.record.web.ends
    middle = [s.y for s in job.record.wing.stations if y1 + 1.0 < s.y < y2 - 1.0]
    return [(y, blank.rib_line(job.web.plane, view.face, job.face(view.face.name), y)) for y in middle]


def _ticks(job: Job, view: View, layout: Layout) -> list[Stroke]:
    """Ticks along both edges with the skin's bevel there in tenths of a degree, and s at every other one."""
    step = 2.0 * MM_PER_INCH if job.record.units == "in" else 50.0
    first = max(view.face.top[0, 0], view.face.bottom[0, 0])
    last = min(view.face.top[-1, 0], view.face.bottom[-1, 0])
    places = np.arange(np.ceil(max(0.0, first) / step), np.floor(min(last, job.web.plane.length) / step) + 1) * step
    strokes = []
    for row in job.rows(places):
        low, high = view.face.heights(row.s)
        deep = min(TICK, 0.2 * (high - low))
        for side, at, inwards in (("top", high, -1.0), ("bottom", low, 1.0)):
            strokes.append(Stroke(view.on(np.array([[row.s, at], [row.s, at + inwards * deep]])), Role.ENGRAVE))
            angle = row.top.bevel if side == "top" else row.bottom.bevel
            x, out = view.sense * row.s, view.beyond("top" if side == "top" else "bottom", row.s, 6.0)
            below = -SMALL if side == "bottom" else 0.0
            layout.write(Label(degrees(angle), x, out - inwards * 1.5 + below, SMALL, anchor="middle"))
            if round(row.s / step) % 2 == 0:
                text = f"s {job.wording.plain(row.s)}"
                layout.write(Label(text, x, out - inwards * (1.5 + _LINE * SMALL) + below, SMALL, anchor="middle"))
    return strokes


def _saw_marks(job: Job, view: View, layout: Layout, hand: Hand) -> list[Stroke]:
    """Where the saw is set anew along a set bevel, and to what: said at each limit and again along every run."""
    strokes = []
    for side in web.SIDES:
        runs = job.web.cut(side).runs
        for before, after in pairwise(runs):
            strokes += _limit_mark(view, side, after.start)
            _write_limit(job, view, layout, (side, before, after), hand)
        for run in runs:
            start, stop = max(run.start, view.edge(side)[0, 0]), min(run.stop, view.edge(side)[-1, 0])
            count = int(np.ceil((stop - start) / _SAID))
            for share in (np.arange(count) + 0.5) / count:
                at = float(start + share * (stop - start))
                near = [s for step in np.arange(0.0, 60.0, 5.0) for s in (at + step, at - step) if start < s < stop]
                _write_beyond(view, layout, side, _saw(run), [(s, 0.0, "middle") for s in near])
    return strokes


def _saw(run: Run) -> str:
    return f"saw {degrees(np.degrees(run.angle), 2)}"


def _limit_mark(view: View, side: Side, s: float) -> list[Stroke]:
    """An arrow from inside the face to its edge, much longer than a tick."""
    high, low = view.h("top", s), view.h("bottom", s)
    at, inwards = (high, -1.0) if side == "top" else (low, 1.0)
    deep, barb = inwards * _LIMIT * (high - low), min(3.0, 0.15 * (high - low))
    shaft = np.array([[s, at], [s, at + deep]])
    barbs = np.array([[s + x * barb, at + y * inwards * barb] for x, y in ((-0.5, 1.3), (0.0, 0.2), (0.5, 1.3))])
    return [Stroke(view.on(line), Role.ENGRAVE) for line in (shaft, barbs)]


def _write_limit(job: Job, view: View, layout: Layout, limit: tuple[Side, Run, Run], hand: Hand) -> None:
    """Place and both angles of a limit, each on its own side of a bar that stands over the mark."""
    side, before, after = limit
    look = 1.0 if hand == "right" else -1.0  # a left hand is mirrored, but its text still reads to the right
    left, right = (before, after) if view.sense * look > 0.0 else (after, before)
    head = f"s {job.wording.plain(after.start)}: {_saw(left)} "
    back = lettering.width(head, PLAIN) + lettering.width("|", PLAIN) / 2.0
    text = f"{head}| {degrees(np.degrees(right.angle), 2)}"
    _write_beyond(view, layout, side, text, [(after.start, -look * back, "start" if look > 0.0 else "end")])


def _write_beyond(view: View, layout: Layout, side: Side, text: str, places: list[Place]) -> None:
    """Write a text beyond the ticks' own figures at the first of the places with room, or further out."""
    outwards, wide = 1.0 if side == "top" else -1.0, lettering.width(text, PLAIN)
    for row in range(12):
        far = _BEYOND + row * _LINE * PLAIN + (PLAIN if side == "bottom" else 0.0)
        spots = []
        for s, shift, anchor in places:
            out = view.beyond(side, s, wide / 2.0 if anchor == "middle" else wide) + outwards * far
            spots.append(Spot(view.sense * s + shift, out, anchor))
        if layout.put(text, spots, height=PLAIN):
            return


def _directions(job: Job, view: View, layout: Layout, inside: shapely.Polygon) -> list[Stroke]:
    """Arrows that say which edge is up, wherever one fits, and the names of the two ends beyond them."""
    y1, y2 = (job.wording.plain(y) for y in job.record.web.ends)
    ends = {
        f"ROOT y {y1}": (view.face.bottom[0], view.face.top[0], -1.0),
        f"TIP y {y2}": (view.face.bottom[-1], view.face.top[-1], 1.0),
    }
    for text, (low, high, outwards) in ends.items():
        s = min(low[0], high[0]) if outwards < 0 else max(low[0], high[0])
        # Baseline on the side away from the end, whichever way the face is looked at; past the figures of a low end.
        across, aside = view.sense * outwards, (PLAIN if view.sense * outwards > 0 else 0.0)
        middle = (low[1] + high[1]) / 2.0
        spots = [Spot(view.sense * s + across * d + aside, middle, "middle", 90.0) for d in np.arange(3.0, 40.0, 2.0)]
        layout.put(text, spots, height=PLAIN)
    strokes: list[Stroke] = []
    start, stop = view.face.top[0, 0], view.face.top[-1, 0]
    for wanted in np.arange(start + 60.0, stop - 20.0, 400.0):
        for s in wanted + np.arange(0.0, 40.0, 5.0):
            low, high = view.face.heights(float(s))
            if arrow := layout.put_up_arrow(view.sense * s, (max(0.0, low) + high) / 2.0, inside):
                strokes += arrow
                break
    return strokes or _arrow_beside(view, layout)


def _arrow_beside(view: View, layout: Layout) -> list[Stroke]:
    """The arrow that says which edge is up, beside the ROOT end of a web too low to hold it."""
    (s, low), (other, high) = view.face.bottom[0], view.face.top[0]
    found = (
        layout.put_up_arrow(view.sense * (min(s, other) - d), (low + high) / 2.0) for d in np.arange(14.0, 80.0, 3)
    )
    return next((arrow for arrow in found if arrow), [])


def _write_inside(job: Job, view: View, layout: Layout, inside: shapely.Polygon, hand: Hand) -> None:
    """What must stay on the piece once it is cut out: ribs, the datum, face, hand and stamp."""
    asides: tuple[tuple[float, Anchor], ...] = ((2.0, "start"), (-2.0, "end"))
    for y, line in _rib_lines(job, view):
        low, high = line
        text = f"y {job.wording.plain(y)}"
        spots = [
            Spot(
                view.sense * (low[0] + share * (high[0] - low[0])) + aside, low[1] + share * (high[1] - low[1]), anchor
            )
            for share in (0.75, 0.25, 0.6, 0.4)
            for aside, anchor in asides
        ]
        layout.put(text, spots, within=inside)
    start, stop = view.face.bottom[0, 0], view.face.bottom[-1, 0]
    piece = f"{view.face.name.upper()} FACE, {hand} hand, {job.stamp}"
    for text, shares in ((piece, (0.5, 0.35, 0.65)), ("web line", (0.0,))):
        for height in (PLAIN, SMALL):
            lower = (
                Spot(view.sense * s, _clear_of_datum(view, s, share, height), "middle")
                for s in np.arange(start + 20.0, stop - 20.0, 5.0)
                for share in shares
            )
            if layout.put(text, lower, height=height, within=inside):
                break


def _clear_of_datum(view: View, s: float, share: float, height: float) -> float:
    """Baseline for a text in the lower part of a face: just under the datum at share 0, lower with a larger one."""
    low, high = view.face.heights(s)
    ceiling, air = (0.0 if low < 0.0 < high else high), 1.0 + 0.25 * height
    return ceiling - air - height - share * max(0.0, ceiling - low - 2.0 * air - height)


def _write_titles(job: Job, view: View, layout: Layout, inside: shapely.Polygon, hand: Hand) -> None:
    """Title block under the left end of the face as it is looked at, where a sheet of paper starts."""
    heads = (job.record.name, f"web blank, {view.face.name.upper()} face, {hand.upper()} hand")
    write_titles(layout, inside, heads, _notes(job, view.face), hand)


def write_titles(
    layout: Layout, inside: shapely.Polygon, heads: Sequence[str], notes: Sequence[str], hand: Hand
) -> None:
    """Write a title block below all that stands at the left end of a piece, its notes wrapped."""
    x0, low, x1, high = inside.bounds
    strip = shapely.box(x0, low, x0 + WIDE, high) if hand == "right" else shapely.box(x1 - WIDE, low, x1, high)
    foot = inside.intersection(strip).bounds[1]
    boxes = [label.box().bounds for label in layout.labels]
    feet = [box[1] for box in boxes if box[2] > strip.bounds[0] - 10.0 and box[0] < strip.bounds[2] + 10.0]
    # a left hand is mirrored: its text starts at the right end
    start: tuple[float, Anchor] = (x0, "start") if hand == "right" else (x1, "end")
    layout.write_notes(heads, notes, start[0], min([foot, *feet]) - 4.0, anchor=start[1], wide=WIDE)


def _notes(job: Job, face: Face) -> list[str]:
    """What must be known to use the sheet."""
    stated, words = job.record.web, job.wording
    edges = {
        "square": "both edges cut square: the same on both faces, but each face has its own ends",
        "set bevel": "both edges cut with the saw set to the angle marked for each run",
        "full bevel": "both edges cut from this outline to that of the other face",
    }
    return [
        f"{words.length(stated.thickness)} {stated.foam}, cant {degrees(np.degrees(job.cant))}, "
        f"bond line {words.length(stated.bond)}",
        f"As seen from the {face.name}; pins through the {pin_diameter(job):g} mm holes register it with the "
        "other face",
        f"{edges[stated.edge][0].upper()}{edges[stated.edge][1:]}",
        f"At each tick: bevel of the skin, positive where the edge rises aft; s and y in {words.length_unit}",
        *strip_notes(job),
        *joint_notes(job, face),
        f"Wing file revision {job.stamp}",
    ]
