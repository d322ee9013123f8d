"""Lines within the web's outline where one of its faces ends, each with the name of that face."""

from __future__ import annotations

import numpy as np
import shapely
from numpy.typing import NDArray

from ...geom.blank import FaceName
from .layout import Layout

_EVERY = 150.0  # mm, within which a line's name is said again: on every sheet of paper
_HEIGHTS = (2.5, 2.2)  # of lettering
_WHOSE = {"front": ("front face, far side", "front face"), "rear": ("rear face",)}


def name_line(layout: Layout, face: FaceName, line: NDArray[np.float64], whole: shapely.Polygon) -> bool:
    """Say all along a line (k, 2) within a web seen from the rear which face ends there.

    False, and nothing written, where the web, of the outline `whole`, has no room for it.
    """
    return layout.put_along(_WHOSE[face], line, whole, every=_EVERY, heights=_HEIGHTS, off=(0.0, 1.5)) > 0


def name_beyond(layout: Layout, face: FaceName, line: NDArray[np.float64]) -> None:
    """Say beyond the web's outline which face ends at a line within it."""
    text = f"inner line: {_WHOSE[face][-1]}"
    layout.put_along([text], line, every=_EVERY, heights=_HEIGHTS, off=np.arange(1.0, 12.0))
