"""Error models: shared errors, estimated sizes and profiles, calibrations, counts."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fits.engine.assess import assess
from fits.engine.data import CurveTable, ErrorSource, FloatArray, validated_curve, validated_data
from fits.engine.error_profile import error_profile
from fits.engine.error_size import (
    error_size_from_second_differences,
    second_differences,
)
from fits.engine.observation import interval_of
from fits.engine.refusal import InputRefused
from fits.engine.result import Result
from fits.engine.settings import Settings
from fits.engine.whitening import CorrelatedErrors, IndependentErrors, Whitening, cholesky

X = np.linspace(0.0, 1.0, 80)


def peaks(x: FloatArray) -> FloatArray:
    return np.asarray(
        3.0 * np.exp(-(((x - 0.3) / 0.08) ** 2)) + 2.0 * np.exp(-(((x - 0.7) / 0.1) ** 2)) + 1.0
    )


def curve(values: FloatArray, x: FloatArray = X, name: str = "curve") -> CurveTable:
    return validated_curve(name, x, values)


def run(data: object, *curves: CurveTable, draws: int = 200, resolution: int = 20, seed: int = 1) -> Result:
    chosen = Settings(draws=draws, resolution=resolution)
    return assess(data, curves, chosen, rng=np.random.default_rng(seed))  # type: ignore[arg-type]


@settings(max_examples=50, deadline=None)
@given(seed=st.integers(0, 2**32 - 1), columns=st.integers(1, 4), correlated=st.booleans())
def test_shared_errors_by_rank_one_updates_are_those_of_the_dense_covariance(
    seed: int, columns: int, correlated: bool
) -> None:
    rng = np.random.default_rng(seed)
    n = 30
    sigma, shared = rng.uniform(0.1, 2.0, n), rng.normal(size=(n, columns)) * rng.uniform(0.0, 10.0)
    own_covariance = np.diag(sigma**2)
    own: Whitening = IndependentErrors(sigma)
    if correlated:
        own_covariance = np.outer(sigma, sigma) * 0.6 ** np.abs(np.subtract.outer(np.arange(n), np.arange(n)))
        own = CorrelatedErrors(cholesky(own_covariance))
    dense = own_covariance + shared @ shared.T
    found = own.with_shared(shared)
    values = rng.normal(size=(n, 3))
    whitened = found.apply(values)
    expected = values.T @ np.linalg.solve(dense, values)
    assert whitened.T @ whitened == pytest.approx(expected, rel=1e-10, abs=1e-10 * np.abs(expected).max())
    assert found.standard_errors == pytest.approx(np.sqrt(np.diag(dense)), rel=1e-12)


def test_shared_errors_added_one_after_another_are_those_added_at_once() -> None:
    rng = np.random.default_rng(2)
    shared = rng.normal(size=(30, 3))
    at_once = IndependentErrors(np.ones(30)).with_shared(shared)
    by_and_by = IndependentErrors(np.ones(30)).with_shared(shared[:, :1]).with_shared(shared[:, 1:])
    values = rng.normal(size=30)
    assert by_and_by.apply(values) @ by_and_by.apply(values) == pytest.approx(
        at_once.apply(values) @ at_once.apply(values), rel=1e-12
    )


def test_a_shared_error_of_zero_changes_nothing() -> None:
    own = IndependentErrors(np.ones(9))
    assert own.with_shared(np.zeros((9, 2))) is own


def test_second_differences_vanish_on_straight_lines_of_uneven_points() -> None:
    x = np.sort(np.random.default_rng(1).uniform(0, 1, 30))
    assert second_differences(x, 3.0 - 2.0 * x).residuals == pytest.approx(np.zeros(28), abs=1e-12)


def test_second_differences_on_even_points_have_the_published_weights() -> None:
    """(2/3) · mean of (½ y_{i−1} − y_i + ½ y_{i+1})²: Gasser, Sroka, Jennen-Steinmetz, Biometrika 73 (1986)."""
    y = np.random.default_rng(1).normal(size=50)
    expected = math.sqrt(2.0 / 3.0 * np.mean((0.5 * y[:-2] - y[1:-1] + 0.5 * y[2:]) ** 2))
    assert error_size_from_second_differences(np.arange(50.0), y).sigma == pytest.approx(expected, rel=1e-12)


def test_differences_of_three_equal_x_are_taken_against_the_mean_of_the_neighbours() -> None:
    found = second_differences(np.zeros(3), np.array([1.0, 5.0, 3.0]))
    assert found.residuals == pytest.approx([3.0 / math.sqrt(1.5)])


def test_estimated_errors_beside_shared_ones_scale_only_what_is_independent() -> None:
    rng = np.random.default_rng(4)
    shared = np.full(X.size, 5.0)
    y = peaks(X) + 0.2 * rng.normal(size=X.size) + 5.0 * rng.normal()
    data = validated_data(X, y, source=ErrorSource.ESTIMATE, shared={"baseline": shared})
    result = run(data, curve(peaks(X)))
    assert result.sigma is not None
    assert result.sigma == pytest.approx(0.2, rel=0.3)
    assert result.fit.whitening.standard_errors == pytest.approx(np.sqrt(result.sigma**2 + 25.0), rel=1e-9)


def test_a_profile_of_errors_follows_errors_that_grow() -> None:
    x = np.linspace(0.0, 1.0, 2000)
    sigma = 0.2 * np.exp(1.5 * x)
    y = peaks(x) + sigma * np.random.default_rng(6).normal(size=x.size)
    data = validated_data(x, y, source=ErrorSource.PROFILE)
    found = error_profile(x, y, interval_of(data))
    assert found.standard_errors == pytest.approx(sigma, rel=0.15)
    assert found.freedom == pytest.approx(2000 * 18 / 35 / 3)


def test_a_profile_of_even_errors_is_flat_within_its_error() -> None:
    x = np.linspace(0.0, 1.0, 2000)
    y = 0.5 * np.random.default_rng(6).normal(size=x.size)
    data = validated_data(x, y, source=ErrorSource.PROFILE)
    assert error_profile(x, y, interval_of(data)).standard_errors == pytest.approx(
        np.full(2000, 0.5), rel=0.1
    )


def test_a_profile_needs_sixty_points_and_scatter() -> None:
    with pytest.raises(InputRefused, match="60 are needed"):
        validated_data(X[:59], peaks(X[:59]), source=ErrorSource.PROFILE)
    with pytest.raises(InputRefused, match="no scatter"):
        run(validated_data(X, np.zeros(X.size), source=ErrorSource.PROFILE), curve(peaks(X)))


def test_a_calibration_column_is_made_of_the_curve_that_is_judged() -> None:
    """A curve a tenth too high everywhere is no misfit when the scale is known to a tenth; one that is a tenth of the
    data's mean too high everywhere is."""
    rng = np.random.default_rng(1)
    y = peaks(X) + 0.02 * rng.normal(size=X.size)
    exact = validated_data(X, y, errors=np.full(X.size, 0.02))
    loose = validated_data(X, y, errors=np.full(X.size, 0.02), calibration=0.1)
    scaled = curve(1.1 * peaks(X), name="scaled")
    lifted = curve(peaks(X) + 0.15, name="lifted")
    assert run(exact, scaled).verdicts[0].p_value.value < 0.01
    verdicts = run(loose, scaled, lifted).verdicts
    assert verdicts[0].p_value.value > 0.1
    assert verdicts[0].scales.p_value > 0.1
    assert verdicts[1].p_value.value < 0.01


