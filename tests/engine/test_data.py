from typing import Any

import numpy as np
import pytest

from fits.engine.data import ErrorSource, validated_curve, validated_data
from fits.engine.refusal import InputRefused
from fits.engine.settings import Settings
from fits.engine.whitening import whitening_of

N = 10
X = np.arange(float(N))


def changed(index: int, value: float) -> np.ndarray:
    column = np.ones(N)
    column[index] = value
    return column


@pytest.mark.parametrize(
    ("arguments", "code", "field", "index"),
    [
        ({"x": X[:7], "y": X[:7], "errors": X[:7] + 1}, "too-few-points", "x", None),
        ({"x": np.ones(N)}, "all-x-equal", "x", None),
        ({"y": changed(3, np.nan)}, "not-finite", "y", 3),
        ({"x": np.where(X == 4, np.inf, X)}, "not-finite", "x", 4),
        ({"errors": changed(5, 0.0)}, "error-not-positive", "errors", 5),
        ({"errors": changed(6, -1.0)}, "error-not-positive", "errors", 6),
        ({"errors": None}, "no-errors", "errors", None),
        ({"errors": np.ones(3)}, "wrong-shape", "errors", None),
        ({"low": X}, "half-a-bin", "high", None),
        ({"low": X, "high": X + changed(2, 0.0)}, "bin-reversed", "low", 2),
        ({"covariance": np.eye(3)}, "covariance-shape", "covariance", None),
        ({"covariance": np.eye(N) + np.eye(N, k=1)}, "covariance-asymmetric", "covariance", None),
        ({"source": ErrorSource.COUNTS, "errors": None, "y": changed(1, 0.5)}, "not-a-count", "y", 1),
        ({"source": ErrorSource.COUNTS}, "errors-unused", "errors", None),
        (
            {"source": ErrorSource.COUNTS, "errors": None, "covariance": np.eye(N)},
            "covariance-unused",
            "covariance",
            None,
        ),
        (
            {"source": ErrorSource.COUNTS, "errors": None, "shared": {"tilt": X}},
            "shared-unused",
            "shared:tilt",
            None,
        ),
        ({"source": ErrorSource.PROFILE}, "errors-unused", "errors", None),
        (
            {"source": ErrorSource.PROFILE, "errors": None, "covariance": np.eye(N)},
            "covariance-unused",
            "covariance",
            None,
        ),
        ({"source": ErrorSource.PROFILE, "errors": None}, "too-few-points", "x", None),
        ({"source": ErrorSource.ESTIMATE}, "too-few-points", "x", None),
        ({"calibration": 1.0}, "calibration", "calibration", None),
        ({"calibration": -0.1}, "calibration", "calibration", None),
        ({"calibration": np.nan}, "calibration", "calibration", None),
        ({"shared": {"tilt": changed(8, np.inf)}}, "not-finite", "shared:tilt", 8),
    ],
)
def test_what_breaks_a_rule_is_refused_by_field_and_index(
    arguments: dict[str, Any], code: str, field: str, index: int | None
) -> None:
    given: dict[str, Any] = {"x": X, "y": np.ones(N), "errors": np.ones(N)} | arguments
    with pytest.raises(InputRefused) as refusal:
        validated_data(given.pop("x"), given.pop("y"), **given)
    assert (refusal.value.code, refusal.value.field, refusal.value.index) == (code, field, index)


def test_a_covariance_that_is_not_positive_definite_is_refused_with_its_smallest_eigenvalue() -> None:
    data = validated_data(X, X, covariance=np.eye(N) - 0.2)
    with pytest.raises(InputRefused, match="smallest eigenvalue is -1"):
        whitening_of(data)


def test_the_asymmetry_of_a_covariance_is_told() -> None:
    with pytest.raises(InputRefused, match="by up to 1"):
        validated_data(X, X, covariance=np.eye(N) + np.eye(N, k=1))


def test_a_curve_that_gives_an_x_twice_is_refused_at_its_second_place() -> None:
    with pytest.raises(InputRefused) as refusal:
        validated_curve("twice", np.array([3.0, 1.0, 2.0, 1.0]), np.zeros(4))
    assert refusal.value.index == 3


def test_a_curve_in_any_order_is_sorted() -> None:
    curve = validated_curve("mixed", np.array([3.0, 1.0, 2.0]), np.array([30.0, 10.0, 20.0]))
    assert curve.x.tolist() == [1.0, 2.0, 3.0]
    assert curve.y.tolist() == [10.0, 20.0, 30.0]


@pytest.mark.parametrize(
    "settings",
    [
        {"levels": ()},
        {"levels": (0.0,)},
        {"levels": (0.95, 0.9)},
        {"resolution": 3},
        {"resolution": 10, "full": True},
        {"feature_width": -1.0},
        {"feature_width": float("nan")},
        {"draws": 10},
        {"draws": 10_000_000},
    ],
)
def test_settings_that_cannot_be_are_refused(settings: dict[str, Any]) -> None:
    with pytest.raises(InputRefused):
        Settings(**settings)


def test_rounding_between_a_covariance_and_its_mirror_image_is_averaged_out() -> None:
    rng = np.random.default_rng(1)
    root = rng.normal(size=(600, 600))
    matrix = root @ root.T + 600 * np.eye(600)
    rough = matrix * (1 + 1e-13 * rng.normal(size=matrix.shape))
    x = np.arange(600.0)
    found = validated_data(x, x, covariance=rough).covariance
    assert found is not None
    assert (found == found.T).all()
    assert found == pytest.approx((rough + rough.T) / 2, rel=1e-15)
