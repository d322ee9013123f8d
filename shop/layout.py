"""Finding room for lettering on a drawing, so that no text lies on another, on a hole or across a line."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

from shapely.geometry.base import BaseGeometry

from ..geom.drawing import Anchor, Label, Role

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
