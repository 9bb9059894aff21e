"""The size σ of errors whose shape r_i is known and whose scale is not: Σ = σ² diag(r_i²).

Three estimates that look at different things and should agree. Variance factors: var(σ̂²) = factor · 2σ⁴/n.
- leftover: C/(n − J) under Σ₀ = diag(r²); χ² with ν = n − J.
- first differences: Σ (y_{i+1} − y_i)²/(2 (n − 1)) on y/r sorted by x (J. Rice, Ann. Statist. 12, 1984): robust against
  trends; factor 3/2.
- second differences with their spacing weights (T. Gasser, L. Sroka, C. Jennen-Steinmetz, Biometrika 73, 1986);
  factor 35/18.
The factors follow from the correlations of neighbouring differences, −1/2 and −2/3, 1/6.
"""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np

from fits.engine.coordinates import Coordinates
from fits.engine.data import FloatArray
from fits.engine.refusal import InputRefused

MINIMUM_FREEDOM = 10
FIRST_DIFFERENCES_FACTOR = 3.0 / 2.0
SECOND_DIFFERENCES_FACTOR = 35.0 / 18.0


class SizeSource(StrEnum):
    """What an estimate of σ looks at."""

    LEFTOVER = "leftover"
    FIRST_DIFFERENCES = "first differences"
    SECOND_DIFFERENCES = "second differences"


@dataclass(frozen=True)
class ErrorSize:
    """An estimate of σ, its standard error, and the degrees of freedom of σ̂² (2 σ⁴/var)."""

    source: SizeSource
    sigma: float
    freedom: float

    @property
    def standard_error(self) -> float:
        """That of σ̂: σ̂/sqrt(2ν)."""
        return self.sigma / float(np.sqrt(2.0 * self.freedom))


def error_size_from_leftover(
    coordinates: Coordinates, whitened: FloatArray, shared: FloatArray | None = None
) -> ErrorSize:
    """σ² = C/(n − J), C the leftover under Σ₀ (σ = 1).

    whitened  L₀⁻¹ y, shape (n,); shared: L₀⁻¹ S, shape (n, m): errors of known size that are fitted away, at a cost of
    one degree of freedom each. Raises InputRefused where fewer than 10 degrees of freedom are left, and where the data
    leave nothing over at all.
    """
    rest = coordinates.residuals(whitened, coordinates.of(whitened))
    dof = coordinates.points - coordinates.functions
    if shared is not None and dof > shared.shape[1]:
        outside = np.column_stack(
            [coordinates.residuals(column, coordinates.of(column)) for column in shared.T]
        )
        amplitudes, _, rank, _ = np.linalg.lstsq(outside, rest, rcond=1e-8)
        rest, dof = rest - outside @ amplitudes, dof - int(rank)
    if dof < MINIMUM_FREEDOM:
        raise InputRefused(
            "too-few-left-over",
            "errors",
            f"{dof} degrees of freedom are left to estimate the errors from; {MINIMUM_FREEDOM} are needed",
            "Choose a lower resolution or give the errors",
        )
    chi2 = float(rest @ rest)
    if chi2 <= 1e-20 * float(whitened @ whitened) or chi2 == 0.0:
        raise InputRefused(
            "no-scatter", "y", "the data leave no scatter to estimate errors from", "Give the errors"
        )
    return ErrorSize(SizeSource.LEFTOVER, float(np.sqrt(chi2 / dof)), float(dof))


def error_size_from_first_differences(x: FloatArray, scaled: FloatArray) -> ErrorSize:
    """Rice's estimate of σ from y/r, shape (n,)."""
    ordered = scaled[np.argsort(x, kind="stable")]
    differences = np.diff(ordered)
    sigma = float(np.sqrt(differences @ differences / (2.0 * differences.size)))
    return ErrorSize(SizeSource.FIRST_DIFFERENCES, sigma, x.size / FIRST_DIFFERENCES_FACTOR)


def error_size_from_second_differences(x: FloatArray, scaled: FloatArray) -> ErrorSize:
    """The estimate of Gasser, Sroka and Jennen-Steinmetz of σ from y/r, shape (n,)."""
    residuals = second_differences(x, scaled).residuals
    sigma = float(np.sqrt(residuals @ residuals / residuals.size))
    return ErrorSize(SizeSource.SECOND_DIFFERENCES, sigma, x.size / SECOND_DIFFERENCES_FACTOR)


@dataclass(frozen=True, eq=False)
class SecondDifferences:
    """x of the middle points, sorted, and differences scaled to the variance of one error, shape (n − 2,)."""

    x: FloatArray
    residuals: FloatArray


def second_differences(x: FloatArray, values: FloatArray) -> SecondDifferences:
    """Each point against the straight line through its neighbours: y_i − a y_{i−1} − b y_{i+1}, over
    sqrt(1 + a² + b²), with a = (x_{i+1} − x_i)/(x_{i+1} − x_{i−1}) and b = 1 − a."""
    order = np.argsort(x, kind="stable")
    x, values = x[order], values[order]
    width = x[2:] - x[:-2]
    # Three equal x: the middle one lies between its neighbours as well as anywhere.
    ahead = np.where(width > 0.0, (x[2:] - x[1:-1]) / np.where(width > 0.0, width, 1.0), 0.5)
    behind = 1.0 - ahead
    difference = values[1:-1] - ahead * values[:-2] - behind * values[2:]
    return SecondDifferences(x[1:-1], difference / np.sqrt(1.0 + ahead**2 + behind**2))
