"""The web blank for a router: what to cut through, and where each face ends."""

from __future__ import annotations

import numpy as np
import shapely
from numpy.typing import NDArray

from ...geom.blank import Face
from ...geom.drawing import Drawing, Hand, Hole, Role, Stroke, thin
from ..describe.strips import strip_notes
from ..job import Job
from ..wording import degrees
from .face_lines import name_beyond, name_line
from .joint import joint_notes
from .layout import Layout, Spot
from .web import PLAIN, pin_diameter, write_titles

Array = NDArray[np.float64]

_CLEAR = 0.1  # a line nearer to the cut than this is lost in it, mm
_LEAST = 5.0  # a shorter stretch of line is no help, mm


def web_cut(job: Job, hand: Hand = "right") -> list[Drawing]:
    """The blank as a router cuts it, seen from the rear: the outline of both faces together, and the lines within."""
    front, rear = (shapely.Polygon(np.concatenate(_edges(face))) for face in job.web.faces)
    whole = front.union(rear)
    assert isinstance(whole, shapely.Polygon)  # the two faces lie over one another
    layout = Layout()
    layout.keep_clear(whole.exterior)
    strokes = [Stroke(np.asarray(whole.exterior.coords)[:-1], Role.CUT_OUTSIDE, closed=True)]
    pin = pin_diameter(job)
    holes = tuple(Hole(float(x), float(y), pin) for x, y in job.register)
    for hole in holes:
        layout.keep_clear(shapely.Point(hole.x, hole.y).buffer(pin / 2.0 + 0.5))
    lines = [(face.name, line) for face in job.web.faces for line in _within(face, whole)]
    for _, line in lines:
        strokes.append(Stroke(line, Role.ENGRAVE))
        layout.keep_clear(shapely.LineString(line))
    for name, line in lines:
        if not name_line(layout, name, line, whole):
            name_beyond(layout, name, line)
    strokes += _write_inside(job, layout, whole, hand)
    heads = [job.record.name, f"web blank, both faces, {hand.upper()} hand"]
    notes = _notes(job)
    write_titles(layout, whole, heads, notes, hand)
    drawing = Drawing(
        name="web-cut",
        title="Web blank, both faces",
        stamp=job.stamp,
        strokes=tuple(strokes),
        holes=holes,
        labels=tuple(layout.labels),
        notes=tuple(notes),
    )
    return [drawing if hand == "right" else drawing.mirrored(hand)]


def _edges(face: Face) -> tuple[Array, Array]:
    """The bottom edge outwards and the top edge back."""
    return thin(face.bottom), thin(face.top[::-1])


def _within(face: Face, whole: shapely.Polygon) -> list[Array]:
    """The stretches of a face's edges and ends that run inside the blank's outline."""
    bottom, top = _edges(face)
    ends = np.array([bottom[-1], top[0]]), np.array([top[-1], bottom[0]])
    lost = whole.exterior.buffer(_CLEAR)
    parts = [p for line in (bottom, top, *ends) for p in shapely.get_parts(shapely.LineString(line).difference(lost))]
    return [shapely.get_coordinates(part) for part in parts if part.length > _LEAST]


def _write_inside(job: Job, layout: Layout, whole: shapely.Polygon, hand: Hand) -> list[Stroke]:
    """What must stay on the piece, its two ends and which way is up."""
    x0, _, x1, _ = whole.bounds
    y1, y2 = (job.wording.plain(y) for y in job.record.web.ends)
    middle = {x: _middle(whole, x) for x in (x0 + 1.0, x1 - 1.0)}
    for text, x, h, way in (
        (f"ROOT y {y1}", x0 - 3.0, middle[x0 + 1.0], -1.0),
        (f"TIP y {y2}", x1 + 3.0 + PLAIN, middle[x1 - 1.0], 1.0),
    ):
        layout.put(text, [Spot(x + way * d, h, "middle", 90.0) for d in np.arange(0.0, 20.0, 2.0)], height=PLAIN)
    places = np.arange(x0 + 20.0, x1 - 20.0, 5.0)
    spots = (Spot(float(x), _middle(whole, x) + off, "middle") for off in (-1.5, 4.0, -7.0) for x in places)
    layout.put(f"REAR FACE UP, {hand} hand, {job.stamp}", spots, height=PLAIN, within=whole)
    for x in places:
        if arrow := layout.put_up_arrow(float(x), _middle(whole, x), whole):
            return arrow
    beside = (layout.put_up_arrow(float(x), middle[x0 + 1.0]) for x in np.arange(x0 - 14.0, x0 - 60.0, -3.0))
    return next((arrow for arrow in beside if arrow), [])


def _middle(whole: shapely.Polygon, x: float) -> float:
    """Half-way up the blank at x."""
    _, low, _, high = whole.bounds
    _, y0, _, y1 = whole.intersection(shapely.LineString([[x, low - 1.0], [x, high + 1.0]])).bounds
    return (y0 + y1) / 2.0


def _notes(job: Job) -> list[str]:
    """What must be known to use the sheet."""
    stated, words = job.record.web, job.wording
    return [
        f"{words.length(stated.thickness)} {stated.foam}, cant {degrees(np.degrees(job.cant))}, "
        f"bond line {words.length(stated.bond)}",
        "As seen from the rear; the outline is that of both faces together, to be cut through square to the sheet",
        "Each face ends at the lines named after it, elsewhere at the outline as cut: work each edge from face to face",
        *strip_notes(job),
        *joint_notes(job, job.web.faces[1]),
        f"Wing file revision {job.stamp}",
    ]
