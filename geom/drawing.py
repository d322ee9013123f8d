"""A full-size drawing: strokes, holes and labels in mm, each with its role.

A drawing speaks to anything that listens like a `Pen`: a file format, or a ruler that measures what passes.
x runs to the right and y up, as on the sheet that is taped to the foam.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from enum import StrEnum
from functools import cached_property
from typing import Literal, Protocol

import numpy as np
import shapely
from numpy.typing import ArrayLike, NDArray

from . import lettering

DIGITS = 3  # decimals of a coordinate in every file: a micrometre, whatever a machine's last bits are

Anchor = Literal["start", "middle", "end"]
Hand = Literal["right", "left", "both"]

_FLIPPED: dict[Anchor, Anchor] = {"start": "end", "middle": "middle", "end": "start"}


class Role(StrEnum):
    """What a mark is for; one layer, one colour and one line width in every format."""

    CUT_OUTSIDE = "cut outside"
    CUT_INSIDE = "cut inside"
    ENGRAVE = "engrave"
    FOLD = "fold"
    NOTE = "note"


@dataclass(frozen=True)
class Stroke:
    """A polyline (k, 2) in mm; a closed one does not repeat its first point.

    A `frame` only bounds a drawing: no page is printed for its sake.
    """

    points: NDArray[np.float64]
    role: Role
    closed: bool = False
    frame: bool = False


@dataclass(frozen=True)
class Hole:
    """A round hole about (x, y)."""

    x: float
    y: float
    diameter: float
    role: Role = Role.CUT_INSIDE


@dataclass(frozen=True)
class Label:
    """A line of text: baseline from (x, y) at `angle` degrees, capitals `height` mm tall.

    Lines of the drawing's title and notes are numbered by `paragraph`, from 1: they belong to no place of the shape,
    so that a printed page may set them elsewhere. All other lines have 0.
    """

    text: str
    x: float
    y: float
    height: float = 3.0
    angle: float = 0.0
    anchor: Anchor = "start"
    role: Role = Role.NOTE
    paragraph: int = 0

    def place(self, points: ArrayLike) -> NDArray[np.float64]:
        """Points (k, 2) of a line of text that starts at (0, 0) along +x, to where the label stands."""
        back = {"start": 0.0, "middle": 0.5, "end": 1.0}[self.anchor] * lettering.width(self.text, self.height)
        c, s = np.cos(np.radians(self.angle)), np.sin(np.radians(self.angle))
        moved = (np.asarray(points, dtype=float) - [back, 0.0]) @ np.array([[c, s], [-s, c]])
        return np.asarray(moved + np.array([self.x, self.y]))

    def strokes(self) -> lettering.Strokes:
        """Polylines of the text where it stands on the sheet, to the micrometre."""
        return self._strokes

    @cached_property
    def _strokes(self) -> lettering.Strokes:
        placed = self.place(lettering.points(self.text, self.height))
        return lettering.split(self.text, np.round(placed, DIGITS) + 0.0)

    def box(self) -> shapely.Polygon:
        """Rectangle that the text covers: its `lettering.width` by its `lettering.extent`."""
        long = lettering.width(self.text, self.height)
        low, high = lettering.extent(self.text)
        corners = np.array([[0.0, low], [1.0, low], [1.0, high], [0.0, high]]) * [long, self.height]
        return shapely.Polygon(self.place(corners))


class Pen(Protocol):
    """What listens to a drawing."""

    def stroke(self, stroke: Stroke) -> None:
        """Take a polyline."""

    def hole(self, hole: Hole) -> None:
        """Take a round hole."""

    def label(self, label: Label) -> None:
        """Take a line of text."""


@dataclass(frozen=True)
class Drawing:
    """One full-size drawing.

    Attributes
    ----------
    name
        Short, unique in a job, fit for a file name: ``web-front``.
    title
        What the builder reads: ``Web blank, front face``.
    hand
        The panel's side it serves; ``both`` when one drawing serves either.
    stamp
        The wing file's revision.
    notes
        What must be known to use it, line by line; also written beside the shape.
    """

    name: str
    title: str
    stamp: str
    hand: Hand = "right"
    strokes: tuple[Stroke, ...] = field(default=())
    holes: tuple[Hole, ...] = field(default=())
    labels: tuple[Label, ...] = field(default=())
    notes: tuple[str, ...] = field(default=())

    def play(self, pen: Pen) -> None:
        """Hand every mark to `pen`, outlines first."""
        for stroke in self.strokes:
            pen.stroke(stroke)
        for hole in self.holes:
            pen.hole(hole)
        for label in self.labels:
            pen.label(label)

    def bounds(self) -> tuple[float, float, float, float]:
        """Least and largest x and y: (x0, y0, x1, y1), lettering included."""
        ruler = _Ruler()
        self.play(ruler)
        lo, hi = ruler.low, ruler.high
        return float(lo[0]), float(lo[1]), float(hi[0]), float(hi[1])

    def mirrored(self, hand: Hand) -> Drawing:
        """Return the same drawing for the other side: x negated, text still readable."""
        flip = np.array([-1.0, 1.0])
        return replace(
            self,
            hand=hand,
            strokes=tuple(replace(s, points=s.points[::-1] * flip) for s in self.strokes),
            holes=tuple(replace(h, x=-h.x) for h in self.holes),
            labels=tuple(replace(t, x=-t.x, angle=-t.angle, anchor=_FLIPPED[t.anchor]) for t in self.labels),
        )


class _Ruler:
    """A pen that only keeps the bounds of what it hears."""

    def __init__(self) -> None:
        self.low = np.full(2, np.inf)
        self.high = np.full(2, -np.inf)

    def _take(self, points: ArrayLike) -> None:
        points = np.asarray(points, dtype=float)
        self.low = np.minimum(self.low, points.min(axis=0))
        self.high = np.maximum(self.high, points.max(axis=0))

    def stroke(self, stroke: Stroke) -> None:
        self._take(stroke.points)

    def hole(self, hole: Hole) -> None:
        r = hole.diameter / 2.0
        self._take([[hole.x - r, hole.y - r], [hole.x + r, hole.y + r]])

    def label(self, label: Label) -> None:
        self._take(label.box().exterior.coords)


def thin(points: NDArray[np.float64], tolerance: float = 0.004) -> NDArray[np.float64]:
    """Drop the points of an open polyline (k, 2) that lie within `tolerance` mm of what is left.

    Examples
    --------
    >>> thin(np.array([[0.0, 0.0], [1.0, 0.001], [2.0, 0.0], [2.0, 5.0]])).tolist()
    [[0.0, 0.0], [2.0, 0.0], [2.0, 5.0]]
    """
    return np.asarray(shapely.simplify(shapely.LineString(points), tolerance).coords)
