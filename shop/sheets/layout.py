"""Finding room for lettering on a drawing, so that no text lies on another, on a hole or across a line."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from ...geom import lettering
from ...geom.drawing import Anchor, Label, Role, Stroke

_AIR = 0.8  # mm kept free round every text
_TITLE, _NOTE = 4.5, 3.0  # heights of lettering
LEADING, BETWEEN = 1.6, 0.4  # of notes: from line to line, and more after a paragraph, in heights of lettering


@dataclass(frozen=True)
class Spot:
    """A place where a label may stand."""

    x: float
    y: float
    anchor: Anchor = "middle"
    angle: float = 0.0


@dataclass
class Layout:
    """The labels placed so far, and what else is in their way."""

    labels: list[Label] = field(default_factory=list)
    _taken: list[BaseGeometry] = field(default_factory=list)

    def keep_clear(self, shape: BaseGeometry) -> None:
        """Let no later label touch `shape`."""
        self._taken.append(shape)

    def free(self, shape: BaseGeometry, within: BaseGeometry | None = None) -> bool:
        """Whether `shape`, with some air round it, touches nothing and, if asked, lies inside `within`."""
        roomy = shape.buffer(_AIR, join_style="mitre")
        if within is not None and not within.contains(roomy):
            return False
        return not (self._taken and shapely.intersects(self._taken, roomy).any())

    def put_within(
        self, text: str, places: NDArray[np.float64], within: BaseGeometry, *, heights: Iterable[float] = (2.5,)
    ) -> bool:
        """Write `text` level about the first of many places (k, 2) with room for it inside `within`.

        The heights of lettering are tried one after another; False, and nothing written, if none fits.
        """
        return any(self._put_first(text, places, np.zeros(len(places)), within, height) for height in heights)

    def put_along(
        self,
        texts: Sequence[str],
        line: NDArray[np.float64],
        within: BaseGeometry | None = None,
        *,
        every: float = np.inf,
        heights: Iterable[float] = (2.5,),
        off: Iterable[float] = (0.0,),
    ) -> int:
        """Write one of `texts` beside a line (k, 2), and again wherever it has run on for `every` mm.

        At each place the texts are tried in turn, each in all heights of lettering and at all distances `off` the
        nearest to the line that it can stand; returns at how many places there was room for one.
        """
        path = shapely.LineString(line)
        count = int(np.ceil(path.length / every)) or 1
        chunk = path.length / count
        shift = np.linspace(-0.5, 0.5, 2 * int(np.ceil(chunk / 6.0)) + 1)
        near = shift[np.abs(shift).argsort(kind="stable")] * chunk
        tries = [(text, height, far) for text in texts for height in heights for far in off]
        places = [(i + 0.5) * chunk + near for i in range(count)]
        return sum(any(self._put_beside(path, at, within, *what) for what in tries) for at in places)

    def _put_beside(
        self,
        path: shapely.LineString,
        at: NDArray[np.float64],
        within: BaseGeometry | None,
        text: str,
        height: float,
        off: float,
    ) -> bool:
        """Write a text beside a path at the first of the places along it with room on either side."""
        before, after = (shapely.get_coordinates(path.interpolate(np.clip(at + d, 0.0, path.length))) for d in (-1, 1))
        ways = after - before
        ways *= np.where(ways[:, :1] < 0.0, -1.0, 1.0)  # the text reads to the right, or upwards
        ways[(np.abs(ways[:, 0]) < 1e-9) & (ways[:, 1] < 0.0)] *= -1.0
        ways /= np.linalg.norm(ways, axis=1)[:, None]
        low, high = (height * by for by in lettering.extent(text))
        away = np.array([1.5 * _AIR + off - low, -1.5 * _AIR - off - high])  # baselines over and under the line
        across = np.column_stack([-ways[:, 1], ways[:, 0]])
        places = ((before + after) / 2.0)[:, None] + away[:, None] * across[:, None]
        angles = np.degrees(np.arctan2(ways[:, 1], ways[:, 0]))
        return self._put_first(text, places.reshape(-1, 2), np.repeat(angles, 2), within, height)

    def _put_first(
        self,
        text: str,
        places: NDArray[np.float64],
        angles: NDArray[np.float64],
        within: BaseGeometry | None,
        height: float,
    ) -> bool:
        """Write a text about the first of many places (k, 2), turned by an angle (k,), with room for it."""
        half = lettering.width(text, height) / 2.0 + _AIR
        low, high = (height * by for by in lettering.extent(text))
        corners = np.array([[-half, low - _AIR], [half, low - _AIR], [half, high + _AIR], [-half, high + _AIR]])
        c, s = np.cos(np.radians(angles)), np.sin(np.radians(angles))
        turned = np.stack(
            [
                corners[:, 0] * c[:, None] - corners[:, 1] * s[:, None],
                corners[:, 0] * s[:, None] + corners[:, 1] * c[:, None],
            ],
            axis=-1,
        )
        boxes = shapely.polygons(places[:, None] + turned)
        if within is None:
            room = np.full(len(boxes), True)
        else:
            shapely.prepare(within)
            room = shapely.contains(within, boxes)
        room[shapely.STRtree(self._taken).query(boxes, predicate="intersects")[0]] = False
        if not room.any():
            return False
        first = int(room.argmax())
        (x, y), angle = places[first].tolist(), float(angles[first])
        self.write(Label(text, x, y, height, angle, "middle"))
        return True

    def put(
        self,
        text: str,
        spots: Iterable[Spot],
        *,
        height: float = 2.5,
        role: Role = Role.NOTE,
        within: BaseGeometry | None = None,
    ) -> bool:
        """Write `text` at the first spot with room for it; False, and nothing written, if there is none."""
        for spot in spots:
            label = Label(text, spot.x, spot.y, height, spot.angle, spot.anchor, role)
            if self.free(label.box(), within):
                self.write(label)
                return True
        return False

    def write(self, label: Label) -> None:
        """Write a label where it stands, whatever is there."""
        self.labels.append(label)
        self._taken.append(label.box())

    def take_back(self, count: int) -> None:
        """Take back all labels but the first `count`, and leave their room to others."""
        gone = {label.box().wkb for label in self.labels[count:]}
        del self.labels[count:]
        self._taken = [shape for shape in self._taken if shape.wkb not in gone]

    def put_up_arrow(self, x: float, middle: float, within: BaseGeometry | None = None) -> list[Stroke]:
        """Draw an arrow that says which way is up, if there is room for it about (x, middle); no strokes otherwise."""
        box = shapely.box(x - 4.5, middle - 4.5, x + 4.5, middle + 4.5)
        if not self.free(box, within):
            return []
        foot, head = middle - 3.5, middle + 3.5
        shaft = np.array([[x - 3.0, foot], [x - 3.0, head]])
        barbs = np.array([[x - 4.2, head - 2.0], [x - 3.0, head], [x - 1.8, head - 2.0]])
        self.labels.append(Label("UP", x - 1.2, middle - 1.25, 2.5))
        self.keep_clear(box)
        return [Stroke(shaft, Role.NOTE), Stroke(barbs, Role.NOTE)]

    def write_block(self, lines: Iterable[tuple[str, float]], x: float, y: float, anchor: Anchor = "start") -> None:
        """Write lines (text, height) one below the other, the first one's capitals just under y."""
        above = 0.0
        for text, height in lines:
            y -= 1.2 * height + 0.5 * above
            self.write(Label(text, x, y, height, anchor=anchor))
            above = height

    def write_notes(
        self,
        heads: Sequence[str],
        notes: Sequence[str],
        x: float,
        y: float,
        *,
        anchor: Anchor = "start",
        wide: float = 150.0,
    ) -> None:
        """Write a drawing's title and, wrapped, its notes one below the other, beginning just under y."""
        texts = [*((text, _TITLE) for text in heads), *((text, _NOTE) for text in notes)]
        for number, (text, height) in enumerate(texts, start=1):
            for line in wrapped(text, height, wide):
                y -= LEADING * height
                self.write(Label(line, x, y, height, anchor=anchor, paragraph=number))
            y -= BETWEEN * height


def wrapped(text: str, height: float, wide: float) -> list[str]:
    """Break `text` at spaces into lines no longer than `wide` mm at a height of lettering, where that can be done.

    >>> wrapped("cut the web first", 3.0, 25.0)
    ['cut the', 'web first']
    """
    lines: list[str] = []
    space, room = lettering.width(" ", height), 0.0
    for word in text.split():
        long = lettering.width(word, height)
        if lines and long + space <= room:
            lines[-1] += f" {word}"
            room -= long + space
        else:
            lines.append(word)
            room = wide - long
    return lines
