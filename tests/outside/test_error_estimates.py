"""Estimates of the error size against published values, and the transform of counts against its published variance."""

import numpy as np
import pytest

from fits.engine.counts import stabilised
from fits.engine.data import ErrorSource, FloatArray, validated_data
from fits.engine.error_size import (
    SizeSource,
    error_size_from_first_differences,
    error_size_from_second_differences,
)
from fits.engine.errors import error_model_of
from tests.outside.nist import STANDARD_ERROR, gauss1


def test_all_three_estimates_on_gauss1_agree_with_the_stated_variance() -> None:
    """NIST states variance 6.25 for Gauss1 (source: nist.py)."""
    nist = gauss1()
    data = validated_data(nist.x, nist.y, source=ErrorSource.ESTIMATE)
    model = error_model_of(data, data.y, functions=40)
    assert [size.source for size in model.sizes] == list(SizeSource)
    for size in model.sizes:
        # First differences keep a little of the curve's slope; three standard errors hold all the same.
        assert abs(size.sigma - STANDARD_ERROR) < 3 * size.standard_error
        assert 0.08 < size.standard_error < 0.2


def variance_factor(estimate: object, n: int, repeats: int) -> float:
    """var(σ̂²)/(2 σ⁴/n) over seeded repeats of pure noise."""
    rng = np.random.default_rng(1)
    x = np.arange(float(n))
    found = [estimate(x, rng.normal(size=n)).sigma ** 2 for _ in range(repeats)]  # type: ignore[operator]
    return float(np.var(found) * n / 2.0)


def test_first_differences_have_their_published_variance() -> None:
    """var = 3/2 · 2σ⁴/n asymptotically: J. Rice, Ann. Statist. 12 (1984); P. Hall, J. Kay, D. Titterington,
    Biometrika 77 (1990), whose formula 1 + 1/(2m) gives it for m = 1. From memory."""
    # The simulation's own error is sqrt(2/4000) = 2.2 %.
    assert variance_factor(error_size_from_first_differences, 400, 4000) == pytest.approx(1.5, rel=0.08)


def test_second_differences_have_their_published_variance() -> None:
    """var = 35/18 · 2σ⁴/n asymptotically: T. Gasser, L. Sroka, C. Jennen-Steinmetz, Biometrika 73 (1986). From memory;
    it follows from the correlations −2/3 and 1/6 of neighbouring differences: 1 + 2 (4/9 + 1/36)."""
    assert variance_factor(error_size_from_second_differences, 400, 4000) == pytest.approx(35 / 18, rel=0.08)


@pytest.mark.parametrize("mean", [4.0, 10.0, 50.0, 1000.0])
def test_the_transform_of_counts_has_its_published_variance(mean: float) -> None:
    """var(2 sqrt(y + 3/8)) = 1 + 1/(16 m²) + …: F. Anscombe, Biometrika 35 (1948). From memory. Sums over the exact
    Poisson probabilities of scipy."""
    from scipy.stats import poisson

    counts: FloatArray = np.arange(0.0, mean + 20 * np.sqrt(mean) + 50)
    weights = poisson.pmf(counts, mean)
    values = stabilised(counts)
    variance = weights @ values**2 - (weights @ values) ** 2
    assert variance == pytest.approx(1.0 + 1.0 / (16 * mean**2), abs=0.6 / mean**2)
