"""What makes stated or estimated errors doubtful, as numbers; words are made of them elsewhere."""

from collections.abc import Sequence

import numpy as np

from fits.engine.data import FloatArray
from fits.engine.error_size import ErrorSize

# Estimates of one σ further apart than this contradict one another.
SIZES_AGREE_WITHIN = 0.20


def sizes_disagree(sizes: Sequence[ErrorSize]) -> bool:
    """Whether the largest estimate of σ exceeds the smallest by more than 20 %."""
    found = [size.sigma for size in sizes]
    return len(found) > 1 and max(found) > (1.0 + SIZES_AGREE_WITHIN) * min(found)


def root_mean_square(values: FloatArray) -> float:
    """Of errors along x: their typical size."""
    return float(np.sqrt(np.mean(values**2)))
