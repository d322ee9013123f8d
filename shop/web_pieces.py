"""The web's plain sheet, in one piece or in several that are scarfed together, as it is cut from stock."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from ..geom import blank, scarf
from ..geom.drawing import Drawing, Hand, Hole, Role, Stroke, thin
from .job import Job
from .pieces import Piece, foam_name
from .records.cutting import Cutting
from .sheets.face_lines import name_line
from .sheets.layout import Layout, Spot
from .strips import ramp

Array = NDArray[np.float64]

LEAST, SMALL, PLAIN = 2.2, 2.5, 3.0  # heights of lettering
_CLEAR = 5.0  # mm that a scarf keeps from what ends or is pinned near it
_MARK = 40.0  # mm from a scarf to the marks it is set by
_SAME = 0.1  # mm within which a face's line is lost in the cut
_FAR = 1e5  # mm, beyond everything


class TooShort(ValueError):
    """A sheet on which the web goes only with scarfs that find no place."""

    def __init__(self, fault: scarf.NoPlace, length: float, web: float) -> None:
        super().__init__(str(fault))
        self.low, self.high, self.length, self.web = fault.low, fault.high, length, web


def web_pieces(job: Job, cutting: Cutting, longest: float, hand: Hand) -> list[Piece]:
    """The plain web sheet in as many pieces as its stock asks for, as seen from the rear.

    Raises
    ------
    TooShort
        If a scarf finds no place.
    """
    web, half = job.web, job.web.plain / 2.0
    survey = web.survey
    faces = [
        blank.layer(web.plane, web.top, web.bottom, np.full_like(survey.s, n), name)
        for n, name in ((-half, blank.FACES[0]), (half, blank.FACES[1]))
    ]
    front, rear = (shapely.Polygon(face.outline()) for face in faces)
    x0, _, x1, _ = front.union(rear).bounds
    long = cutting.scarf * web.plain
    try:
        joints = scarf.places(x0, x1, longest=longest, scarf=long, keep_off=_keep_off(job))
    except scarf.NoPlace as fault:
        raise TooShort(fault, long, x1 - x0) from None
    bounds = [-np.inf, *joints, np.inf]
    count = len(bounds) - 1
    out = []
    for i in range(count):
        start, stop = bounds[i], bounds[i + 1] + long
        sheet = _Web(job, front, rear, hand, f" {i + 1} of {count}" if count > 1 else "")
        out.append(sheet.piece(start, stop, [(p, p + long) for p in joints if start <= p < stop]).of_hand(hand))
    return out


def _keep_off(job: Job) -> list[tuple[float, float]]:
    """Stretches of s that no scarf may touch: ends of strips, the joint, register pins, changes of the saw."""
    pin = blank.register_diameter(*job.web.faces, job.register) / 2.0
    off = [(float(s) - pin, float(s) + pin) for s, _ in job.register]
    if job.record.caps is not None:
        off += [(layer.stop, layer.stop + ramp(job.record.caps)) for layer in job.layers if not layer.whole]
    if job.joint is not None and job.tube is not None:
        end, along = job.joint.thickening, job.tube.outline()[:, 0]
        ends = [end.place(0.0), end.place(end.full + end.taper), float(along.min()), float(along.max())]
        off.append((min(ends), max(ends)))
    off += [(run.start, run.start) for cut in (job.web.top, job.web.bottom) for run in cut.runs[1:]]
    return [(low - _CLEAR, high + _CLEAR) for low, high in off]


@dataclass
class _Web:
    """A piece of the web in the making; places are (s, h), as one looks at the rear face of a right-hand panel."""

    job: Job
    front: shapely.Polygon
    rear: shapely.Polygon
    hand: Hand
    which: str

    def piece(self, start: float, stop: float, joints: list[tuple[float, float]]) -> Piece:
        """What lies between two places s, with the scarfs at its ends."""
        window = shapely.box(max(start, -_FAR), -_FAR, min(stop, _FAR), _FAR)
        whole = _one(self.front.union(self.rear))
        shape = _one(whole.intersection(window))
        ring = thin(np.asarray(shape.exterior.coords))[:-1]
        inside, layout = shapely.Polygon(ring), Layout()
        layout.keep_clear(inside.exterior)
        ends = [
            (face, line)
            for face, own in zip(blank.FACES, (self.front, self.rear), strict=True)
            for line in self._face_lines(own, whole, inside)
        ]
        lines = [line for _, line in ends]
        pin = blank.register_diameter(*self.job.web.faces, self.job.register)
        holes = tuple(Hole(x, y, pin) for x, y in self.job.register.tolist() if inside.contains(shapely.Point(x, y)))
        for line in lines:
            layout.keep_clear(shapely.LineString(line))
        for hole in holes:
            layout.keep_clear(shapely.Point(hole.x, hole.y).buffer(pin / 2.0 + 0.5))
        scarfs = []
        for low, high in joints:
            lines += self._scarf_lines(low, high, inside, layout)
            scarfs.append(
                self._scarf_texts(low, high, start == low, self._name_line(low, high, start == low, inside, layout))
            )
        self._letter(inside, layout, bool(np.isinf(start)), bool(np.isinf(stop)))
        beside = []
        for (low, high), texts in zip(joints, scarfs, strict=True):
            left = [text for text in texts if not self._put_near(text, (low + high) / 2.0, inside, layout)]
            beside += [f"{self._name}, {text}" for text in left]
        for face, line in ends:
            if not name_line(layout, face, line, inside):
                at = self.job.wording.plain(float(line[:, 0].mean()))
                beside.append(f"{self._name}, inner line at s {at}: the {face} face ends there")
        strokes = (Stroke(ring, Role.CUT_OUTSIDE, closed=True), *(Stroke(line, Role.ENGRAVE) for line in lines))
        title = f"Web sheet{self.which}"
        name = "web-sheet" + self.which.replace(" of ", "-").replace(" ", "-")
        drawing = Drawing(name, title, self.job.stamp, "right", strokes, holes, tuple(layout.labels))
        return Piece(drawing, foam_name(self.job, self.job.record.web.foam), self.job.web.plain, tuple(beside))

    def _face_lines(self, face: shapely.Polygon, whole: shapely.Polygon, inside: shapely.Polygon) -> list[Array]:
        """The edges of a face where they run inside the envelope: what the bevel is planed to."""
        rim = face.exterior.difference(whole.exterior.buffer(_SAME)).intersection(inside.buffer(-_SAME))
        return [thin(np.asarray(part.coords)) for part in _lines(rim) if part.length > 5.0]

    @property
    def _name(self) -> str:
        return f"WEB{self.which.upper()}, {self.hand} hand"

    def _scarf_lines(self, low: float, high: float, inside: shapely.Polygon, layout: Layout) -> list[Array]:
        """Both ends of the slope, a line to set the two pieces by, and a mark on it beyond either end."""
        middle = self._middle((low + high) / 2.0)
        tall = 0.15 * (self.rear.bounds[3] - self.rear.bounds[1])
        lines = [np.array([[s, -_FAR], [s, _FAR]]) for s in (low, high)]
        lines += [np.array([[low - _MARK, middle], [high + _MARK, middle]])]
        lines += [np.array([[s, middle - tall], [s, middle + tall]]) for s in (low - _MARK, high + _MARK)]
        room = inside.buffer(-_SAME)
        seen = (room.intersection(shapely.LineString(line)) for line in lines)
        found = [np.asarray(part.coords) for shape in seen for part in _lines(shape)]
        for line in found:
            layout.keep_clear(shapely.LineString(line))
        return found

    def _name_line(self, low: float, high: float, outer: bool, inside: shapely.Polygon, layout: Layout) -> bool:
        """Write along the line that a scarf is planed from which face it is on, if there is room for it."""
        line, texts = (high, ("REAR, this face", "REAR")) if outer else (low, ("FRONT, other face", "FRONT"))
        offs, rows = (-2.0, 4.6, -3.0, 5.6), np.linspace(inside.bounds[1], inside.bounds[3], 40)
        spots = [Spot(line + off, float(h), "middle", 90.0) for off in offs for h in rows]
        tries = ((text, height) for text in texts for height in (SMALL, LEAST))
        return any(layout.put(text, spots, height=height, within=inside) for text, height in tries)

    def _scarf_texts(self, low: float, high: float, outer: bool, named: bool) -> tuple[str, ...]:
        """What is planed, on the piece towards the tip (`outer`) or towards the root of a scarf.

        The joint runs from s = low on the front face to s = high on the rear: the inner piece is longest on the rear
        face, so that its front is planed; the outer one is longest on the front face, so that its rear is.
        """
        words, end = self.job.wording, "root" if outer else "tip"
        line, feather = (high, low) if outer else (low, high)
        planed, kept = ("REAR", "FRONT") if outer else ("FRONT", "REAR")
        sides = {"REAR": "this side", "FRONT": "the other side"}
        return (
            f"scarf 1 in {(high - low) / self.job.web.plain:g}: plane the {planed} face ({sides[planed]}) "
            f"from the line s {words.plain(line)} to the {end} end",
            f"feather edge: {end} end, s {words.plain(feather)}, {kept} face ({sides[kept]})",
            *(() if named else (f"line s {words.plain(line)}: {planed} face ({sides[planed]})",)),
            f"set with the two marks {words.length(high - low + 2.0 * _MARK)} apart",
        )

    def _put_near(self, text: str, at: float, inside: shapely.Polygon, layout: Layout) -> bool:
        """Write a text where there is room for it nearest to s; False if there is none within reach."""
        x0, y0, x1, y1 = inside.bounds
        s, h = np.meshgrid(np.arange(max(x0, at - 350.0), min(x1, at + 350.0), 5.0), np.arange(y0, y1, 1.0))
        places = np.column_stack([s.ravel(), h.ravel()])
        order = np.hypot(places[:, 0] - at, places[:, 1] - self._middle(at)).argsort(kind="stable")
        return layout.put_within(text, places[order], inside, heights=(SMALL, LEAST))

    def _middle(self, s: float) -> float:
        """The web line's height where it lies well inside the sheet at s, else mid-height."""
        both = self.front.intersection(self.rear)
        _, low, _, high = both.intersection(shapely.LineString([[s, -_FAR], [s, _FAR]])).bounds
        return 0.0 if low + 0.3 * (high - low) < 0.0 < high - 0.3 * (high - low) else (low + high) / 2.0

    def _letter(self, inside: shapely.Polygon, layout: Layout, root: bool, tip: bool) -> None:
        x0, y0, x1, y1 = inside.bounds
        rows = np.linspace(y0, y1, 24)[1:-1]
        for text, wanted, x in (("ROOT", root, x0 + 6.0), ("TIP", tip, x1 - 3.0)):
            if wanted:
                spots = [Spot(x + d, y, "middle", 90.0) for d in (0.0, -2.0, 2.0) for y in rows]
                layout.put(text, spots, within=inside)
        places = np.linspace(x0, x1, 60)[3:-3]
        spots = [Spot(float(x), float(y)) for x in places[np.abs(places - places.mean()).argsort()] for y in rows]
        whole = f"{self._name}, seen from the rear, UP this way, {self.job.stamp}"
        short = f"{self._name}, rear, UP, {self.job.stamp}"
        tries = ((whole, PLAIN), (whole, SMALL), (short, SMALL), (short, LEAST))
        any(layout.put(text, spots, height=height, within=inside) for text, height in tries)


def _one(shape: BaseGeometry) -> shapely.Polygon:
    """The largest part of a shape, which is all of it but for specks."""
    parts = [part for part in getattr(shape, "geoms", [shape]) if isinstance(part, shapely.Polygon)]
    return max(parts, key=lambda part: part.area)


def _lines(shape: BaseGeometry) -> Iterable[shapely.LineString]:
    merged = shapely.line_merge(shape) if shape.geom_type == "MultiLineString" else shape
    return (part for part in getattr(merged, "geoms", [merged]) if isinstance(part, shapely.LineString) and part.length)
