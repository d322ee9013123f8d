"""The flanges on paper: each flat pattern with its fold, its trim lines, and the angle it is asked for."""

from __future__ import annotations

import numpy as np
import shapely
from numpy.typing import NDArray

from ...geom.drawing import Anchor, Drawing, Hand, Role, Stroke, thin
from ...geom.flange import Flange
from ..flanges import BuiltFlange, sprung
from ..job import Job
from ..units import MM_PER_INCH
from .layout import Layout, Spot

Array = NDArray[np.float64]

TICK = 2.0
SMALL, PLAIN = 2.5, 3.0  # heights of lettering


def flange_patterns(job: Job, hand: Hand = "right") -> list[Drawing]:
    """The flat pattern of each flange, from the side that its skin leg is folded towards.

    That is the side one sees when looking at the web's face with the flange on it.
    """
    return [_pattern(job, made, hand) for made in job.flanges]


def _pattern(job: Job, made: BuiltFlange, hand: Hand) -> Drawing:
    flange = made.flange
    flip = np.array([-1.0 if flange.face == "front" else 1.0, 1.0])
    ring = thin(np.vstack([flange.outline, flange.outline[:1]]) * flip)[:-1]
    inside = shapely.Polygon(ring)
    layout = Layout()
    layout.keep_clear(inside.exterior)
    fold = thin(_fold(flange, inside, flip))
    strokes = [Stroke(ring, Role.CUT_OUTSIDE, closed=True), Stroke(fold, Role.FOLD)]
    layout.keep_clear(shapely.LineString(fold))
    strokes += _ticks(job, flange, flip, layout, inside)
    _write_inside(job, flange, flip, layout, inside, hand)
    _write_ends(flange, flip, layout)
    x0, y0, x1, _ = inside.bounds
    heads = (job.record.name, f"flange, {flange.name.upper()}, {hand.upper()} hand")
    start: tuple[float, Anchor] = (x1, "end") if flip[0] < 0 else (x0, "start")
    layout.write_notes(heads, _notes(job, made), start[0], y0 - 3.0, anchor=start[1])
    drawing = Drawing(
        name=f"flange-{flange.face}-{flange.side}",
        title=f"Flange, {flange.name}",
        stamp=job.stamp,
        strokes=tuple(strokes),
        labels=tuple(layout.labels),
        notes=tuple(_notes(job, made)),
    )
    return drawing if hand == "right" else drawing.mirrored(hand)


def _fold(flange: Flange, inside: shapely.Polygon, flip: Array) -> Array:
    """The fold line, from trim line to trim line."""
    line = flange.fold * flip
    first, last = (a + (a - b) / np.linalg.norm(a - b) * 50.0 for a, b in ((line[0], line[1]), (line[-1], line[-2])))
    cut = inside.intersection(shapely.LineString(np.vstack([first, line, last])))
    longest = max(getattr(cut, "geoms", [cut]), key=lambda part: part.length)
    return np.asarray(longest.coords)


def _ticks(job: Job, flange: Flange, flip: Array, layout: Layout, inside: shapely.Polygon) -> list[Stroke]:
    """Ticks across the fold with the angle asked for there, and s at every other one."""
    step = 2.0 * MM_PER_INCH if job.record.units == "in" else 50.0
    first, last = flange.places[[0, -1]]
    strokes = []
    for i in range(int(np.ceil(first / step)), int(np.floor(last / step)) + 1):
        s = i * step
        mark = flange.mark(s, (-TICK, TICK)) * flip
        line = shapely.LineString(mark)
        if not inside.contains(line):
            continue
        strokes.append(Stroke(mark, Role.ENGRAVE))
        layout.keep_clear(line)
        up = 1.0 if flange.side == "top" else -1.0
        (x, y), (_, web) = mark[1], mark[0]
        angle = f"{np.degrees(flange.at(s)):.1f}°"
        layout.put(angle, [Spot(x, _clear(y, up))], height=SMALL, within=inside)
        if i % 2 == 0:
            layout.put(f"s {job.wording.plain(s)}", [Spot(x, _clear(web, -up))], height=SMALL, within=inside)
    return strokes


