"""The joint end on paper: each pad in plan and in profile, and the joint's marks on the web blank."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from ...geom import blank
from ...geom.blank import Face
from ...geom.drawing import Anchor, Drawing, Hand, Hole, Role, Stroke, thin
from ...geom.joint import Pad, Tube
from ..job import Job
from ..joint import JointEnd
from .layout import Layout, Spot

if TYPE_CHECKING:
    from .web import View

Array = NDArray[np.float64]

SMALL, PLAIN = 2.5, 3.0  # heights of lettering
APART = 10.0  # mm between plan and profile
OUT = 50.0  # mm that a pin along the web is drawn out of its end, to be cut off there


def joint_pads(job: Job, hand: Hand = "right") -> list[Drawing]:
    """Plan and thickness profile of each pad, as one looks at the face it lies on."""
    if job.joint is None or job.tube is None:
        return []
    return [_pad_sheet(job, job.joint, job.tube, pad, hand) for pad in job.pads]


def joint_marks(job: Job, view: View, layout: Layout, inside: shapely.Polygon) -> list[Stroke]:
    """Lines on a face of the web blank: the tube and its axis, and where the face's pad thins out and ends."""
    if job.joint is None or job.tube is None:
        return []
    end, piece = job.joint.thickening, shapely.Polygon(view.face.outline())
    lines = _tube_lines(job.tube, piece)
    named = {}
    if any(pad.face == view.face.name for pad in job.pads):
        named = {"pad thins out": end.place(end.full), "pad ends": end.place(end.full + end.taper)}
    lines += [_across(piece, s) for s in named.values()]
    for line in lines:
        layout.keep_clear(shapely.LineString(view.on(line)))
    for text, s in named.items():
        low, high = view.face.heights(s)
        spots = [
            Spot(view.sense * s + aside, h, "middle", 90.0) for aside in (-1.5, 4.0) for h in np.linspace(low, high, 21)
        ]
        layout.put(text, spots, within=inside)
    _name_tube(job, job.tube, view, layout, inside)
    return [Stroke(view.on(line), Role.ENGRAVE) for line in lines]


def _name_tube(job: Job, tube: Tube, view: View, layout: Layout, inside: shapely.Polygon) -> None:
    """Say beside its lines, or beyond the web's edge where there is no room, what the tube is and how wide it lies."""
    text = f"pin tube {job.wording.length(tube.across)}, wrapped"
    (x0, y0), (x1, y1) = (f(view.on(tube.outline()), axis=0) for f in (np.min, np.max))
    share = 0.5 + 0.45 * np.linspace(0.0, 1.0, 21)[:, None] * [1.0, -1.0]
    if tube.start[0] == tube.stop[0]:
        rows = y0 + (y1 - y0) * share.ravel()
        spots = [Spot(x, float(y), "middle", 90.0) for x in (x1 + 4.0, x0 - 1.5, x1 + 7.0, x0 - 4.5) for y in rows]
    else:
        columns = x0 + (x1 - x0) * share.ravel()
        spots = [Spot(float(x), y) for y in (y1 + 1.8, y0 - 4.3, y1 + 4.0, y0 - 7.0) for x in columns]
    if not layout.put(text, spots, within=inside):
        beyond = inside.bounds[3] + np.arange(8.0, 30.0, 4.0)
        layout.put(
            text, [Spot(float(x), float(y)) for y in beyond for x in ((x0 + x1) / 2.0 + np.arange(0.0, 40.0, 5.0))]
        )


def joint_notes(job: Job, face: Face) -> list[str]:
    """What a face of the web blank says of the joint."""
    if job.joint is None:
        return []
    padded = any(pad.face == face.name for pad in job.pads)
    first = "; glue the pad on and thin it out before the edges are cut" if padded else ""
    return [f"Joint: {job.wording.length(job.joint.across)} thick over the pin's tube, which is engraved{first}"]


def _tube_lines(tube: Tube, inside: shapely.Polygon) -> list[Array]:
    """The tube's outline and its axis, as far as they lie inside a piece; a pin along the web comes out of its end."""
    (a, h), (b, stop) = tube.start, tube.stop
    out = (a + np.sign(a - b) * OUT, h)
    ring = replace(tube, start=out).outline()
    lines = (np.vstack([ring, ring[:1]]), np.array([out, (b, stop)]))
    return [part for line in lines for part in _inside(line, inside)]


