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
    clear = _between(start, stop - LEAST * scarf, [(low - scarf, high) for low, high in keep_off])
    step = LEAST * scarf, longest - scarf
    reached = [[(start, start)]]
    while stop - reached[-1][-1][1] > longest:
        further = _meet(_union([(low + step[0], high + step[1]) for low, high in reached[-1]]), clear)
        if not further or step[0] > step[1]:
            low = reached[-1][-1][1]
            raise NoPlace(low, min(low + longest, stop))
        reached.append(further)
    place = stop
    found: list[float] = []
    for stretches in reversed(reached[1:]):
        found.insert(0, _last(stretches, place - step[0]))
        place = found[0]
    return tuple(found)


_Stretches = list[tuple[float, float]]


def _between(start: float, stop: float, off: Sequence[tuple[float, float]]) -> _Stretches:
    """What is left of a stretch when others, without their ends, are taken out."""
    left = [(start, stop)] if start <= stop else []
    for low, high in off:
        left = [part for a, b in left for part in ((a, min(b, low)), (max(a, high), b)) if part[0] <= part[1]]
    return _union(left)


def _union(stretches: _Stretches) -> _Stretches:
    """Sorted, those that touch made one."""
    out: _Stretches = []
    for low, high in sorted(stretches):
        if out and low <= out[-1][1]:
            out[-1] = out[-1][0], max(out[-1][1], high)
        else:
            out.append((low, high))
    return out


def _meet(one: _Stretches, other: _Stretches) -> _Stretches:
    both = [(max(a, c), min(b, d)) for a, b in one for c, d in other]
    return sorted(part for part in both if part[0] <= part[1])


def _last(stretches: _Stretches, most: float) -> float:
    """The outermost place in the stretches that is not beyond `most`."""
    return max(min(high, most) for low, high in stretches if low <= most)
