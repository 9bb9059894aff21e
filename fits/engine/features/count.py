"""How many peaks do all curves in the ball have? A one-sided statement, as any nonparametric count must be
(D. Donoho, Ann. Statist. 16, 1988): at least so many, never exactly so many.

Lower bound on the price of "at most k peaks": the points of such a curve make a sequence with at most k peaks, and no
sequence is nearer to the fit's than the best of them. Upper bound: a smooth witness with the same change points.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fits.engine.data import FloatArray
from fits.engine.features.points import ComparedPoints
from fits.engine.features.programme import Nearest, Outcome, Programme
from fits.engine.features.sequences import IndexArray, nearest_sequences
from fits.engine.features.space import CurveSpace, interior_peaks

MOST_PEAKS = 8
_FIRST_SWEEP, _LEAST_SHIFT = 8, 1


@dataclass(frozen=True, eq=False)
class AtMost:
    """peaks: k; lower, upper: bounds of the price of "at most k peaks"; witness: a curve on the grid with at most k
    peaks at the price `upper` from the fit, None where none was found."""

    peaks: int
    lower: float
    upper: float
    witness: FloatArray | None


@dataclass(frozen=True, eq=False)
class PeakCount:
    """One entry for k = 0, 1, … up to the first k that costs nothing, 8 at most.

    thinning  by how much (in distance) the lower bounds may fall short because neighbouring points were pooled
    """

    at_most: tuple[AtMost, ...]
    thinning: float


def peak_count(
    space: CurveSpace,
    points: ComparedPoints,
    *,
    radii: Sequence[float],
    most: int = MOST_PEAKS,
    sign: float = 1.0,
) -> PeakCount:
    """Bounds for each k. Witnesses are improved only where that can change a verdict: where a radius lies between
    the bounds."""
    sequences = nearest_sequences(sign * points.values, points.weights, most=most)
    found = []
    own = interior_peaks(sign * space.fit).size
    for peaks in range(most + 1):
        if peaks >= own:
            # The fit itself is the witness.
            found.append(AtMost(peaks, 0.0, 0.0, space.fit))
            break
        lower = float(np.sqrt(sequences.cost[peaks]))
        places = [points.place_of(change) for change in sequences.changes[peaks]]
        changes = np.searchsorted((space.grid[1:] + space.grid[:-1]) / 2.0, places).astype(np.int64)
        witness = _witness(space, changes, sign)
        if any(lower <= radius < witness.price for radius in radii):
            witness = _improved(space, changes, witness, sign)
        solved = witness.outcome is Outcome.SOLVED
        upper = witness.price if solved else np.inf
        curve = space.values @ (space.centre + witness.difference) if solved else None
        found.append(AtMost(peaks, min(lower, upper), float(upper), curve))
    return PeakCount(tuple(found), points.thinning)


def _witness(space: CurveSpace, changes: IndexArray, sign: float) -> Nearest:
    """The nearest curve that falls and rises in turn, changing at these steps of the grid."""
    steps = sign * np.diff(space.values, axis=0)
    segment = np.searchsorted(changes, np.arange(steps.shape[0]), side="right")
    direction = np.where(segment % 2 == 0, 1.0, -1.0)
    below = direction[:, None] * steps
    programme = Programme(np.empty((0, steps.shape[1])), below)
    return programme.solve(np.empty(0), -(below @ space.centre))


def _improved(space: CurveSpace, changes: IndexArray, start: Nearest, sign: float) -> Nearest:
    """Move one change point at a time, by smaller and smaller shifts, as long as that makes the witness cheaper."""
    best, shift = start, _FIRST_SWEEP
    while shift >= _LEAST_SHIFT:
        better = False
        for place in range(len(changes)):
            for move in (-shift, shift):
                moved = changes.copy()
                moved[place] += move
                if not 0 <= moved[place] < space.grid.size or (np.diff(moved) < 0).any():
                    continue
                found = _witness(space, moved, sign)
                if found.outcome is Outcome.SOLVED and not found.price >= best.price * (1.0 - 1e-6):
                    best, changes, better = found, moved, True
        if not better:
            shift //= 2
    return best
