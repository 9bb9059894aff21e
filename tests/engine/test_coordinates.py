import numpy as np
import pytest
import scipy.integrate

from fits.engine.basis import Interval, averaged_functions, raw_functions
from fits.engine.coordinates import Coordinates, coordinates_of
from fits.engine.data import Axis, Data, FloatArray, validated_data
from fits.engine.design import StoredDesign
from fits.engine.whitening import whitening_of
from tests.engine import slow

RNG = np.random.default_rng(4)


def coordinates(data: Data, functions: int) -> Coordinates:
    return coordinates_of(data, whitening_of(data), functions=functions)


def orthonormal(found: Coordinates) -> FloatArray:
    assert isinstance(found.design, StoredDesign)
    return found.design.orthonormal


def remainder(found: Coordinates, whitened: FloatArray) -> float:
    return float(np.sum(found.residuals(whitened, found.of(whitened)) ** 2))


def uneven(n: int = 60) -> Data:
    x = np.sort(RNG.uniform(0.0, 3.0, n))
    return validated_data(x, np.sin(x), errors=RNG.uniform(0.2, 1.0, n))


def test_the_functions_are_those_of_gram_schmidt() -> None:
    data = uneven()
    assert data.errors is not None
    slowly = slow.orthonormal_functions(data.x, data.errors, 12)
    assert coordinates(data, 12).basis.at(data.x) == pytest.approx(np.array(slowly).T, abs=1e-8)


def test_the_functions_are_orthonormal_under_a_full_covariance() -> None:
    x = np.linspace(0.0, 1.0, 30)
    covariance = 0.3 ** np.abs(np.subtract.outer(x, x) * 29)
    data = validated_data(x, x, covariance=covariance)
    u = coordinates(data, 10).basis.at(x)
    assert u.T @ np.linalg.inv(covariance) @ u / 30 == pytest.approx(np.eye(10), abs=1e-9)


def test_functions_at_any_x_continue_those_at_the_data() -> None:
    data = uneven()
    found = coordinates(data, 8)
    whitened = whitening_of(data).apply(found.basis.at(data.x))
    assert whitened == pytest.approx(np.sqrt(60) * orthonormal(found), abs=1e-9)


def test_a_log_axis_is_a_linear_axis_of_ln_x() -> None:
    x = np.geomspace(0.1, 50.0, 40)
    y, errors = np.log(x), np.full(40, 0.3)
    on_log = coordinates(validated_data(x, y, errors=errors, axis=Axis.LOG), 9)
    of_logs = coordinates(validated_data(np.log(x), y, errors=errors), 9)
    assert orthonormal(on_log) == pytest.approx(orthonormal(of_logs), abs=1e-12)


def test_replicates_leave_fewer_independent_functions() -> None:
    x = np.repeat(np.arange(5.0), 3)
    data = validated_data(x, x, errors=np.ones(15))
    found = coordinates(data, 9)
    assert found.functions == 5
    # On five even places t − 1/2, cos πt and cos 3πt are dependent: all three are odd about the middle.
    assert found.basis.kept == (0, 1, 2, 3, 5)
    assert orthonormal(found).T @ orthonormal(found) == pytest.approx(np.eye(5), abs=1e-12)


def test_a_dependent_function_is_dropped_and_a_later_independent_one_kept() -> None:
    # At t = 0, 1/2, 1 only (many times) and one point aside: three functions span the three places, a fourth the
    # rest; which ones they are depends on the order.
    t = np.array([0.0, 0.0, 0.0, 0.5, 0.5, 0.5, 1.0, 1.0, 1.0, 0.25])
    data = validated_data(t, t, errors=np.ones(10))
    found = coordinates(data, 10)
    raw = raw_functions(t, 10)
    assert found.functions == np.linalg.matrix_rank(raw) == 4
    for count in range(1, 11):
        kept = sum(index < count for index in found.basis.kept)
        assert kept == np.linalg.matrix_rank(raw[:, :count])


def test_as_many_functions_as_points_reproduce_the_data() -> None:
    x = np.sort(RNG.uniform(0.0, 1.0, 12))
    data = validated_data(x, RNG.normal(size=12), errors=np.ones(12))
    found = coordinates(data, 12)
    assert found.basis.at(x) @ found.of(data.y) == pytest.approx(data.y, abs=1e-8)
    assert remainder(found, data.y) == pytest.approx(0.0, abs=1e-12)


def test_a_large_offset_leaves_the_remainder_its_digits() -> None:
    data = uneven()
    found = coordinates(data, 10)
    whitening = whitening_of(data)
    without = remainder(found, whitening.apply(data.y))
    lifted = remainder(found, whitening.apply(data.y + 1e7))
    assert lifted == pytest.approx(without, rel=1e-4)


@pytest.mark.parametrize("axis", list(Axis))
def test_averages_over_bins_are_integrals(axis: Axis) -> None:
    interval = Interval(0.5, 4.0, axis)
    low, high = np.array([0.5, 1.0, 3.9]), np.array([1.0, 2.7, 4.0])
    found = averaged_functions(interval, low, high, 8)
    for row, (start, end) in enumerate(zip(low, high, strict=True)):
        for j in range(8):

            def raw(x: float, j: int = j) -> float:
                return float(raw_functions(interval.fraction(np.array([x])), 8)[0, j])

            mean = scipy.integrate.quad(raw, start, end, epsabs=1e-12)[0] / (end - start)
            assert found[row, j] == pytest.approx(mean, abs=1e-10)
