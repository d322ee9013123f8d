"""How a drawing is laid over sheets of paper: which sheets, what each of them shows.

Sheets overlap by a glue strip. Rows are lettered from the top, columns numbered from the left; a sheet lies
over its left and its upper neighbour, so its left and top edges are cut and it hides their glue strips.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import product
from typing import Any, Literal, Protocol

import numpy as np
import shapely
from numpy.typing import NDArray

from ..geom.drawing import DIGITS

Place = tuple[int, int]  # row and column
Box = tuple[float, float, float, float]
Shapes = NDArray[Any]  # of shapely geometries

OVERLAP = 10.0  # width of the glue strip, mm
_PAD = 1.0  # white between the drawing and the outermost windows, mm
_SHIFTS = (0.5, 0.0, 1.0, 0.25, 0.75)  # where in its play the grid may lie, centred first
_FINE = (*_SHIFTS, 0.125, 0.375, 0.625, 0.875)  # the same where it has seams one way only
_SLIVER = 1e-3  # what stands this little over a sheet's edge is not worth a sheet, mm
_LONGEST = 5080.0  # of a page cut off a roll: 14400 units (ISO 32000-1, annex C), mm


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


class PaperError(ValueError):
    """A paper that cannot take what every page needs, in one line."""


@dataclass(frozen=True)
class Page:
    """A sheet held one way.

    Attributes
    ----------
    wide, high
        Its size in mm.
    axes
        Which of the paper's own directions run across and up: x is across a sheet held upright, or across a roll.
    printed
        How long the printer makes what should be 1 mm, across and up.
    """

    wide: float
    high: float
    axes: Literal["xy", "yx"] = "xy"
    printed: tuple[float, float] = (1.0, 1.0)

    @property
    def usable(self) -> tuple[float, float]:
        """Width and height in mm that come out in print, whichever way the printer errs."""
        x, y = self.printed
        return round(self.wide * min(1.0, x), 3), round(self.high * min(1.0, y), 3)

    @property
    def inset(self) -> tuple[float, float]:
        """Where what is usable starts, in mm of the print from the page's lower left corner: it lies in the middle."""
        (wide, high), (x, y) = self.usable, self.printed
        return (self.wide * x - wide) / 2.0, (self.high * y - high) / 2.0


@dataclass(frozen=True)
class Tile:
    """One sheet's place in the grid, and the window (x0, y0, x1, y1) of the drawing it shows, in mm."""

    row: int
    column: int
    window: Box
    title: str = ""

    @property
    def name(self) -> str:
        """Row and column, A1, A2, ... Z1, AA1; the title of a sheet that belongs to no others.

        Examples
        --------
        >>> Tile(1, 2, (0, 0, 1, 1)).name, Tile(26, 0, (0, 0, 1, 1)).name
        ('B3', 'AA1')
        """
        if self.title:
            return self.title
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
    """The page and the sheets of it that are needed, row by row."""

    page: Page
    tiles: tuple[Tile, ...]

    @property
    def area(self) -> float:
        """Paper that is used, mm^2."""
        return len(self.tiles) * self.page.wide * self.page.high

    def alone(self, tile: Tile) -> Box:
        """Return the part of a tile's window that no neighbour shows as well."""
        row, column = tile.row, tile.column
        beside = (row, column - 1), (row + 1, column), (row, column + 1), (row - 1, column)
        left, low, right, top = (OVERLAP if self.find(*place) else 0.0 for place in beside)
        x0, y0, x1, y1 = tile.window
        return x0 + left, y0 + low, x1 - right, y1 - top

    def find(self, row: int, column: int) -> Tile | None:
        """Return the sheet at that place, if it is one of those needed."""
        return next((t for t in self.tiles if (t.row, t.column) == (row, column)), None)


