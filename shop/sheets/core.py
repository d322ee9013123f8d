"""The wire templates on paper: the boards for both ends of each bay, and all that two people with a bow must know."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np
import shapely
from numpy.typing import NDArray

from ...geom.block import PIN
from ...geom.drawing import Anchor, Drawing, Hand, Hole, Role, Stroke, thin
from ...geom.profile import turned
from ...geom.template import Board, Mark
from ...geom.wire import Bay, End
from ..cores import BuiltCore
from ..job import Job
from .core_notes import notes
from .layout import Layout, Spot

Array = NDArray[np.float64]

SMALL, PLAIN = 2.5, 3.0  # heights of lettering
_LEAST = 2.2
_TICK = 3.0
_APART = 16.0  # mm between the boards of one sheet
_WIDE = 175.0  # mm, the longest line of notes
_ENDS = ("inner", "outer")
_ASIDE: tuple[tuple[float, Anchor], ...] = ((2.0, "start"), (-2.0, "end"))


def core_boards(job: Job, hand: Hand = "right") -> list[Drawing]:
    """One drawing for each bay: the boards of both ends, each as one looks at that end from outside the block."""
    return [_Sheet(job, made, index, hand).drawing() for made in job.cores for index in range(len(made.bays))]


@dataclass(frozen=True)
class _View:
    """A board as it lies on the sheet: its end, how that is turned and moved, and its shape there."""

    board: Board
    at: End
    sense: Array
    move: Array
    inside: shapely.Polygon
    end: int

    def on(self, points: Array) -> Array:
        """Places from the block's axes on the sheet."""
        return np.asarray(points * self.sense + self.move)

    def cut(self, line: Array) -> list[Array]:
        """The parts of a line on the sheet that lie on the board."""
        parts = self.inside.intersection(shapely.LineString(line))
        return [np.asarray(g.coords) for g in getattr(parts, "geoms", [parts]) if g.length > 0.3]


