"""Where a price along x stays below a radius."""

import numpy as np

from fits.engine.data import FloatArray


def intervals_below(x: FloatArray, price: FloatArray, radius: float) -> tuple[tuple[float, float], ...]:
    """The stretches of x with price ≤ radius, cut by straight lines between points.

    A point whose price is unsolved (NaN) cannot be ruled out and counts as below.
    """
    affordable = ~(price > radius)
    found: list[tuple[float, float]] = []
    start: float | None = None
    for index in range(x.size):
        if affordable[index] and start is None:
            start = _crossing(x, price, radius, index - 1, index) if index else float(x[0])
        if not affordable[index] and start is not None:
            found.append((start, _crossing(x, price, radius, index, index - 1)))
            start = None
    if start is not None:
        found.append((start, float(x[-1])))
    return tuple(found)


def _crossing(x: FloatArray, price: FloatArray, radius: float, above: int, below: int) -> float:
    """Between a point above the radius and its neighbour below it."""
    high, low = price[above], price[below]
    if not (np.isfinite(high) and np.isfinite(low)) or high == low:
        # Nothing is known in between: the wider answer is the safe one.
        return float(x[above])
    share = (radius - low) / (high - low)
    return float(x[below] + share * (x[above] - x[below]))
