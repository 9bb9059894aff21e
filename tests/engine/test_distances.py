"""Distances by one product are those of curves judged one by one."""

from typing import Any

import numpy as np
import pytest

from fits.engine.data import Data, FloatArray, validated_data
from fits.engine.distances import distances
from fits.engine.errors import error_model_of
from fits.engine.fit import fit_of
from fits.engine.result import Fit
from fits.engine.settings import Settings

POINTS = 60
FUNCTIONS = 12


def measured(points: int = POINTS, **errors: Any) -> Data:
    x = np.linspace(1.0, 5.0, points)
    y = np.sin(2.0 * x) + np.random.default_rng(2).normal(0.0, 0.1, points)
    return validated_data(x, y, **errors)


def fit_to(data: Data) -> Fit:
    errors = error_model_of(data, data.y, functions=FUNCTIONS)
    return fit_of(data, data.y, errors.whitening, errors.freedom, functions=FUNCTIONS, settings=Settings())


def curves(points: int = POINTS) -> FloatArray:
    return np.random.default_rng(5).normal(size=(points, 7))


def one_by_one(fit: Fit, values: FloatArray) -> list[float]:
    coordinates = (fit.coordinates.of(fit.whitening.apply(curve)) for curve in values.T)
    return [float(np.linalg.norm(found - fit.estimate)) for found in coordinates]


apart = np.abs(np.subtract.outer(np.arange(POINTS), np.arange(POINTS)))
own = np.linspace(0.05, 0.2, POINTS)


@pytest.mark.parametrize(
    "errors",
    [
        {"errors": own},
        {"covariance": np.outer(own, own) * 0.6**apart},
        {"errors": own, "shared": {"level": np.full(POINTS, 0.3), "tilt": np.linspace(-0.2, 0.2, POINTS)}},
        {"covariance": np.outer(own, own) * 0.6**apart, "shared": {"level": np.full(POINTS, 0.3)}},
    ],
    ids=["independent", "correlated", "shared", "correlated and shared"],
)
def test_distances_are_those_of_curves_one_by_one(errors: dict[str, Any]) -> None:
    fit = fit_to(measured(**errors))
    assert distances(fit, curves()) == pytest.approx(one_by_one(fit, curves()), rel=1e-11)


def test_distances_from_a_fit_whose_functions_are_made_in_blocks() -> None:
    points = 50_001
    fit = fit_to(measured(points, errors=np.full(points, 0.1)))
    assert distances(fit, curves(points)) == pytest.approx(one_by_one(fit, curves(points)), rel=1e-10)


def test_the_fit_itself_is_at_distance_0() -> None:
    data = measured(errors=own)
    fit = fit_to(data)
    assert distances(fit, fit.at(data.x)[:, None])[0] == pytest.approx(0.0, abs=1e-10)