def plan(
    shapes: Shapes,
    paper: Paper,
    *,
    margins: Box,
    least: tuple[float, float],
    printed: tuple[float, float] = (1.0, 1.0),
    texts: Sequence[Box] = (),
) -> list[Layout]:
    """Find the upright or sideways grids that need the fewest sheets, then the least paper.

    Parameters
    ----------
    shapes
        Lines and rings of the drawing, in mm.
    paper
        The sheet, or a roll, of which pages as long as the drawing are cut.
    margins
        What is kept free at the left, bottom, right and top of every page, in mm.
    least
        Smallest window that will do: width and height in mm.
    printed
        How long the printer makes what should be 1 mm, across the sheet and along it.
    texts
        Bounds of the lettering.

    Returns
    -------
    list of Layout
        All that need as little paper as the best, the one whose seams cut least of the texts first.

    Raises
    ------
    PaperError
        If the paper is too small for the margins and the smallest window.
    """
    tree = shapely.STRtree(shapes)
    x0, y0, x1, y1 = map(float, shapely.total_bounds(shapes))
    bounds = (x0 - _PAD, y0 - _PAD, x1 + _PAD, y1 + _PAD)
    around = margins[0] + margins[2], margins[1] + margins[3]
    lengths = [max(size + 2.0 * _PAD, low) + m for size, low, m in zip((x1 - x0, y1 - y0), least, around, strict=True)]
    pages = _pages(paper, lengths, printed)
    boxes = np.array(texts, dtype=float).reshape(-1, 4)
    layouts = []
    for page in pages if x1 - x0 > y1 - y0 else pages[::-1]:
        window = page.usable[0] - around[0], page.usable[1] - around[1]
        if window[0] >= least[0] and window[1] >= least[1]:
            layouts += [Layout(page, _needed(tree, grid)) for grid in _grids(bounds, window, least, boxes)]
    if not layouts:
        raise PaperError(_too_small(paper, least[0] + around[0], least[1] + around[1]))
    few = min((len(layout.tiles), layout.area) for layout in layouts)
    return sorted((t for t in layouts if (len(t.tiles), t.area) == few), key=lambda layout: _cut(layout, boxes))


def _cut(layout: Layout, texts: NDArray[np.float64]) -> float:
    """How much lettering, in mm of its length, the seams between a layout's sheets run through."""
    places = {(t.row, t.column) for t in layout.tiles}
    long = np.max(texts[:, 2:] - texts[:, :2], axis=1)
    through = np.zeros(len(texts), dtype=bool)
    for tile in layout.tiles:
        x0, y0, x1, y1 = tile.window
        across = (texts[:, 0] < x1) & (texts[:, 2] > x0)
        upright = (texts[:, 1] < y1) & (texts[:, 3] > y0)
        if (tile.row, tile.column - 1) in places:
            through |= (texts[:, 0] < x0) & (texts[:, 2] > x0) & upright
        if (tile.row - 1, tile.column) in places:
            through |= (texts[:, 1] < y1) & (texts[:, 3] > y1) & across
    return float(long[through].sum())


def _pages(paper: Paper, lengths: Sequence[float], printed: tuple[float, float]) -> tuple[Page, Page]:
    """The paper held sideways and upright; a page off a roll is as long as the drawing, `lengths` across and up."""
    short, long = sorted((paper.width, paper.height))
    ends = [long, long]
    if np.isinf(long):
        ends = [min(_LONGEST, float(np.ceil(length / min(1.0, printed[1])))) for length in lengths]
    return Page(ends[0], short, "yx", printed[::-1]), Page(short, ends[1], "xy", printed)


def _too_small(paper: Paper, wide: float, high: float) -> str:
    if np.isinf(paper.height):
        return f"paper {paper.name}: wanted a roll at least {min(wide, high):g} mm wide, got {paper.width:g} mm"
    return f"paper {paper.name}: wanted at least {wide:g} x {high:g} mm, got {paper.width:g} x {paper.height:g} mm"


def _grids(
    bounds: Box, window: tuple[float, float], least: tuple[float, float], texts: NDArray[np.float64]
) -> Iterator[list[Tile]]:
    """Grids of as few rows and columns as cover `bounds`, shifted within the play that is left."""
    x0, y0, x1, y1 = bounds
    upside = -texts[:, [3, 1]]  # rows run down
    long = np.max(texts[:, 2:] - texts[:, :2], axis=1)
    columns = _Axis(x0, x1, window[0], least[0], texts[:, [0, 2]], long)
    rows = _Axis(-y1, -y0, window[1], least[1], upside, long)
    few = columns.count == 1 or rows.count == 1
    for down, across in product(*([axis.windows(shift) for shift in axis.shifts(few)] for axis in (rows, columns))):
        yield [
            Tile(row, column, (x, -y_end, x_end, -y))
            for row, (y, y_end) in enumerate(down)
            for column, (x, x_end) in enumerate(across)
        ]


