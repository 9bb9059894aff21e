"""Σ = L Lᵀ, and L⁻¹ applied to data, curves and basis functions."""

from dataclasses import dataclass
from typing import Protocol

import numpy as np
import scipy.linalg

from fits.engine.data import MAXIMUM_COVARIANCE_POINTS, Data, ErrorSource, FloatArray
from fits.engine.refusal import InputRefused


class Whitening(Protocol):
    """Turns values with covariance Σ into values with covariance I."""

    @property
    def standard_errors(self) -> FloatArray:
        """sqrt(diag Σ), shape (n,)."""

    def apply(self, values: FloatArray) -> FloatArray:
        """L⁻¹ values, for shape (n,) or (n, k)."""

    def scaled(self, factor: float) -> "Whitening":
        """The whitening of factor² Σ."""


@dataclass(frozen=True, eq=False)
class IndependentErrors:
    """Σ = diag(σ²)."""

    standard_errors: FloatArray

    def apply(self, values: FloatArray) -> FloatArray:
        sigma = self.standard_errors
        return np.asarray(values / (sigma if values.ndim == 1 else sigma[:, None]))

    def scaled(self, factor: float) -> "IndependentErrors":
        return IndependentErrors(self.standard_errors * factor)


@dataclass(frozen=True, eq=False)
class CorrelatedErrors:
    """Σ by its lower Cholesky factor."""

    lower: FloatArray

    @property
    def standard_errors(self) -> FloatArray:
        return np.asarray(np.sqrt(np.einsum("ij,ij->i", self.lower, self.lower)))

    def apply(self, values: FloatArray) -> FloatArray:
        solved = scipy.linalg.solve_triangular(self.lower, values, lower=True, check_finite=False)
        return np.asarray(solved, dtype=np.float64)

    def scaled(self, factor: float) -> "CorrelatedErrors":
        return CorrelatedErrors(self.lower * factor)


def whitening_of(data: Data) -> Whitening:
    """The whitening of validated data; where σ is unknown, that of Σ₀ = diag(r²) (σ = 1).

    Raises InputRefused, field "covariance", where Σ is not positive definite.
    """
    if data.source is ErrorSource.COUNTS:
        independent = np.ones(data.points)
    elif data.errors is not None:
        independent = data.errors
    else:
        independent = np.ones(data.points)
    if data.covariance is None and not data.shared:
        return IndependentErrors(independent)
    if data.points > MAXIMUM_COVARIANCE_POINTS:
        raise InputRefused(
            "covariance-too-large",
            "shared",
            f"shared errors of {data.points} points; at most {MAXIMUM_COVARIANCE_POINTS} are supported",
            "Thin the data",
        )
    matrix = np.diag(independent**2) if data.covariance is None else data.covariance
    for column in data.shared.values():
        matrix = matrix + np.outer(column, column)
    return CorrelatedErrors(cholesky(matrix))


def cholesky(matrix: FloatArray) -> FloatArray:
    """The lower factor of a symmetric matrix, or a refusal that names its smallest eigenvalue."""
    try:
        lower = scipy.linalg.cholesky(matrix, lower=True, check_finite=False)
    except np.linalg.LinAlgError:
        smallest = float(scipy.linalg.eigvalsh(matrix, subset_by_index=[0, 0])[0])
        raise InputRefused(
            "covariance-not-positive-definite",
            "covariance",
            f"not positive definite: its smallest eigenvalue is {smallest:.3g}",
            "A covariance has only positive eigenvalues; check units, signs and the order of rows",
        ) from None
    return np.asarray(lower, dtype=np.float64)
