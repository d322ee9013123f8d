"""Cap strips on the web's sheets: where each layer stops along the edges."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import shapely

from ...geom.drawing import Anchor, Role, Stroke
from ..describe.strips import cut_length
from ..job import Job
from ..strips import Layer
from .layout import Layout, Spot

if TYPE_CHECKING:
    from .web import View

_ASIDES: tuple[tuple[float, Anchor], ...] = ((1.5, "start"), (-1.5, "end"))
_DEEP = 0.2  # share of the web's height that a mark runs into the face


def strip_marks(job: Job, view: View, layout: Layout, inside: shapely.Polygon) -> list[Stroke]:
    """A mark, engraved so that it stays on the piece, where the full thickness of each layer ends."""
    stopping = [layer for layer in job.layers if not layer.whole]
    strokes = [_mark(view, layer) for layer in stopping]
    for stroke in strokes:
        layout.keep_clear(shapely.LineString(stroke.points))
    for layer, stroke in zip(stopping, strokes, strict=True):
        text = f"layer {layer.number} to s {job.wording.plain(layer.stop)}, cut {cut_length(job, layer)}"
        text += f", laid {_turn(job, layer)}"
        x, y = stroke.points[-1]
        up = 1.0 if layer.side == "bottom" else -1.0
        low = y - (2.5 if up < 0 else 0.0)
        spots = [
            Spot(x + aside, low + up * deep, anchor)
            for deep in (-4.0, -2.0, 0.0, 2.0, 4.0, 6.0)
            for aside, anchor in _ASIDES
        ]
        layout.put(text, spots, within=inside)
    return strokes


def _turn(job: Job, layer: Layer) -> str:
    """When a layer is laid: layers are counted from the skin, and the one furthest from it goes on first."""
    turn = max(other.number for other in job.layers if other.side == layer.side) - layer.number
    return ("first", "second", "third", "fourth", "fifth")[turn] if turn < 5 else f"as number {turn + 1}"


def _mark(view: View, layer: Layer) -> Stroke:
    high, low = (view.h(side, layer.stop) for side in ("top", "bottom"))
    edge, into = (high, -1.0) if layer.side == "top" else (low, 1.0)
    ends = np.array([[layer.stop, edge], [layer.stop, edge + into * _DEEP * (high - low)]])
    return Stroke(view.on(ends), Role.ENGRAVE)
