"""The nearest sequence with at most k peaks: weighted least squares by dynamic programming.

A sequence with at most k interior peaks is a fall, then k times a rise and a fall, then a rise, each possibly empty:
2k + 2 monotone segments. The cost of a segment is that of isotonic regression (pooling of neighbours), for all ends of
a segment at once from one run over it; the change points are found by dynamic programming. k = 0 is a valley, which is
M. Frisén's unimodal regression (The Statistician 35, 1986) turned upside down.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fits.engine.compiled import compiled
from fits.engine.data import FloatArray

IndexArray = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class NearestSequences:
    """cost: least Σ w (g − y)² over sequences with at most k peaks, shape (most + 1,); changes: where each segment of
    the best one ends (indices from 0 to n, one for each segment but the last)."""

    cost: FloatArray
    changes: tuple[tuple[int, ...], ...]


def nearest_sequences(y: FloatArray, weights: FloatArray, *, most: int) -> NearestSequences:
    """For k = 0 … most. Memory and time grow with n²; n is at most a few thousand."""
    falls, rises = _segment_costs(-y, weights), _segment_costs(y, weights)
    segments = 2 * most + 2
    best = np.empty((segments, y.size + 1))
    came_from = np.zeros((segments, y.size + 1), np.int64)
    _change_points(falls, rises, best, came_from)
    changes = []
    for peaks in range(most + 1):
        end, ends = y.size, []
        for segment in range(2 * peaks + 1, 0, -1):
            end = int(came_from[segment, end])
            ends.append(end)
        changes.append(tuple(reversed(ends)))
    return NearestSequences(best[1::2, y.size].copy(), tuple(changes))


@compiled
def _segment_costs(y: FloatArray, weights: FloatArray) -> FloatArray:
    """cost[i, j]: least Σ w (g − y)² over y_i … y_{j−1} with g non-decreasing, shape (n + 1, n + 1)."""
    n = y.size
    cost = np.zeros((n + 1, n + 1))
    means = np.empty(n)
    sums = np.empty(n)
    for start in range(n):
        pools = 0
        total = 0.0
        for end in range(start, n):
            means[pools] = y[end]
            sums[pools] = weights[end]
            pools += 1
            while pools > 1 and means[pools - 1] < means[pools - 2]:
                first, second = sums[pools - 2], sums[pools - 1]
                gap = means[pools - 1] - means[pools - 2]
                # What two pools lose by taking one value: no difference of large sums, so no digits are lost.
                total += first * second / (first + second) * gap * gap
                means[pools - 2] += gap * second / (first + second)
                sums[pools - 2] = first + second
                pools -= 1
            cost[start, end + 1] = total
    return cost


@compiled
def _change_points(falls: FloatArray, rises: FloatArray, best: FloatArray, came_from: IndexArray) -> None:
    n = falls.shape[0] - 1
    for end in range(n + 1):
        best[0, end] = falls[0, end]
    for segment in range(1, best.shape[0]):
        for end in range(n + 1):
            least = np.inf
            place = 0
            for start in range(end + 1):
                cost = rises[start, end] if segment % 2 == 1 else falls[start, end]
                if best[segment - 1, start] + cost < least:
                    least = best[segment - 1, start] + cost
                    place = start
            best[segment, end] = least
            came_from[segment, end] = place
