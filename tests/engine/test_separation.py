"""Distances of curves from each other."""

import numpy as np
import pytest

from fits.engine.assess import assess
from fits.engine.data import FloatArray, validated_curve, validated_data
from fits.engine.result import Result
from fits.engine.separation import separations_of
from fits.engine.settings import Settings

X = np.linspace(0.5, 4.0, 60)
ERRORS = np.linspace(0.1, 0.3, X.size)


def spectrum(x: FloatArray) -> FloatArray:
    return np.asarray(np.exp(-(((x - 1.5) / 0.4) ** 2)) + 1.0 / x)


def judged(*curves: FloatArray, resolution: int | None = None) -> Result:
    data = validated_data(X, spectrum(X) + np.random.default_rng(1).normal(0.0, ERRORS), errors=ERRORS)
    tables = [validated_curve(f"curve {index}", X, curve) for index, curve in enumerate(curves)]
    settings = Settings(draws=200, resolution=resolution, full=resolution is None)
    return assess(data, tables, settings, rng=np.random.default_rng(1))


def separations(result: Result) -> FloatArray:
    return separations_of([verdict.coordinates for verdict in result.verdicts])


def test_at_full_resolution_it_is_the_root_mean_square_difference_in_error_bars() -> None:
    first, second = spectrum(X), 1.3 * spectrum(X) + 0.05 * np.sin(9.0 * X)
    expected = np.sqrt(np.mean(((first - second) / ERRORS) ** 2))
    assert separations(judged(first, second)) == pytest.approx([expected], rel=1e-9)


def test_the_fit_as_a_curve_is_as_far_from_another_as_that_is_from_the_fit() -> None:
    """The same length as the distances of the verdicts."""
    fit = judged(spectrum(X), resolution=12).seen
    result = judged(fit, spectrum(X), 1.2 * spectrum(X), resolution=12)
    assert result.verdicts[0].distance == pytest.approx(0.0, abs=1e-3)
    expected = [result.verdicts[1].distance, result.verdicts[2].distance]
    assert separations(result)[:2] == pytest.approx(expected, abs=1e-3)


def test_pairs_stand_in_the_order_of_the_curves() -> None:
    coordinates = [np.array([0.0, 0.0]), np.array([3.0, 4.0]), np.array([0.0, 1.0])]
    assert separations_of(coordinates) == pytest.approx([5.0, 1.0, np.sqrt(18.0)])


def test_one_curve_makes_no_pair() -> None:
    assert separations_of([np.zeros(3)]).size == 0
    assert separations_of([]).size == 0


def test_two_curves_farther_apart_than_two_radii_are_not_both_in_the_ball() -> None:
    result = judged(spectrum(X), spectrum(X) + 0.25, resolution=12)
    radius = result.ball.radii[2].calibrated
    assert separations(result)[0] > 2.0 * radius
    assert max(verdict.distance for verdict in result.verdicts) > radius
