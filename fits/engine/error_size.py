"""The size σ of errors whose shape is known and whose scale is not."""

from dataclasses import dataclass

from fits.engine.coordinates import Coordinates
from fits.engine.data import FloatArray
from fits.engine.leftover import leftover_of
from fits.engine.refusal import InputRefused

MINIMUM_FREEDOM = 10


@dataclass(frozen=True)
class ErrorSize:
    """σ estimated with ν degrees of freedom."""

    sigma: float
    freedom: int


def error_size_from_leftover(coordinates: Coordinates, whitened: FloatArray) -> ErrorSize:
    """σ² = C/(n − J), C the leftover under Σ₀ (σ = 1).

    whitened  L₀⁻¹ y, shape (n,). Raises InputRefused where fewer than 10 degrees of freedom are left, and where
    the data leave nothing over at all.
    """
    leftover = leftover_of(coordinates, whitened)
    if leftover is None or leftover.dof < MINIMUM_FREEDOM:
        left = 0 if leftover is None else leftover.dof
        raise InputRefused(
            "too-few-left-over",
            "errors",
            f"{left} degrees of freedom are left to estimate the errors from; {MINIMUM_FREEDOM} are needed",
            "Choose a lower resolution or give the errors",
        )
    if leftover.chi2 <= 1e-20 * float(whitened @ whitened) or leftover.chi2 == 0.0:
        raise InputRefused(
            "no-scatter", "y", "the data leave no scatter to estimate errors from", "Give the errors"
        )
    return ErrorSize(float((leftover.chi2 / leftover.dof) ** 0.5), leftover.dof)
