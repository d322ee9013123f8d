"""How a drawing is laid over sheets of paper: which sheets, what each of them shows.

Sheets overlap by a glue strip. Rows are lettered from the top, columns numbered from the left; a sheet lies
over its left and its upper neighbour, so its left and top edges are cut and it hides their glue strips.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import product
from typing import Any, Protocol

import numpy as np
import shapely
from numpy.typing import NDArray

Place = tuple[int, int]  # row and column
Box = tuple[float, float, float, float]
Shapes = NDArray[Any]  # of shapely geometries

OVERLAP = 10.0  # width of the glue strip, mm
_PAD = 1.0  # white between the drawing and the outermost windows, mm
_SHIFTS = (0.5, 0.0, 1.0, 0.25, 0.75)  # where in its play the grid may lie, centred first
_SLIVER = 1e-3  # what stands this little over a sheet's edge is not worth a sheet, mm


class Paper(Protocol):
    """A sheet of paper: its name, and its size in mm."""

    @property
    def name(self) -> str:
        """What the trade calls it."""

    @property
    def width(self) -> float:
        """Width in mm."""

    @property
    def height(self) -> float:
        """Height in mm."""


@dataclass(frozen=True)
class Tile:
    """One sheet's place in the grid, and the window (x0, y0, x1, y1) of the drawing it shows, in mm."""

    row: int
    column: int
    window: Box

    @property
    def name(self) -> str:
        """Row and column: A1, A2, ... Z1, AA1.

        Examples
        --------
        >>> Tile(1, 2, (0, 0, 1, 1)).name, Tile(26, 0, (0, 0, 1, 1)).name
        ('B3', 'AA1')
        """
        letters, rest = "", self.row + 1
        while rest:
            rest, letter = divmod(rest - 1, 26)
            letters = chr(ord("A") + letter) + letters
        return f"{letters}{self.column + 1}"

    def own(self) -> Box:
        """Return the part of the window that no left or upper neighbour shows as well."""
        x0, y0, x1, y1 = self.window
        left = OVERLAP if self.column else 0.0
        top = OVERLAP if self.row else 0.0
        return x0 + left + _SLIVER, y0 + _SLIVER, x1 - _SLIVER, y1 - top - _SLIVER


@dataclass(frozen=True)
class Layout:
    """The page size in mm and the sheets that are needed, row by row."""

    width: float
    height: float
    tiles: tuple[Tile, ...]

    def find(self, row: int, column: int) -> Tile | None:
        """Return the sheet at that place, if it is one of those needed."""
        return next((t for t in self.tiles if (t.row, t.column) == (row, column)), None)


def plan(shapes: Shapes, paper: Paper, *, margins: Box, least: tuple[float, float]) -> Layout:
    """Find the upright or sideways grid that needs the fewest sheets.

    Parameters
    ----------
    shapes
        Lines and rings of the drawing, in mm.
    paper
        The sheet.
    margins
        What is kept free at the left, bottom, right and top of every page, in mm.
    least
        Smallest window that will do: width and height in mm.

    Raises
    ------
    ValueError
        If the paper is too small for the margins and the smallest window.
    """
    tree = shapely.STRtree(shapes)
    x0, y0, x1, y1 = map(float, shapely.total_bounds(shapes))
    bounds = (x0 - _PAD, y0 - _PAD, x1 + _PAD, y1 + _PAD)
    sizes = [(min(paper.width, paper.height), max(paper.width, paper.height))]
    sizes.insert(int(y1 - y0 >= x1 - x0), sizes[0][::-1])
    layouts = []
    for wide, high in dict.fromkeys(sizes):
        window = wide - margins[0] - margins[2], high - margins[1] - margins[3]
        if window[0] >= least[0] and window[1] >= least[1]:
            layouts += [Layout(wide, high, _needed(tree, grid)) for grid in _grids(bounds, window)]
    if not layouts:
        need = least[0] + margins[0] + margins[2], least[1] + margins[1] + margins[3]
        raise ValueError(
            f"paper {paper.name}: wanted at least {need[0]:g} x {need[1]:g} mm, "
            f"got {paper.width:g} x {paper.height:g} mm"
        )
    return min(layouts, key=lambda layout: len(layout.tiles))


def _grids(bounds: Box, window: tuple[float, float]) -> Iterator[list[Tile]]:
    """Grids of as few rows and columns as cover `bounds`, shifted within the play that is left."""
    x0, y0, x1, y1 = bounds
    step = window[0] - OVERLAP, window[1] - OVERLAP
    columns = max(1, int(np.ceil((x1 - x0 - OVERLAP) / step[0])))
    rows = max(1, int(np.ceil((y1 - y0 - OVERLAP) / step[1])))
    play = columns * step[0] + OVERLAP - (x1 - x0), rows * step[1] + OVERLAP - (y1 - y0)
    for down, across in product(_SHIFTS, _SHIFTS):
        left, top = x0 - across * play[0], y1 + down * play[1]
        yield [
            Tile(
                row,
                column,
                (at := left + column * step[0], (to := top - row * step[1]) - window[1], at + window[0], to),
            )
            for row, column in product(range(rows), range(columns))
        ]


def _needed(tree: shapely.STRtree, grid: Sequence[Tile]) -> tuple[Tile, ...]:
    """Keep the sheets of `grid` with a mark that no other of them shows, and those that hold these together."""
    boxes = shapely.box(*np.array([tile.own() for tile in grid]).T)
    marked = np.unique(tree.query(boxes, predicate="intersects")[0])
    places = _joined({(grid[i].row, grid[i].column) for i in marked})
    return tuple(tile for tile in grid if (tile.row, tile.column) in places)


def _joined(places: set[Place]) -> set[Place]:
    """Add what it takes to lead from each place to every other: a sheet on its own would lose its distance."""
    places = set(places)
    while apart := places - (reached := _reach(places)):
        here, there = min(
            product(sorted(reached), sorted(apart)),
            key=lambda pair: abs(pair[0][0] - pair[1][0]) + abs(pair[0][1] - pair[1][1]),
        )
        rows, columns = (range(min(ends), max(ends) + 1) for ends in zip(here, there, strict=True))
        places |= {(row, here[1]) for row in rows} | {(there[0], column) for column in columns}
    return places


def _reach(places: set[Place]) -> set[Place]:
    """Places that can be reached from the first of `places` side by side."""
    reached: set[Place] = set()
    edge = {min(places)}
    while edge:
        reached |= edge
        beside = {p for r, c in edge for p in ((r - 1, c), (r + 1, c), (r, c - 1), (r, c + 1))}
        edge = (beside & places) - reached
    return reached


def clip(shapes: Shapes, window: Box) -> list[tuple[int, list[NDArray[np.float64]]]]:
    """Cut `shapes` down to what `window` shows of them.

    Returns
    -------
    list of (index, polylines)
        For each shape that shows, its place in `shapes` and its visible parts, each (k, 2) in mm. What lies
        wholly inside comes back as it is.
    """
    frame = shapely.box(*window)
    out = []
    for index in np.flatnonzero(shapely.intersects(shapes, frame)):
        shape = shapes[index]
        if not frame.covers(shape):
            shape = shapely.line_merge(shape.intersection(frame))
        parts = [shapely.get_coordinates(p) for p in shapely.get_parts(shape) if p.length > _SLIVER]
        if parts:
            out.append((int(index), parts))
    return out
