"""Ten points and two curves, worked through by an independent computation to the digits given here.

Source: a worked example of the method computed without any code of this project; data invented for it.
"""

import numpy as np
import pytest
import scipy.stats

from fits.engine.assess import assess
from fits.engine.data import validated_curve, validated_data
from fits.engine.result import Result
from fits.engine.settings import Settings, Shrinkage

X = np.arange(1.0, 11.0)
Y = np.array([1.2, 2.9, 4.6, 4.1, 2.4, 1.1, 0.7, 1.6, 1.9, 0.6])
ERRORS = np.array([0.5, 0.5, 0.5, 0.5, 0.6, 0.6, 0.7, 0.7, 0.8, 0.8])
CURVE_A = np.array([1, 3, 4.5, 4, 2.5, 1, 0.5, 1.5, 2, 1])
CURVE_B = np.array([1.5, 2.5, 3.5, 3.5, 3, 2, 1.2, 1, 1, 1])
SIX_DIGITS = 5e-7


def computed(shrinkage: Shrinkage = Shrinkage.MONOTONE, correlation: float = 0.0) -> Result:
    covariance = np.outer(ERRORS, ERRORS) * correlation ** np.abs(np.subtract.outer(X, X))
    data = validated_data(X, Y, covariance=covariance) if correlation else validated_data(X, Y, errors=ERRORS)
    curves = [validated_curve("A", X, CURVE_A), validated_curve("B", X, CURVE_B)]
    return assess(data, curves, Settings(resolution=8, shrinkage=shrinkage), rng=np.random.default_rng(1))


@pytest.fixture(scope="module")
def monotone() -> Result:
    return computed()


@pytest.fixture(scope="module")
def nested() -> Result:
    return computed(Shrinkage.NESTED)


@pytest.fixture(scope="module")
def correlated() -> Result:
    return computed(correlation=0.4)


def test_coordinates(monotone: Result) -> None:
    expected = [4.099336, -0.957354, 1.719356, -0.274179, -0.483077, -1.063483, -0.051231, -0.396196]
    assert monotone.fit.z == pytest.approx(expected, abs=SIX_DIGITS)


def test_leftover(monotone: Result) -> None:
    assert monotone.fit.leftover is not None
    assert monotone.fit.leftover.chi2 == pytest.approx(0.304807, abs=SIX_DIGITS)
    assert monotone.fit.leftover.dof == 2


def test_monotone_shrinkage(monotone: Result) -> None:
    shrunk = monotone.fit.shrunk
    expected = [0.994049, 0.948357, 0.948357, 0.791599, 0.791599, 0.791599, 0.0, 0.0]
    assert shrunk.factors == pytest.approx(expected, abs=SIX_DIGITS)
    assert shrunk.risk == pytest.approx(0.486151884, abs=1e-9)
    assert shrunk.tau == pytest.approx(0.346247378, abs=1e-9)


def test_published_radii(monotone: Result) -> None:
    expected = [0.799044, 0.964306, 1.027462, 1.136505]
    assert [radius.published for radius in monotone.ball.radii] == pytest.approx(expected, abs=SIX_DIGITS)


def test_distances_and_published_entry_levels(monotone: Result) -> None:
    a, b = monotone.verdicts
    assert (a.distance, b.distance) == pytest.approx((0.522519704, 0.919867219), abs=1e-9)
    entries = (a.published_entry_level, b.published_entry_level)
    assert entries == pytest.approx((0.269103, 0.850767), abs=SIX_DIGITS)


def test_nested_shrinkage(nested: Result) -> None:
    shrunk = nested.fit.shrunk
    assert shrunk.factors.tolist() == [1.0] * 6 + [0.0] * 2
    assert shrunk.risk == pytest.approx(0.559595922, abs=1e-9)
    assert shrunk.tau == pytest.approx(0.4, abs=1e-9)
    assert nested.ball.radii[2].published == pytest.approx(1.103421, abs=SIX_DIGITS)
    a, b = nested.verdicts
    assert (a.distance, b.distance) == pytest.approx((0.514484882, 1.121411199), abs=1e-9)
    assert b.published_entry_level == pytest.approx(0.959500, abs=SIX_DIGITS)


def test_misfit_by_scale(monotone: Result) -> None:
    a, b = (verdict.scales for verdict in monotone.verdicts)
    assert a.functions == b.functions == (1, 2, 3, 4, 5, 6, 7, 8)
    expected_a = [0.847554, 0.929129, 0.957027, 0.980084, 0.994024, 0.996457, 0.998615, 0.999546]
    expected_b = [0.453661, 0.653301, 0.339844, 0.283362, 0.328268, 0.054363, 0.088925, 0.111717]
    assert a.p_values == pytest.approx(expected_a, abs=SIX_DIGITS)
    assert b.p_values == pytest.approx(expected_b, abs=SIX_DIGITS)


def test_scale_p_values_and_worst_scales(monotone: Result) -> None:
    a, b = (verdict.scales for verdict in monotone.verdicts)
    # 20 000 minima were simulated for these numbers: three standard errors.
    assert a.p_value == pytest.approx(0.989, abs=0.003)
    assert b.p_value == pytest.approx(0.150, abs=0.008)
    assert (a.functions[a.worst], b.functions[b.worst]) == (1, 6)


def test_full_covariance(correlated: Result) -> None:
    shrunk = correlated.fit.shrunk
    expected = [0.986477, 0.926422, 0.926422, 0.828719, 0.828719, 0.828719, 0.237703, 0.237703]
    assert correlated.fit.z[0] == pytest.approx(2.719323, abs=SIX_DIGITS)
    assert shrunk.factors == pytest.approx(expected, abs=SIX_DIGITS)
    assert shrunk.risk == pytest.approx(0.580088327, abs=1e-9)
    assert shrunk.tau == pytest.approx(0.349977048, abs=1e-9)
    assert correlated.ball.radii[2].published == pytest.approx(1.075058, abs=SIX_DIGITS)
    assert [verdict.distance for verdict in correlated.verdicts] == pytest.approx(
        [0.540214538, 0.867242086], abs=1e-9
    )
    assert correlated.fit.leftover is not None
    assert correlated.fit.leftover.chi2 == pytest.approx(0.639710, abs=SIX_DIGITS)


def test_scipy_agrees_on_the_chi_square_tails(monotone: Result) -> None:
    """Reference library: scipy.stats.chi2."""
    b = monotone.verdicts[1]
    sums = np.cumsum(10.0 * (monotone.fit.z - b.coordinates) ** 2)
    assert b.scales.p_values == pytest.approx(scipy.stats.chi2.sf(sums, np.arange(1, 9)), rel=1e-12)
