"""Finding room for lettering on a drawing, so that no text lies on another, on a hole or across a line."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from ..geom import lettering
from ..geom.drawing import Anchor, Label, Role, Stroke

_AIR = 0.8  # mm kept free round every text


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
        return not any(roomy.intersects(other) for other in self._taken)

    def put_within(
        self, text: str, places: NDArray[np.float64], within: BaseGeometry, *, heights: Iterable[float] = (2.5,)
    ) -> bool:
        """Write `text` level about the first of many places (k, 2) with room for it inside `within`.

        The heights of lettering are tried one after another; False, and nothing written, if none fits.
        """
        shapely.prepare(within)
        taken = shapely.STRtree(self._taken)
        for height in heights:
            half = lettering.width(text, height) / 2.0 + _AIR
            low, high = (height * by for by in lettering.extent(text))
            x, y = places.T
            boxes = shapely.box(x - half, y + low - _AIR, x + half, y + high + _AIR)
            room = shapely.contains(within, boxes)
            room[taken.query(boxes, predicate="intersects")[0]] = False
            if room.any():
                at = places[int(room.argmax())]
                self.write(Label(text, float(at[0]), float(at[1]), height, anchor="middle"))
                return True
        return False

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
