"""Single-stroke lettering: text as polylines, so that every format shows the same marks.

The glyphs are the public-domain Hershey Roman Simplex set, as packed by the `Hershey-Fonts` library.
"""

from __future__ import annotations

import unicodedata
from functools import cache

import numpy as np
from numpy.typing import NDArray

Strokes = list[NDArray[np.float64]]

_CAP = 21.0  # height of a capital in the glyphs' own units
_BASE = 9.0  # the baseline stands this far below the glyphs' origin
_RAISED = 3.0  # points and commas of this set float that far above the baseline
_DEGREE = np.pi * np.arange(9) / 4.0
_PLAIN = dict(zip(map(ord, "−–—×µμ‘’“”øØłŁ"), "---xuu''\"\"oOlL", strict=True))
_PLAIN |= {ord("±"): "+/-", ord("ß"): "ss", ord("æ"): "ae", ord("Æ"): "AE"}


@cache
def _font() -> object:
    from HersheyFonts import HersheyFonts

    font = HersheyFonts()
    font.load_default_font("futural")
    return font


@cache
def _glyph(char: str) -> tuple[float, tuple[NDArray[np.float64], ...]]:
    """Advance width and strokes of one character with capitals of height 1 on the line y = 0."""
    if char == "°":
        ring = np.column_stack([0.2 + 0.13 * np.cos(_DEGREE), 0.85 + 0.13 * np.sin(_DEGREE)])
        return 0.45, (ring,)
    glyphs = list(_font().glyphs_for_text(char))  # type: ignore[attr-defined]
    if not glyphs:
        return _glyph("?")
    glyph = glyphs[0]
    shift = np.array([-glyph.left_offset, _BASE - (_RAISED if char in ".,:;" else 0.0)])
    strokes = tuple(
        (np.asarray(line, dtype=float) * [1.0, -1.0] + shift) / _CAP for line in glyph.strokes if len(line) > 1
    )
    return glyph.char_width / _CAP, strokes


@cache
def plain(text: str) -> str:
    """`text` in the characters that can be drawn: accents dropped, what is left over a question mark.

    Examples
    --------
    >>> plain("Möwe − 3°, 1½ in")
    'Mowe - 3°, 1 1/2 in'
    """
    if text.isascii() and text.isprintable():
        return text
    # a fraction gets a space before it, or 1½ would read eleven halves
    apart = (f" {c}" if unicodedata.decomposition(c).startswith("<fraction>") else c for c in text)
    spread = unicodedata.normalize("NFKD", "".join(apart).translate(_PLAIN)).replace("\u2044", "/")
    kept = (c for c in spread if not unicodedata.combining(c))
    return "".join(c if c == "°" or " " <= c <= "~" else "?" for c in kept)


def width(text: str, height: float) -> float:
    """Length of a line of text with capitals `height` tall, in mm."""
    return height * sum(_glyph(c)[0] for c in plain(text))


@cache
def _laid(text: str) -> tuple[NDArray[np.float64], NDArray[np.intp]]:
    """Points (k, 2) of all strokes of a line of text with capitals of height 1, and where all but the first start."""
    at, lines = 0.0, []
    for char in plain(text):
        advance, glyph = _glyph(char)
        lines += [line + np.array([at, 0.0]) for line in glyph]
        at += advance
    return np.concatenate([np.empty((0, 2)), *lines]), np.cumsum([len(line) for line in lines], dtype=np.intp)[:-1]


def points(text: str, height: float) -> NDArray[np.float64]:
    """Points (k, 2) in mm of all of a text's strokes, one after the other, as in `strokes`."""
    return _laid(text)[0] * height


def split(text: str, points: NDArray[np.float64]) -> Strokes:
    """One array for each stroke of the text, from the points of all of them."""
    return np.split(points, _laid(text)[1]) if len(points) else []


def strokes(text: str, height: float) -> Strokes:
    """Polylines, each (k, 2) in mm, of `text` starting at (0, 0) along +x with capitals `height` tall."""
    return split(text, points(text, height))
