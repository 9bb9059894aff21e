"""Counts are judged honestly, few as they may be."""

import numpy as np
import pytest
from scipy.stats import poisson
from threadpoolctl import threadpool_limits

from fits.engine.assess import assess
from fits.engine.counts import mean_stabilised, stabilised
from fits.engine.data import ErrorSource, validated_curve, validated_data
from fits.engine.settings import Settings

REPEATS = 100


@pytest.mark.parametrize("expected", [0.0, 0.01, 1.0, 7.3, 99.99, 100.0, 130.0, 3000.0])
def test_the_mean_of_the_transform_is_the_sum_over_all_counts(expected: float) -> None:
    counts = np.arange(0.0, expected + 20.0 * np.sqrt(expected) + 60.0)
    summed = poisson.pmf(counts, expected) @ stabilised(counts)
    assert mean_stabilised(np.array([expected]))[0] == pytest.approx(summed, abs=1e-6)


@threadpool_limits.wrap(limits=1)  # type: ignore[untyped-decorator]
def test_a_true_curve_of_few_counts_is_rejected_no_more_often_than_it_should() -> None:
    """1000 points of 3 to 6 counts: judged by the transform of its expectation the scale set would reject it in most
    repeats. 5 % of 100 are 5 ± 2.2."""
    x = np.linspace(0.0, 10.0, 1000)
    grid = np.linspace(0.0, 10.0, 2000)

    def true(at: np.ndarray) -> np.ndarray:
        return np.asarray(3.0 + 3.0 * np.exp(-((at - 4.0) ** 2)))

    curve = validated_curve("true", grid, true(grid))
    rng = np.random.default_rng(8)
    exact = scales = 0
    for _ in range(REPEATS):
        data = validated_data(x, rng.poisson(true(x)).astype(float), source=ErrorSource.COUNTS)
        verdict = assess(data, [curve], Settings(draws=200), rng=rng).verdicts[0]
        exact += verdict.p_value.value <= 0.05
        scales += verdict.scales.p_value <= 0.05
    assert exact <= 12
    assert scales <= 12
