"""Bevel gauges: cards with a notch that fits over one long corner of the web, to check its angle on the real piece.

Seen outwards along the span: x aft, y up, the corner in the origin; mm and radians.
"""

from __future__ import annotations

import numpy as np
import shapely
from numpy.typing import NDArray

from .blank import FaceName
from .seat import Cut, locate, quadratic

Array = NDArray[np.float64]

_FAR = 1e3  # mm, longer than any leg


def corner_angle(cut: Cut, face: FaceName, s: float) -> float:
    """Angle of the foam at the corner between an edge and a face of the web, in the plane square to that corner.

    A square edge has pi/2. Seen in a section at constant s it is ``pi/2 + bevel`` at the front of the top edge and the
    rear of the bottom one, ``pi/2 - bevel`` at the other two; an edge that also rises along s brings it a little
    nearer to square.
    """
    own, other = (0, -1) if face == "front" else (-1, 0)
    here, along = (np.array(v) for v in zip(*(_read(cut, i, s) for i in (own, other)), strict=True))
    tangent = along[0] / np.linalg.norm(along[0])
    down = np.array([0.0, -1.0 if cut.side == "top" else 1.0, 0.0])
    legs = [v - (v @ tangent) * tangent for v in (down, here[1] - here[0])]
    return float(np.arccos(legs[0] @ legs[1] / np.prod(np.linalg.norm(legs, axis=1))))


def _read(cut: Cut, node: int, s: float) -> tuple[Array, Array]:
    """The corner line at one face: its place (s, h, n) and how that changes along s."""
    survey = cut.survey
    cell, x = locate(survey.s, s)
    n = survey.n[cell, :, node]
    line = np.stack([survey.s[cell], cut.height[cell] + cut.slope[cell] * n, n], axis=-1)
    along = quadratic(x + 0.5) - quadratic(x - 0.5)  # of a quadratic the chord has the slope of its middle
    return quadratic(x) @ line, along @ line / (survey.s[cell, 2] - survey.s[cell, 0])


def card(
    cut: Cut, face: FaceName, s: float, *, leg: float, reach: float, wide: float, tall: float, relief: float
) -> Array:
    """(k, 2) closed outline of a card that bears on a face and on an edge of a right-hand web, seen outwards.

    Parameters
    ----------
    leg, reach
        How far it lies along the face and along the edge.
    wide, tall
        What it measures beside the face and beyond the edge.
    relief
        Radius cut away about the corner, so that a burr or a bead of glue does not hold it off.
    """
    angle = corner_angle(cut, face, s)
    along = reach * np.array([-np.sin(angle), -np.cos(angle)])  # a top edge from its rear corner, the face being down
    box = shapely.box(along[0], -leg, wide, max(0.0, along[1]) + tall)
    down, out = np.array([0.0, -_FAR]), along * _FAR / reach
    foam = shapely.Polygon([np.zeros(2), down, down + out, out])
    shape = box.difference(foam).difference(shapely.Point(0.0, 0.0).buffer(relief))
    assert isinstance(shape, shapely.Polygon)
    flip = np.array([1.0 if face == "rear" else -1.0, 1.0 if cut.side == "top" else -1.0])
    points = np.asarray(np.asarray(shape.exterior.coords)[:-1] * flip)
    return points if shapely.LinearRing(points).is_ccw else points[::-1]