@dataclass
class _Sheet:
    """One drawing: the boards of the inner end, then those of the outer end, one below the other."""

    job: Job
    made: BuiltCore
    index: int
    hand: Hand
    layout: Layout = field(default_factory=Layout)
    strokes: list[Stroke] = field(default_factory=list)
    holes: list[Hole] = field(default_factory=list)

    @property
    def bay(self) -> Bay:
        return self.made.bays[self.index]

    def drawing(self) -> Drawing:
        foot, labels = 0.0, []
        for end, boards in enumerate(self.made.boards[self.index]):
            for board in boards:
                before, self.layout = self.layout, Layout()
                for label in before.labels:  # of the board above; nothing else reaches so far down
                    self.layout.keep_clear(label.box())
                foot = self._board(board, end, foot) - _APART
                labels += self.layout.labels
        sides = np.concatenate([stroke.points[:, 0] for stroke in self.strokes])
        said = notes(self.job, self.made, self.index, self.hand)
        self.layout = Layout(labels)
        # once mirrored, a left hand's notes start at the left as well
        start: tuple[float, Anchor] = (sides.min(), "start") if self.hand == "right" else (sides.max(), "end")
        heads, x = (self.job.record.name, said[0]), float(start[0])
        self.layout.write_notes(heads, said[1:], x, foot + 6.0, anchor=start[1], wide=_WIDE)
        drawing = Drawing(
            name=f"{self.made.name}-bay-{self.index + 1}",
            title=f"Core {self.made.number}, {self.made.stated.region}, bay {self.index + 1}",
            stamp=self.job.stamp,
            strokes=tuple(self.strokes),
            holes=tuple(self.holes),
            labels=tuple(self.layout.labels),
            notes=tuple(said),
        )
        return drawing if self.hand == "right" else drawing.mirrored(self.hand)

    def _board(self, board: Board, end: int, top: float) -> float:
        """Draw one board of one end with its highest mark at `top`; return how far down it reaches."""
        at = self.bay.ends[end]
        x0, z0, x1, z1 = at.block
        sense = np.array([1.0 if end == 0 else -1.0, 1.0])
        # both ends with the block's front at the same side of the sheet's edge, the outer one mirrored
        move = np.array([-sense[0] * (x0 + x1) / 2.0, top - max(z1, float(board.outline[:, 1].max()))])
        view = _View(board, at, sense, move, inside=shapely.Polygon(), end=end)
        ring = thin(view.on(np.concatenate([board.outline, board.outline[:1]])))[:-1]
        view = replace(view, inside=shapely.Polygon(ring))
        block = view.on(np.array([[x0, z0], [x1, z0], [x1, z1], [x0, z1]]))
        self.strokes += [Stroke(ring, Role.CUT_OUTSIDE, closed=True), Stroke(block, Role.NOTE, closed=True)]
        self.layout.keep_clear(view.inside.exterior)
        self.layout.keep_clear(shapely.LinearRing(block))
        self._pins(view)
        if not board.runs[0].straight:
            self._cross_lines(view)
        self._marks(view)
        self._name(view)
        self._front(block, float(sense[0]))
        return float(min(ring[:, 1].min(), block[:, 1].min()))

    def _front(self, block: Array, sense: float) -> None:
        """Say which edge of the block's outline is its front."""
        x, low, high = float(block[0, 0]), float(block[0, 1]), float(block[2, 1])
        away = -2.5 if sense > 0 else 1.5 + SMALL
        spots = [Spot(x + away, low + share * (high - low), "middle", 90.0) for share in (0.3, 0.7, 0.5, 0.1, 0.9)]
        self.layout.put("block's front", spots, height=SMALL)

    def _pins(self, view: _View) -> None:
        """The two pins and the level line through them, as far as the board reaches."""
        pins = view.on(view.at.pins)
        for x, z in pins:
            self.holes.append(Hole(float(x), float(z), PIN))
            self.layout.keep_clear(shapely.Point(x, z).buffer(PIN / 2.0 + 0.5))
        x0, _, x1, _ = view.inside.bounds
        for line in view.cut(np.array([[x0 - 1.0, pins[0, 1]], [x1 + 1.0, pins[0, 1]]])):
            self._engrave(line)

    def _cross_lines(self, view: _View) -> None:
        """Where the core begins and ends on the board: the face beside the web, and the tail."""
        region, at = self.made.region, view.at
        lines = []
        if region.kind != "whole":
            lines.append(("web", view.on(turned(region.face_at(at.y), self.bay.turn))))
        if region.kind != "nose":
            low, high = (at.profile.at(side * t) for side, t in zip((-1.0, 1.0), at.limits.stop, strict=True))
            away = 60.0 * (high - low) / np.linalg.norm(high - low)
            lines.append(("end of core", view.on(np.array([low - away, high + away]))))
        for text, across in lines:
            for line in view.cut(across):
                self._engrave(line)
                spots = [
                    Spot(float(x + aside), float(z - 1.2), anchor)
                    for share in (0.5, 0.3, 0.7, 0.15, 0.85)
                    for x, z in [line[0] + share * (line[-1] - line[0])]
                    for aside, anchor in _ASIDE
                ]
                self.layout.put(text, spots, height=SMALL, within=view.inside)

    def _marks(self, view: _View) -> None:
        """The sync marks: all ticks, then all numbers."""
        before = len(self.layout.labels)
        for mark in view.board.marks:
            place, way = view.on(mark.place), mark.inwards * view.sense
            for line in view.cut(np.array([place - 0.3 * way, place + _TICK * way]))[:1]:
                self._engrave(line)
        for mark in view.board.marks:
            self._number(mark, view)
        for label in self.layout.labels[before:]:  # no other text so near that a number might be read with it
            self.layout.keep_clear(label.box().buffer(2.0))

    def _number(self, mark: Mark, view: _View) -> None:
        """The number of a mark, on the board where there is room, else beside it."""
        place, way = view.on(mark.place), mark.inwards * view.sense
        aside = np.array([way[1], -way[0]])
        for within, far in ((view.inside, (5.6, 7.5, 9.5)), (None, (-3.5, -5.0, -7.0, -9.0, -12.0))):
            spots = [
                Spot(float(x), float(z - 0.43 * _LEAST))
                for d in far
                for shift in (0.0, 1.5, -1.5, 3.0, -3.0, 4.5, -4.5)
                for x, z in [place + d * way + shift * aside]
            ]
            if self.layout.put(str(mark.number), spots, height=_LEAST, within=within):
                return

    def _name(self, view: _View) -> None:
        """What must stay on the board: what it is, where the wire comes in and goes out, the level line."""
        made, end, run = self.made, _ENDS[view.end].upper(), ", ".join(r.name for r in view.board.runs)
        kind, bay, hand = made.stated.region, self.index + 1, f"{self.hand} hand, {self.job.stamp}"
        for texts in (
            (f"core {made.number} {kind}, bay {bay}, {end} end: {run}", hand),
            (f"core {made.number} {kind}", f"bay {bay} {end}: {run}", hand),
            (f"core {made.number} {kind}", f"bay {bay} {end}", run, self.hand, self.job.stamp),
        ):
            tried = len(self.layout.labels)
            if all(self._somewhere(text, view.inside) for text in texts):
                break
            if texts[-1] == hand:
                self.layout.take_back(tried)
        self._somewhere("level line", view.inside, near=float(view.on(view.at.pins)[0, 1]))
        for run_ in view.board.runs:
            centre, normals = view.on(run_.centre[view.end]), run_.normals[view.end] * view.sense
            for text, i, j in (("IN", 0, 1), ("OUT", -1, -2)):
                way = (centre[j] - centre[i]) / np.linalg.norm(centre[j] - centre[i])
                spots = [
                    Spot(float(x), float(z - 0.43 * SMALL))
                    for d in (3.5, 5.5, 8.0)
                    for along in (6.0, 10.0, 15.0, 2.0)
                    for x, z in [centre[i] + along * way + d * normals[i]]
                ]
                self.layout.put(text, spots, height=SMALL)

    def _somewhere(self, text: str, inside: shapely.Polygon, near: float | None = None) -> bool:
        """Write a text on a board where there is room, near its middle or just above or below a height."""
        x0, z0, x1, z1 = inside.bounds
        rows = np.linspace(z0, z1, 15)[1:-1] if near is None else np.array([near + 1.4, near - 4.0])
        places = np.stack(np.meshgrid(np.linspace(x0, x1, 17)[1:-1], rows), axis=-1).reshape(-1, 2)
        off = np.abs(places - [inside.centroid.x, inside.centroid.y]) @ [1.0, 3.0]
        return self.layout.put_within(text, places[np.argsort(off)], inside, heights=(PLAIN, SMALL, _LEAST))

    def _engrave(self, line: Array) -> None:
        self.strokes.append(Stroke(line, Role.ENGRAVE))
        self.layout.keep_clear(shapely.LineString(line))
