"""What the flat formats share: how each role looks, and how a drawing is named in words."""

from __future__ import annotations

from dataclasses import dataclass

from ..geom.drawing import Drawing, Role

_HANDS = {"right": "right-hand panel", "left": "left-hand panel", "both": "both hands"}


@dataclass(frozen=True)
class Ink:
    """How the lines of one role look.

    Attributes
    ----------
    width
        Line width in mm, one of those that DXF knows.
    rgb
        Red, green and blue, 0 to 255, dark enough to print well in black and white.
    colour
        The nearest DXF colour index.
    dashes
        Lengths of dash and space in mm; none for a full line.
    """

    width: float
    rgb: tuple[int, int, int]
    colour: int
    dashes: tuple[float, ...] = ()

    @property
    def hex(self) -> str:
        """Colour as SVG and reportlab read it."""
        return "#{:02x}{:02x}{:02x}".format(*self.rgb)


INKS = {
    Role.CUT_OUTSIDE: Ink(0.35, (0, 0, 0), 7),
    Role.CUT_INSIDE: Ink(0.35, (190, 0, 0), 1),
    Role.ENGRAVE: Ink(0.25, (0, 60, 170), 5),
    Role.FOLD: Ink(0.25, (0, 110, 50), 3, (4.0, 2.0)),
    Role.NOTE: Ink(0.25, (70, 70, 70), 8),
}


def one_line(text: str) -> str:
    """`text` with line ends, tabs and control characters turned into single spaces."""
    return " ".join("".join(c if c.isprintable() else " " for c in text).split())


def title(drawing: Drawing, wing: str) -> str:
    """Wing and drawing: ``Marsh survey wing: Web blank, front face``."""
    return one_line(f"{wing}: {drawing.title}" if wing else drawing.title)


def identity(drawing: Drawing) -> str:
    """Hand and revision: ``right-hand panel, revision 3fa9c1d2``."""
    return one_line(f"{_HANDS[drawing.hand]}, revision {drawing.stamp}")
