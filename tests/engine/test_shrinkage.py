import numpy as np
import pytest
import scipy.optimize
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from fits.engine.settings import Shrinkage
from fits.engine.shrinkage import nested_risks, risk_of, shrink
from tests.engine import slow

COORDINATES = arrays(
    np.float64,
    st.integers(1, 60),
    elements=st.floats(-5, 5).filter(lambda value: abs(value) > 1e-3),
)
VARIANCES = st.floats(1e-4, 1.0)


@settings(max_examples=200, deadline=None)
@given(z=COORDINATES, v=VARIANCES)
def test_monotone_factors_are_scipys_isotonic_regression(z: np.ndarray, v: float) -> None:
    expected = scipy.optimize.isotonic_regression(1.0 - v / z**2, weights=z**2, increasing=False).x
    found = shrink(z, variance=v, freedom=np.inf, shrinkage=Shrinkage.MONOTONE)
    assert found.factors == pytest.approx(np.clip(expected, 0.0, 1.0), abs=1e-9)


@settings(max_examples=200, deadline=None)
@given(z=COORDINATES, v=VARIANCES, freedom=st.sampled_from([np.inf, 12.0]), nested=st.booleans())
def test_risk_and_tau_are_those_of_a_slow_loop(z: np.ndarray, v: float, freedom: float, nested: bool) -> None:
    shrinkage = Shrinkage.NESTED if nested else Shrinkage.MONOTONE
    found = shrink(z, variance=v, freedom=freedom, shrinkage=shrinkage)
    assert found.risk == pytest.approx(slow.risk(z, v, found.factors), rel=1e-9, abs=1e-12)
    assert found.tau == pytest.approx(slow.tau(z, v, found.factors, freedom), rel=1e-9, abs=1e-12)


@settings(max_examples=100, deadline=None)
@given(z=COORDINATES, v=VARIANCES, seed=st.integers(0, 2**32 - 1))
def test_no_monotone_factors_have_a_smaller_risk(z: np.ndarray, v: float, seed: int) -> None:
    best = shrink(z, variance=v, freedom=np.inf, shrinkage=Shrinkage.MONOTONE)
    rng = np.random.default_rng(seed)
    for _ in range(20):
        other = np.sort(rng.uniform(0, 1, z.size))[::-1]
        assert risk_of(z, v, other) >= best.risk - 1e-9


@settings(max_examples=100, deadline=None)
@given(z=COORDINATES, v=VARIANCES)
def test_nested_factors_attain_the_least_of_the_nested_risks(z: np.ndarray, v: float) -> None:
    found = shrink(z, variance=v, freedom=np.inf, shrinkage=Shrinkage.NESTED)
    risks = nested_risks(z, v)
    assert risks.size == z.size + 1
    assert found.risk == pytest.approx(risks.min(), rel=1e-9, abs=1e-12)
    assert set(found.factors) <= {0.0, 1.0}


def test_a_vanishing_coordinate_is_the_limit_of_small_ones() -> None:
    z = np.array([2.0, 0.0, 1.0, 0.0, 0.0])
    limit = shrink(z, variance=0.1, freedom=np.inf, shrinkage=Shrinkage.MONOTONE)
    nearly = shrink(np.where(z == 0.0, 1e-9, z), variance=0.1, freedom=np.inf, shrinkage=Shrinkage.MONOTONE)
    assert np.isfinite(limit.factors).all()
    assert limit.factors == pytest.approx(nearly.factors, abs=1e-12)
    # 0 pools with the 1 behind it: (0 + 1 − 2 · 0.1)/(0 + 1).
    assert limit.factors == pytest.approx([1 - 0.1 / 4, 0.8, 0.8, 0.0, 0.0], abs=1e-12)


def test_data_of_zeros_are_shrunk_to_nothing() -> None:
    found = shrink(np.zeros(5), variance=0.1, freedom=np.inf, shrinkage=Shrinkage.MONOTONE)
    assert found.factors.tolist() == [0.0] * 5
    assert found.risk == pytest.approx(-0.5)