def _clear(y: float, up: float) -> float:
    """Baseline of small lettering just above (up 1) or below (up -1) y."""
    return y + 1.8 if up > 0 else y - 1.2 - 1.2 * SMALL


def _write_inside(job: Job, flange: Flange, flip: Array, layout: Layout, inside: shapely.Polygon, hand: Hand) -> None:
    """What must stay on the piece: which one it is, its legs, and which way it folds."""
    start, stop = flange.places[[0, -1]]
    middle = (start + stop) / 2.0
    shape = flange.shape
    texts = (
        (f"FLANGE {flange.name.upper()}, {hand} hand, {job.stamp}", True, middle, PLAIN),
        (f"skin leg: folds towards you to {np.degrees(shape.bar):g}°", True, middle + 130.0, PLAIN),
        ("web leg", False, middle, PLAIN),
        (f"{flange.side} edge, {flange.face} face", False, middle + 130.0, PLAIN),
    )
    for text, on_skin, wanted, large in texts:
        for height in (large, SMALL):
            spots = (  # tried one by one: the first few have room as a rule
                _spot(flange, flip, s, share, height, on_skin)
                for s in _near(wanted, start, stop)
                for share in (0.55, 0.4, 0.7, 0.85)
            )
            if layout.put(text, spots, height=height, within=inside):
                break


def _near(wanted: float, start: float, stop: float) -> Array:
    """Places on the flange, nearest to the wanted one first."""
    places = np.arange(start + 10.0, stop - 10.0, 4.0)
    return places[np.abs(places - wanted).argsort()]


def _spot(flange: Flange, flip: Array, s: float, share: float, height: float, on_skin: bool) -> Spot:
    """Room for a text a share of the way across a leg, along the fold."""
    shape = flange.shape
    leg = float(shape.skin_leg(s)) if on_skin else -shape.web_leg
    x, y = flange.mark(s, (share * leg, leg))[0] * flip
    ahead, behind = (flange.mark(s + d, (0.0, leg))[0] * flip for d in (5.0, -5.0))
    lean = (ahead - behind) * flip[0]
    return Spot(x, y - height / 2.0, "middle", float(np.degrees(np.arctan2(lean[1], lean[0]))))


def _write_ends(flange: Flange, flip: Array, layout: Layout) -> None:
    for text, s, outwards in (("ROOT", flange.places[0], -1.0), ("TIP", flange.places[-1], 1.0)):
        leg = float(flange.shape.skin_leg(s))
        x = (flange.outline[:, 0].min() - 3.0 if outwards < 0 else flange.outline[:, 0].max() + 3.0) * flip[0]
        y = flange.mark(float(s), (leg / 2.0, leg))[0, 1]
        layout.put(text, [Spot(x + (PLAIN if x > 0 else 0.0), y, "middle", 90.0)], height=PLAIN)


def _notes(job: Job, made: BuiltFlange) -> list[str]:
    """What must be known to lay it up."""
    flange, words, stated = made.flange, job.wording, job.record.flanges
    shape = flange.shape
    bow, at = flange.camber
    inner, outer = shape.skin_leg.value
    skin = words.length(inner) if inner == outer else f"{words.plain(inner)} to {words.length(outer)}"
    laid = f"{stated.layers} layers of {stated.cloth}, " if stated and stated.cloth else ""
    way = "upwards" if bow > 0 else "downwards"
    return [
        f"{laid}{words.length(shape.thickness)} thick",
        f"Laid up over a bar of {np.degrees(shape.bar):g}° whose edge has a radius of "
        f"{words.length(shape.inner_radius)}",
        f"As seen from the {flange.face}; the skin leg folds towards you along the dashed line",
        f"Legs from the corner: web {words.length(shape.web_leg)}, skin {skin}; the bend takes "
        f"{words.length(shape.allowance)}",
        f"At each tick: angle between web and skin, {np.degrees(flange.angle.min()):.1f}° to "
        f"{np.degrees(flange.angle.max()):.1f}°",
        f"Sprung by {sprung(flange)} (+ opens it), least with a bar of {np.degrees(flange.best_bar):.1f}°",
        f"Camber: the fold line bows {way} by {words.length(abs(bow))} at s = {words.column(at, 1)} {words.units}",
        f"Wing file revision {job.stamp}",
    ]
