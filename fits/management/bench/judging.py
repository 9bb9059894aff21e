"""Verdicts, draws and distances against loops over library routines, and against bounds."""

import math

import numpy as np
import scipy.optimize

from fits.assessments.detail import detail_document
from fits.assessments.document import result_document
from fits.engine.assess import assess
from fits.engine.ball import exact_p_value, statistic_at
from fits.engine.data import FloatArray, validated_curve, validated_data
from fits.engine.distances import projection_of
from fits.engine.draws import Noise, draw_noise, statistics
from fits.engine.settings import Settings, Shrinkage
from fits.management.bench.case import (
    FUNCTIONS,
    RANDOM_SEED,
    AtLeast,
    AtMost,
    Case,
    fitted,
    made_up,
    two_peaks,
)

DRAWS = 2000
# The loop takes ten seconds for all 2000; a fifth of them, on both sides, tells the same ratio.
COMPARED_DRAWS = 400


def exact_verdicts(scale: int) -> Case:
    """The same draws of the same curves, one compiled loop against one call a draw."""
    draws = COMPARED_DRAWS // scale
    x, y, errors = made_up(1000)
    fit = fitted(validated_data(x, y, errors=errors))
    curves = [fit.coordinates.of(fit.whitening.apply(two_peaks(x) * (1.0 + 0.002 * k))) for k in range(50)]
    found = [statistic_at(float(np.linalg.norm(curve - fit.estimate)), fit.shrunk) for curve in curves]
    noise = _noise(draws)

    def ours() -> list[float]:
        judged = zip(curves, found, strict=True)
        return [exact_p_value(curve, t, noise, shrinkage=Shrinkage.MONOTONE).value for curve, t in judged]

    def theirs() -> list[float]:
        judged = zip(curves, found, strict=True)
        return [plain_p_value(curve, statistic, noise) for curve, statistic in judged]

    return Case(
        f"exact verdicts on 50 curves by {draws} draws each, against a plain loop over "
        "scipy.optimize.isotonic_regression with as many",
        ours,
        theirs,
        AtLeast(50.0),
    )


def plain_p_value(curve: FloatArray, statistic: float, noise: Noise) -> float:
    """The exact p-value, a draw at a time."""
    v, as_far = noise.variance, 0
    for normal in noise.normal:
        z = curve + math.sqrt(v) * normal
        squares = z * z
        regression = scipy.optimize.isotonic_regression(1.0 - v / squares, weights=squares, increasing=False)
        kept = np.clip(regression.x, 0.0, 1.0)
        lost = 1.0 - kept
        bias = float(lost * lost @ (squares - v))
        risk = v * float(kept @ kept) + bias
        signs = 2.0 * kept - 1.0
        tau = math.sqrt(2.0 * v * v * float(signs @ signs) + 4.0 * v * max(0.0, bias))
        miss = kept * z - curve
        as_far += (float(miss @ miss) - risk) / tau >= statistic
    return (1.0 + as_far) / (noise.draws + 1.0)


def draws_alone(scale: int) -> Case:
    """What each curve and each centre costs."""
    noise = _noise(DRAWS)
    centre = np.exp(-0.2 * np.arange(FUNCTIONS))
    return Case(
        f"{DRAWS} draws of {FUNCTIONS} functions, against a bound of 10 ms",
        lambda: statistics(centre, noise, shrinkage=Shrinkage.MONOTONE),
        0.010,
        AtMost(1.0),
    )


def batch_of_distances(scale: int) -> Case:
    """Scanning a parameter of a theory: one product of matrices is the least that it takes."""
    count = 100_000 // scale
    x, y, errors = made_up(1000)
    fit = fitted(validated_data(x, y, errors=errors))
    values = np.random.default_rng(RANDOM_SEED).standard_normal((1000, count))
    matrix = projection_of(fit).matrix
    return Case(
        f"distances of {count} curves on 1000 points, against one bare product of matrices",
        lambda: projection_of(fit).distances(values),
        lambda: matrix @ values,
        AtMost(1.3),
    )


def whole_assessment(scale: int) -> Case:
    """From arrays to documents, as a worker computes it."""
    x, y, errors = made_up(1000)
    data = validated_data(x, y, errors=errors)
    grid = np.linspace(0.0, 10.0, 500)
    curves = [validated_curve(f"curve {k}", grid, two_peaks(grid) * (1.0 + 0.01 * k)) for k in range(20)]

    def ours() -> object:
        found = assess(data, curves, Settings(), rng=np.random.default_rng(RANDOM_SEED))
        return result_document(found, seed=RANDOM_SEED), detail_document(found)

    return Case(
        "assessment of 1000 points and 20 curves, from arrays to documents, against a bound of 2 s",
        ours,
        2.0,
        AtMost(1.0),
    )


def _noise(draws: int) -> Noise:
    rng = np.random.default_rng(RANDOM_SEED)
    return draw_noise(rng, draws=draws, functions=FUNCTIONS, variance=1e-3, freedom=math.inf)
