"""Fits against splines and a bare factorisation."""

import numpy as np
import scipy.interpolate
import scipy.linalg
import scipy.special

from fits.engine.data import FloatArray, validated_data
from fits.engine.settings import DEFAULT_LEVELS
from fits.management.bench.case import FUNCTIONS, AtLeast, AtMost, Case, fitted, made_up


def smoothing_spline(scale: int) -> Case:
    """Both choose how much to smooth from the same data; ours comes with radii."""
    x, y, errors = made_up(1000)

    def ours() -> FloatArray:
        shrunk = fitted(validated_data(x, y, errors=errors)).shrunk
        squares = shrunk.risk + scipy.special.ndtri(DEFAULT_LEVELS) * shrunk.tau
        return np.asarray(np.sqrt(np.maximum(0.0, squares)))

    return Case(
        f"fit of 1000 points with {FUNCTIONS} functions and published radii, against "
        "scipy.interpolate.make_smoothing_spline choosing its own λ",
        ours,
        lambda: scipy.interpolate.make_smoothing_spline(x, y, w=1.0 / errors**2),
        AtLeast(100.0),
    )


def full_covariance(scale: int) -> Case:
    """Whatever is done with a covariance, it must be factorised once."""
    n = 3000 // scale
    x, y, errors = made_up(n)
    apart = np.abs(np.subtract.outer(np.arange(n), np.arange(n)))
    covariance = np.outer(errors, errors) * 0.5**apart
    return Case(
        f"fit of {n} points with a full covariance, against one bare scipy.linalg.cholesky of it",
        lambda: fitted(validated_data(x, y, covariance=covariance)),
        lambda: scipy.linalg.cholesky(covariance, lower=True),
        AtMost(1.5),
    )


def many_points(scale: int) -> Case:
    """Least squares with as many coefficients as functions."""
    n = 1_000_000 // scale
    x, y, errors = made_up(n)
    inner = np.linspace(x[0], x[-1], FUNCTIONS - 2)[1:-1]
    knots = np.concatenate(([x[0]] * 4, inner, [x[-1]] * 4))
    return Case(
        f"fit of {n} points with an error column, against scipy.interpolate.make_lsq_spline with "
        f"{knots.size - 4} coefficients",
        lambda: fitted(validated_data(x, y, errors=errors)),
        lambda: scipy.interpolate.make_lsq_spline(x, y, knots, w=1.0 / errors),
        AtMost(1.3),
    )
