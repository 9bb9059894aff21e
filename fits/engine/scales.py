"""The scale set: a curve's misfit judged over all features wider than w, for every w at once.

Under a curve m, D_j = n (Z_j − β_mj)² are independent χ²_1 whatever m is. p_k = P(χ²_k ≥ D_1 + … + D_k) for a
sequence of k; M = min_k p_k has a distribution that depends on J alone, simulated once in a seeded table. Where the
error size is estimated with ν degrees of freedom, F_{k,ν} takes the place of χ²_k/k, and the table depends on ν too.
The idea is that of adaptive Neyman tests (J. Fan, JASA 91, 1996) and order-selection tests (R. Eubank, J. Hart,
Ann. Statist. 20, 1992), turned into a set.
"""

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import scipy.special

from fits.engine.data import FloatArray

# So many that the error of the table itself moves no coverage by more than a tenth of a percent or two: with 20 000 the
# 99 % set at J = 40 held 98.85 %.
TABLE_DRAWS = 100_000
# One table serves every assessment, so that scale p-values of different ones compare exactly.
TABLE_SEED = 20_000
_BATCH_VALUES = 2_000_000


@dataclass(frozen=True, eq=False)
class ScaleMisfit:
    """functions: the sequence of k; p_values: p_k of one curve; p_value: its scale p-value."""

    functions: tuple[int, ...]
    p_values: FloatArray
    p_value: float

    @property
    def worst(self) -> int:
        """Index of the k that attains M."""
        return int(np.argmin(self.p_values))


@dataclass(frozen=True, eq=False)
class ScaleTable:
    """Simulated M for J functions, sorted."""

    functions: tuple[int, ...]
    freedom: float
    minima: FloatArray

    def misfit(self, squares: FloatArray) -> ScaleMisfit:
        """Judge one curve by D_1 … D_J, shape (J,)."""
        sums = np.cumsum(squares)[np.array(self.functions) - 1]
        p_values = tail_probabilities(sums, np.array(self.functions), self.freedom)
        below = np.searchsorted(self.minima, p_values.min(), side="right")
        return ScaleMisfit(self.functions, p_values, (1.0 + float(below)) / (self.minima.size + 1.0))

    def threshold(self, level: float) -> float:
        """A curve is in the scale set at this level exactly when its M is at or above this."""
        rejected = math.floor((1.0 - level) * (self.minima.size + 1.0) + 1e-9) - 1
        return float(self.minima[rejected]) if rejected >= 0 else 0.0


def scale_sequence(functions: int) -> tuple[int, ...]:
    """k_1 = 1, k_{i+1} = max(k_i + 1, ⌊1.15 k_i⌋), ending with J."""
    sequence = [1]
    while sequence[-1] < functions:
        k = sequence[-1]
        # In integers: 1.15 × 20 is 22.999… in floating point.
        sequence.append(min(functions, max(k + 1, 115 * k // 100)))
    return tuple(sequence)


@lru_cache(maxsize=32)
def scale_table(functions: int, freedom: float = math.inf) -> ScaleTable:
    """The table for J functions (and ν), simulated on first use and kept."""
    sequence = scale_sequence(functions)
    rng = np.random.default_rng([TABLE_SEED, functions])
    minima = np.empty(TABLE_DRAWS)
    batch = max(1, _BATCH_VALUES // functions)
    for start in range(0, TABLE_DRAWS, batch):
        size = min(batch, TABLE_DRAWS - start)
        squares = rng.standard_normal((size, functions)) ** 2
        sums = np.cumsum(squares, axis=1)[:, np.array(sequence) - 1]
        if not math.isinf(freedom):
            sums /= (rng.chisquare(freedom, size) / freedom)[:, None]
        minima[start : start + size] = tail_probabilities(sums, np.array(sequence), freedom).min(axis=1)
    minima.sort()
    minima.flags.writeable = False
    return ScaleTable(sequence, freedom, minima)


def tail_probabilities(sums: FloatArray, functions: FloatArray, freedom: float) -> FloatArray:
    """P(χ²_k ≥ sum), or P(F_{k,ν} ≥ sum/k), along the last axis."""
    if math.isinf(freedom):
        return np.asarray(scipy.special.chdtrc(functions, sums))
    return np.asarray(scipy.special.fdtrc(functions, freedom, sums / functions))