def _inside(line: Array, piece: shapely.Polygon) -> list[Array]:
    """The parts of a line that run inside a piece."""
    found: BaseGeometry = piece.intersection(shapely.LineString(line))
    merged = shapely.line_merge(found) if found.geom_type == "MultiLineString" else found
    return [np.asarray(part.coords) for part in getattr(merged, "geoms", [merged]) if part.length > 0.5]


def _across(piece: shapely.Polygon, s: float) -> Array:
    """The line across a piece at s."""
    _, low, _, high = piece.bounds
    return max(_inside(np.array([[s, low - 1.0], [s, high + 1.0]]), piece), key=lambda line: float(np.ptp(line[:, 1])))


def _pad_sheet(job: Job, end: JointEnd, tube: Tube, pad: Pad, hand: Hand) -> Drawing:
    flip = np.array([-1.0 if pad.face == "front" else 1.0, 1.0])
    whole = shapely.Polygon(pad.plan)
    outline = thin(np.vstack([pad.plan, pad.plan[:1]]) * flip)[:-1]
    inside, layout = shapely.Polygon(outline), Layout()
    layout.keep_clear(inside.exterior)
    x0, low, x1, _ = whole.bounds
    marks = [*_tube_lines(tube, whole), _across(whole, end.thickening.place(end.thickening.full))]
    marks += _inside(np.array([[x0 - 1.0, 0.0], [x1 + 1.0, 0.0]]), whole)
    pin = blank.register_diameter(*job.web.faces, job.register)
    holes = tuple(
        Hole(float(x), float(y), pin)
        for x, y in job.register * flip
        if inside.contains(shapely.Point(x, y).buffer(pin))
    )
    for mark in marks:
        layout.keep_clear(shapely.LineString(mark * flip))
    for hole in holes:
        layout.keep_clear(shapely.Point(hole.x, hole.y).buffer(pin / 2.0 + 0.5))
    arrow = _write_plan(job, end, pad, flip, layout, inside, hand)
    profile = _profile(end, tube, pad, job.web.plain, flip, low - APART - pad.thickness)
    foot = _write_profile(job, end, pad, profile, layout)
    heads = (job.record.name, f"joint pad, {pad.face.upper()} face, {hand.upper()} hand")
    anchor: Anchor = "end" if flip[0] < 0 else "start"  # seen from the front the pad starts at the right
    layout.write_notes(heads, _notes(job, end, pad), x0 * flip[0], foot - 4.0, anchor=anchor)
    drawing = Drawing(
        name=f"joint-pad-{pad.face}",
        title=f"Joint pad, {pad.face} face",
        stamp=job.stamp,
        strokes=(
            Stroke(outline, Role.CUT_OUTSIDE, closed=True),
            *(Stroke(mark * flip, Role.ENGRAVE) for mark in marks),
            *arrow,
            *profile,
        ),
        holes=holes,
        labels=tuple(layout.labels),
        notes=tuple(_notes(job, end, pad)),
    )
    return drawing if hand == "right" else drawing.mirrored(hand)


def _write_plan(
    job: Job, end: JointEnd, pad: Pad, flip: Array, layout: Layout, inside: shapely.Polygon, hand: Hand
) -> list[Stroke]:
    """What must stay on the piece, and the names of its two ends; the strokes of an arrow that points up."""
    x0, y0, x1, y1 = inside.bounds
    share = np.linspace(-0.5, 0.5, 41)
    across = (x0 + x1) / 2.0 + (x1 - x0) * share[np.abs(share).argsort()]
    rows = np.arange(y1 - 6.0, y0 + 2.0, -2.0)
    grid = [Spot(float(x), float(y)) for y in rows for x in across]
    thins = end.thickening.place(end.thickening.full) * flip[0]
    beside = [Spot(thins + aside, float(y), "middle", 90.0) for aside in (-1.5, 4.5) for y in np.linspace(y0, y1, 21)]
    texts = [(f"PAD, {pad.face.upper()} FACE, {hand} hand, {job.stamp}", grid), ("thins out", beside)]
    texts.append(("web line", [Spot(float(x), up) for up in (1.8, -1.8 - PLAIN) for x in across[::-1]]))
    if end.stated.pin_axis == "along" and job.tube is not None:
        (first, h), (last, _) = job.tube.start, job.tube.stop
        along = np.linspace(first, last, 41)[5:-5] * flip[0]
        texts.append(("pin axis", [Spot(float(x), h + up) for up in (1.6, -1.6 - PLAIN) for x in along]))
    elif job.tube is not None:
        at = job.tube.start[0] * flip[0]
        texts.append(("pin axis", [Spot(at + x, float(y), "middle", 90.0) for x in (-1.5, 4.5) for y in rows]))
    for text, spots in texts:
        for height in (PLAIN, SMALL):
            if layout.put(text, spots, height=height, within=inside):
                break
    left, right = ("ROOT", "TIP") if flip[0] > 0 else ("TIP", "ROOT")
    layout.put(left, [Spot(x0 - 2.5, (y0 + y1) / 2.0, "middle", 90.0)], height=PLAIN)
    layout.put(right, [Spot(x1 + 2.5 + PLAIN, (y0 + y1) / 2.0, "middle", 90.0)], height=PLAIN)
    found = (layout.put_up_arrow(float(x), float(y), inside) for y in rows for x in across)
    return next((arrow for arrow in found if arrow), []) or layout.put_up_arrow((x0 + x1) / 2.0, y1 + 8.0)


