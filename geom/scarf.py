"""Where a sheet too long for its stock is scarfed: cut on a slope through its thickness and glued, mm along s."""

from __future__ import annotations

from collections.abc import Sequence

LEAST = 3.0  # scarfs: no piece between two joints, or beyond the last one, is shorter


class NoPlace(ValueError):
    """No scarf finds a place between `low` and `high`."""

    def __init__(self, low: float, high: float) -> None:
        super().__init__(f"none from {low:.0f} to {high:.0f} mm")
        self.low, self.high = low, high


def places(
    start: float, stop: float, *, longest: float, scarf: float, keep_off: Sequence[tuple[float, float]] = ()
) -> tuple[float, ...]:
    """Where scarfs begin so that no piece of a sheet from `start` to `stop` is longer than `longest`.

    Each scarf runs from its place p to ``p + scarf``; the inner piece ends there and the outer one begins at p. As far
    out as they may lie, which takes the fewest pieces, and where a web bears least.

    Parameters
    ----------
    keep_off
        Stretches (from, to) that no scarf may touch.

    Raises
    ------
    NoPlace
        If one finds none.

    Examples
    --------
    >>> places(0.0, 2000.0, longest=1200.0, scarf=100.0, keep_off=[(1050.0, 1150.0)])
    (950.0,)
    """
    found: list[float] = []
    while stop - start > longest:
        last = min(start + longest - scarf, stop - LEAST * scarf)
        place = _clear(last, scarf, keep_off)
        if place < start + LEAST * scarf:
            raise NoPlace(start, last + scarf)
        found.append(place)
        start = place
    return tuple(found)


def _clear(place: float, scarf: float, keep_off: Sequence[tuple[float, float]]) -> float:
    """The outermost place not beyond `place` from which a scarf touches nothing."""
    for low, high in sorted(keep_off, key=lambda v: -v[1]):
        if low - scarf < place < high:
            place = low - scarf
    return place