def test_a_calibration_does_not_pull_the_fit_below_the_data() -> None:
    """Peelle's puzzle (R. Peelle, 1987; from memory): with the column made of the data, the best constant is the mean
    over 1 + c² (n − 1), far below all points."""
    y = 2.0 + 0.3 * np.random.default_rng(9).normal(size=X.size)
    data = validated_data(X, y, errors=np.full(X.size, 0.3), calibration=0.1)
    assert run(data, curve(np.full(X.size, 2.0)), resolution=4).seen.mean() == pytest.approx(
        y.mean(), rel=0.02
    )
    of_the_data = IndependentErrors(np.full(X.size, 0.3)).with_shared(0.1 * y[:, None])
    one, values = of_the_data.apply(np.ones(X.size)), of_the_data.apply(y)
    assert (one @ values) / (one @ one) < 0.6 * y.mean()


def test_p_values_with_a_calibration_are_uniform_under_the_curve() -> None:
    """300 seeded repeats at the true curve; three simulation errors."""
    rng, repeats, truth = np.random.default_rng(10), 300, peaks(X)
    p_values, scale_p_values = [], []
    for repeat in range(repeats):
        y = truth * (1.0 + 0.1 * rng.normal()) + 0.2 * rng.normal(size=X.size)
        data = validated_data(X, y, errors=np.full(X.size, 0.2), calibration=0.1)
        verdict = run(data, curve(truth), draws=199, seed=repeat).verdicts[0]
        p_values.append(verdict.p_value.value)
        scale_p_values.append(verdict.scales.p_value)
    for found in (p_values, scale_p_values):
        for level in (0.1, 0.5):
            error = math.sqrt(level * (1 - level) / repeats)
            assert np.mean(np.array(found) <= level) == pytest.approx(level, abs=3 * error)