class _Axis:
    """Where the sheets of a grid begin and end one way, from `low` on, with seams where they cut little lettering.

    Every seam has the same play. A sheet may show less than it could, so that the next begins earlier: of the seams
    that come in question those are taken that cut least, by dynamic programming over places 1 mm apart.
    """

    def __init__(
        self,
        low: float,
        high: float,
        window: float,
        least: float,
        texts: NDArray[np.float64],
        long: NDArray[np.float64],
    ) -> None:
        self._window, step = window, window - OVERLAP
        self.count = max(1, int(np.ceil((high - low - OVERLAP) / step)))
        self._play = self.count * step + OVERLAP - (high - low)
        self._first = low - self._play + step * np.arange(self.count)  # the earliest that each sheet may begin
        self._later = np.append(np.arange(0.0, self._play), self._play)
        self._narrower = int(step - least + OVERLAP)  # mm by which a sheet may be
        places = self._first[1:, None] + self._later
        self._cuts = _weight(texts[:, 0], long, places, "left") - _weight(texts[:, 1], long, places, "right")

    def shifts(self, fine: bool) -> tuple[float, ...]:
        """Shares of the play that are worth trying; without a seam none, so that all free room is on one side."""
        return (0.0,) if self.count == 1 else _FINE if fine else _SHIFTS

    def windows(self, shift: float) -> list[tuple[float, float]]:
        """Both ends of what each sheet shows, the first beginning that share of the play before `low`, or nearly so."""
        wanted = (1.0 - shift) * self._play
        stray = 1e-6 * (self._later - wanted) ** 2  # of what cuts as little, the most even
        best = [stray]
        for cuts in self._cuts:
            best.append(cuts + stray + self._least_from(best[-1]))
        at = [int(best[-1].argmin())]
        for before in best[-2::-1]:  # a seam lies no more than one step after the one before it
            reach = before[at[-1] : at[-1] + self._narrower + 1]
            at.append(at[-1] + int(reach.argmin()))
        later = wanted if self.count == 1 else self._later[at[::-1]]
        starts = np.round(self._first + later, DIGITS)
        ends = np.append(starts[1:] + OVERLAP, starts[-1] + self._window)
        return list(zip(starts.tolist(), ends.tolist(), strict=True))

    def _least_from(self, values: NDArray[np.float64]) -> NDArray[np.float64]:
        """Least of the values from each place to as far on as a sheet may be narrower."""
        wide = min(self._narrower, len(values) - 1) + 1
        padded = np.append(values, np.full(wide - 1, np.inf))
        return np.asarray(np.lib.stride_tricks.sliding_window_view(padded, wide).min(axis=1))


def _weight(
    ends: NDArray[np.float64], long: NDArray[np.float64], places: NDArray[np.float64], side: Literal["left", "right"]
) -> NDArray[np.float64]:
    """Length of all texts with an end before each place."""
    order = ends.argsort(kind="stable")
    sums = np.append(0.0, long[order].cumsum())
    return np.asarray(sums[np.searchsorted(ends[order], places, side=side)])


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
        wholly inside comes first and as it is.
    """
    frame = shapely.box(*window)
    shapely.prepare(frame)
    seen = np.flatnonzero(shapely.intersects(frame, shapes))
    inside = shapely.covers(frame, shapes[seen])
    points, of = shapely.get_coordinates(shapes[seen[inside]], return_index=True)
    whole = np.split(points, np.flatnonzero(np.diff(of)) + 1)
    out = [(int(index), [line]) for index, line in zip(seen[inside], whole, strict=False)]
    for index in seen[~inside]:
        cut = shapely.line_merge(shapes[index].intersection(frame))
        parts = [np.round(shapely.get_coordinates(p), DIGITS) for p in shapely.get_parts(cut) if p.length > _SLIVER]
        if parts:
            out.append((int(index), parts))
    return out
