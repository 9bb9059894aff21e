"""What makes stated or estimated errors doubtful, as numbers; words are made of them elsewhere."""

from collections.abc import Mapping, Sequence

import numpy as np

from fits.engine.data import FloatArray
from fits.engine.error_size import ErrorSize

# Estimates of one σ further apart than this contradict one another.
SIZES_AGREE_WITHIN = 0.20


def sizes_disagree(sizes: Sequence[ErrorSize]) -> bool:
    """Whether the largest estimate of σ exceeds the smallest by more than 20 %."""
    found = [size.sigma for size in sizes]
    return len(found) > 1 and max(found) > (1.0 + SIZES_AGREE_WITHIN) * min(found)


def shared_sizes(shared: Mapping[str, FloatArray], own: FloatArray) -> dict[str, float]:
    """Each shared error over the points' own errors, shape (n,), both root-mean-square."""
    size = _root_mean_square(own)
    return {name: _root_mean_square(column) / size for name, column in shared.items()}


def _root_mean_square(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2)))
