"""Single-stroke lettering: text as polylines, so that every format shows the same marks.

The glyphs are the public-domain Hershey Roman Simplex set, as packed by the `Hershey-Fonts` library.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator
from functools import cache
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

Strokes = list[NDArray[np.float64]]

_CAP = 21.0  # height of a capital in the glyphs' own units
_BASE = 9.0  # the baseline stands this far below the glyphs' origin
_RAISED = 3.0  # points and commas of this set float that far above the baseline
_DEGREE = np.pi * np.arange(9) / 4.0
_PLAIN = dict(zip(map(ord, "−–—×µμ‘’“”øØłŁ"), "---xuu''\"\"oOlL", strict=True))
_PLAIN |= {ord("±"): "+/-", ord("ß"): "ss", ord("æ"): "ae", ord("Æ"): "AE"}

_CLEAR = 0.07  # between a letter and its accent, in heights of a capital, as all that follows
_DOT = 0.03 * np.array([[-1.0, 0.0], [0.0, 1.0], [1.0, 0.0], [0.0, -1.0], [-1.0, 0.0]])


def _strokes_of(*lines: ArrayLike) -> Strokes:
    return [np.asarray(line, dtype=float) for line in lines]


# Strokes of each accent about the middle of its letter, up from the top of it,
_ABOVE: dict[str, Strokes] = {
    "\u0300": _strokes_of([(0.06, 0.0), (-0.08, 0.2)]),
    "\u0301": _strokes_of([(-0.06, 0.0), (0.08, 0.2)]),
    "\u0302": _strokes_of([(-0.15, 0.0), (0.0, 0.17), (0.15, 0.0)]),
    "\u0303": _strokes_of([(-0.18, 0.02), (-0.09, 0.12), (0.09, 0.03), (0.18, 0.13)]),
    "\u0304": _strokes_of([(-0.16, 0.05), (0.16, 0.05)]),
    "\u0306": _strokes_of([(-0.15, 0.16), (-0.08, 0.03), (0.08, 0.03), (0.15, 0.16)]),
    "\u0307": _strokes_of(_DOT + np.array([0.0, 0.05])),
    "\u0308": _strokes_of(_DOT + np.array([-0.12, 0.05]), _DOT + np.array([0.12, 0.05])),
    "\u030a": _strokes_of(0.09 * np.column_stack([np.cos(_DEGREE), 1.0 + np.sin(_DEGREE)])),
    "\u030b": _strokes_of([(-0.14, 0.0), (-0.04, 0.2)], [(0.04, 0.0), (0.14, 0.2)]),
    "\u030c": _strokes_of([(-0.15, 0.17), (0.0, 0.0), (0.15, 0.17)]),
}
# or down from the line it stands on.
_BELOW: dict[str, Strokes] = {
    "\u0323": _strokes_of(_DOT + np.array([0.0, -0.15])),
    "\u0326": _strokes_of([(0.03, -0.12), (-0.05, -0.28)]),
    "\u0327": _strokes_of([(0.0, 0.0), (0.0, -0.08), (0.08, -0.14), (0.06, -0.22), (-0.06, -0.25)]),
    "\u0328": _strokes_of([(0.1, 0.0), (0.02, -0.1), (0.04, -0.2), (0.14, -0.2)]),
}
_ACCENTS = _ABOVE | _BELOW


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
def _accented(letter: str, accents: str) -> tuple[float, tuple[NDArray[np.float64], ...]]:
    """What `_glyph` gives, of a letter that bears accents, one over the other."""
    advance, lines = _glyph(letter)
    if letter in "ij" and any(c in _ABOVE for c in accents):
        lines = tuple(line for line in lines if line[:, 1].min() < 0.7)  # without its dot
    ink = np.concatenate([np.zeros((1, 2)), *lines])
    middle, top = (ink[1:, 0].min() + ink[1:, 0].max()) / 2.0 if lines else advance / 2.0, ink[:, 1].max() + _CLEAR
    for accent in accents:
        strokes = _ACCENTS[accent]
        lines += tuple(line + np.array([middle, top if accent in _ABOVE else 0.0]) for line in strokes)
        if accent in _ABOVE:
            top += np.concatenate(strokes)[:, 1].max() + _CLEAR
    return advance, lines


def _letters(text: str) -> Iterator[tuple[float, tuple[NDArray[np.float64], ...]]]:
    """Advance width and strokes of each letter of a text, with the accents it bears."""
    drawn = _drawable(text)
    starts = [i for i, c in enumerate(drawn) if c not in _ACCENTS]
    for i, after in pairwise([*starts, len(drawn)]):
        yield _accented(drawn[i], drawn[i + 1 : after])


@cache
def _drawable(text: str) -> str:
    """`text` in characters that can be drawn, each accent behind its letter; what is left over a question mark."""
    if text.isascii() and text.isprintable():
        return text
    # a fraction gets a space before it, or 1½ would read eleven halves
    apart = (f" {c}" if unicodedata.decomposition(c).startswith("<fraction>") else c for c in text)
    spread = unicodedata.normalize("NFKD", "".join(apart).translate(_PLAIN)).replace("\u2044", "/")
    known = "".join(c for c in spread if c in _ACCENTS or not unicodedata.combining(c))
    letters = known.lstrip("".join(_ACCENTS))  # an accent stands on a letter
    return "".join(c if c == "°" or " " <= c <= "~" or c in _ACCENTS else "?" for c in letters)


def plain(text: str) -> str:
    """`text` in ASCII and the degree sign: accents dropped, what is left over a question mark.

    Examples
    --------
    >>> plain("Möwe − 3°, 1½ in")
    'Mowe - 3°, 1 1/2 in'
    """
    return "".join(c for c in _drawable(text) if c not in _ACCENTS)


def width(text: str, height: float) -> float:
    """Length of a line of text with capitals `height` tall, in mm."""
    return height * _advance(text)


@cache
def _advance(text: str) -> float:
    return sum(advance for advance, _ in _letters(text))


@cache
def _laid(text: str) -> tuple[NDArray[np.float64], NDArray[np.intp]]:
    """Points (k, 2) of all strokes of a line of text with capitals of height 1, and where all but the first start."""
    at, lines = 0.0, []
    for advance, glyph in _letters(text):
        lines += [line + np.array([at, 0.0]) for line in glyph]
        at += advance
    return np.concatenate([np.empty((0, 2)), *lines]), np.cumsum([len(line) for line in lines], dtype=np.intp)[:-1]


@cache
def extent(text: str) -> tuple[float, float]:
    """How far a line of text reaches down and up from the line it stands on, in heights of a capital.

    From the foot of the descenders to the top of the brackets, whether or not it has any; further with accents.
    """
    ink = _laid(text)[0][:, 1]
    return float(np.append(ink, -0.34).min()), float(np.append(ink, 1.2).max())


def points(text: str, height: float) -> NDArray[np.float64]:
    """Points (k, 2) in mm of all of a text's strokes, one after the other, as in `strokes`."""
    return _laid(text)[0] * height


def split(text: str, points: NDArray[np.float64]) -> Strokes:
    """One array for each stroke of the text, from the points of all of them."""
    return np.split(points, _laid(text)[1]) if len(points) else []


def strokes(text: str, height: float) -> Strokes:
    """Polylines, each (k, 2) in mm, of `text` starting at (0, 0) along +x with capitals `height` tall."""
    return split(text, points(text, height))
