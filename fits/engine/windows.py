"""A matrix through which the points see the curve, and the rules that it must keep."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fits.engine.refusal import InputRefused


@dataclass(frozen=True, eq=False)
class Windows:
    """Each point sees Σ_k weights_ik f(grid_k): grid of shape (g,), increasing; weights of shape (n, g)."""

    grid: NDArray[np.float64]
    weights: NDArray[np.float64]


def validated_windows(windows: Windows, n: int) -> Windows:
    """A read-only copy.

    Raises InputRefused with field "windows:grid" and the place in the grid as index, or with field "windows" and the
    index of the point whose weights are at fault.
    """
    grid, weights = (np.array(part, dtype=np.float64) for part in (windows.grid, windows.weights))
    if grid.ndim != 1 or grid.size < 2 or weights.shape != (n, grid.size):
        shape = " × ".join(map(str, weights.shape))
        reason = f"has weights of shape {shape} for {n} points and a grid of {grid.size}"
        remedy = f"Give a grid of 2 or more x, and {n} rows of weights on it"
        raise InputRefused("windows-shape", "windows", reason, remedy)
    for field, finite in (
        ("windows:grid", np.isfinite(grid)),
        ("windows", np.isfinite(weights).all(axis=1)),
    ):
        if not finite.all():
            index = int(np.flatnonzero(~finite)[0])
            raise InputRefused("not-finite", field, "holds a value that is not finite", "Correct it", index)
    steps = np.flatnonzero(np.diff(grid) <= 0.0)
    if steps.size:
        index = int(steps[0]) + 1
        reason = f"the grid does not increase: x = {grid[index]:g} follows {grid[index - 1]:g}"
        raise InputRefused(
            "windows-grid", "windows:grid", reason, "Sort the grid and give each x once", index
        )
    blind = np.flatnonzero(~weights.any(axis=1))
    if blind.size:
        index = int(blind[0])
        reason = f"all weights of point {index + 1} are 0: it sees nothing"
        raise InputRefused("windows-blind", "windows", reason, "Leave the point out", index)
    grid.flags.writeable = weights.flags.writeable = False
    return Windows(grid, weights)