def _profile(end: JointEnd, tube: Tube, pad: Pad, sheet: float, flip: Array, base: float) -> list[Stroke]:
    """The pad seen on its upper edge, the side that is glued along y = `base`; under it the rest of the web."""
    thick = end.thickening
    first = float(pad.outer[:, 0].min() if thick.end == "inner" else pad.outer[:, 0].max())
    thins, last = (thick.place(v) for v in (thick.full, thick.full + thick.taper))
    beyond = thick.thickness - pad.thickness  # from the glued side to the web's other face

    def on(points: list[tuple[float, float]]) -> Array:
        return np.array(points) * flip + [0.0, base]

    ring = on([(first, 0.0), (last, 0.0), (thins, pad.thickness), (first, pad.thickness)])
    other = on([(first, -beyond), (thins, -beyond), (last, -sheet)])
    radius = tube.across / 2.0
    middle = pad.thickness - radius
    a, b = tube.start[0], tube.stop[0]
    if a != b:
        pin = [[(b, middle - radius), (b, middle + radius)], [(a, middle), (b, middle)]]
    else:
        turn = np.radians(np.arange(0.0, 361.0, 5.0))
        pin = [list(zip(a + radius * np.cos(turn), middle + radius * np.sin(turn), strict=True))]
        pin += [[(a - 2.0, middle), (a + 2.0, middle)], [(a, middle - 2.0), (a, middle + 2.0)]]
    lines = [other, *(on(line) for line in pin)]
    return [Stroke(ring, Role.CUT_OUTSIDE, closed=True), *(Stroke(line, Role.NOTE) for line in lines)]


def _write_profile(job: Job, end: JointEnd, pad: Pad, strokes: list[Stroke], layout: Layout) -> float:
    """What the profile shows, over it and beside it; the height of its foot."""
    points = np.concatenate([stroke.points for stroke in strokes])
    (x0, y0), (x1, y1) = points.min(axis=0), points.max(axis=0)
    for stroke in strokes:
        layout.keep_clear(shapely.LineString(stroke.points))
    words = job.wording
    text = f"profile: pad {words.length(pad.thickness)} on {words.length(job.web.plain)} sheet"
    layout.put(text, [Spot((x0 + x1) / 2.0, y1 + 2.0)], height=SMALL)
    axis = [Spot(x0 - 2.0, y1 - end.across / 2.0 - 1.25, "end"), Spot(x1 + 2.0, y1 - end.across / 2.0 - 1.25, "start")]
    thick_end_right = strokes[0].points[0, 0] > (x0 + x1) / 2.0
    layout.put("pin axis", axis[::-1] if thick_end_right else axis, height=SMALL)
    return float(y0)


def _notes(job: Job, end: JointEnd, pad: Pad) -> list[str]:
    """What must be known to make the pad."""
    stated, words = end.stated, job.wording
    lies = "along the web" if stated.pin_axis == "along" else "upright"
    return [
        f"{words.length(pad.thickness)} {stated.pad or job.record.web.foam}, glued to the {pad.face} face of the "
        f"{words.length(job.web.plain)} sheet",
        f"Full thickness for {words.length(stated.length)}, then thinned to nothing over {words.length(stated.taper)}",
        f"The web becomes {words.length(end.across)} over a pin of {words.length(end.pin)}, its tube and overwrap",
        f"The pin lies {lies}: the tube takes the place of sheet and pads between its lines",
        f"As seen from the {pad.face}; the outline holds both sides of the pad, its long edges get the web's bevel",
        "Below it the profile, seen on the upper edge, outer side up",
        f"Wing file revision {job.stamp}",
    ]