def test_p_values_with_an_estimated_size_are_uniform_under_the_curve() -> None:
    """400 seeded repeats at a curve within the resolution; three simulation errors."""
    rng, repeats = np.random.default_rng(12), 400
    x = np.linspace(0.0, 1.0, 40)
    truth = 1.0 + x + np.cos(3 * np.pi * x)
    p_values, scale_p_values = [], []
    for repeat in range(repeats):
        y = truth + 0.7 * rng.normal(size=x.size)
        data = validated_data(x, y, source=ErrorSource.ESTIMATE)
        verdict = run(data, curve(truth, x), draws=199, seed=repeat).verdicts[0]
        p_values.append(verdict.p_value.value)
        scale_p_values.append(verdict.scales.p_value)
    for found in (p_values, scale_p_values):
        for level in (0.05, 0.1, 0.5):
            error = math.sqrt(level * (1 - level) / repeats)
            assert np.mean(np.array(found) <= level) == pytest.approx(level, abs=3 * error)


def test_the_unit_of_y_does_not_matter_with_an_estimated_size() -> None:
    y = peaks(X) + 0.2 * np.random.default_rng(3).normal(size=X.size)
    one = run(validated_data(X, y, source=ErrorSource.ESTIMATE), curve(peaks(X))).verdicts[0]
    other = run(validated_data(X, 1e6 * y, source=ErrorSource.ESTIMATE), curve(1e6 * peaks(X))).verdicts[0]
    assert one.p_value.value == other.p_value.value
    assert one.distance == pytest.approx(other.distance, rel=1e-9)


def test_counts_take_a_calibration() -> None:
    rng = np.random.default_rng(5)
    expected = 300.0 * peaks(X)
    counts = rng.poisson(1.1 * expected).astype(float)
    exact = validated_data(X, counts, source=ErrorSource.COUNTS)
    loose = validated_data(X, counts, source=ErrorSource.COUNTS, calibration=0.1)
    assert run(exact, curve(expected)).verdicts[0].p_value.value < 0.01
    assert run(loose, curve(expected)).verdicts[0].p_value.value > 0.05


def test_a_curve_that_expects_counts_below_zero_is_refused() -> None:
    data = validated_data(X, np.ones(X.size), source=ErrorSource.COUNTS)
    with pytest.raises(InputRefused, match="expects -1 counts at x = 0"):
        run(data, curve(np.full(X.size, -1.0)))
