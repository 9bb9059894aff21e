"""What is made of what was said of the errors, before anything is published."""

import numpy as np
import pytest

from core.measurements.error_preview import error_preview
from fits.engine.data import Data, ErrorSource, validated_data
from fits.engine.refusal import InputRefused

X = np.linspace(0.0, 1.0, 200)
NOISE = np.random.default_rng(4).normal(size=X.size)
Y = np.sin(6.0 * X)


def codes(data: Data) -> list[str]:
    return [doubt.code for doubt in error_preview(data).doubts]


def test_given_errors_are_drawn_with_the_shared_ones_in_quadrature() -> None:
    data = validated_data(X, Y, errors=np.full(X.size, 0.3), shared={"shift": np.full(X.size, 0.4)})
    assert error_preview(data).standard_errors == pytest.approx(np.full(X.size, 0.5))


def test_a_shared_error_is_measured_by_those_of_the_points() -> None:
    data = validated_data(X, Y, errors=np.full(X.size, 0.3), shared={"shift": np.full(X.size, 0.15)})
    assert error_preview(data).shared == {"shift": pytest.approx(0.5)}
    assert codes(data) == []


def test_a_shared_error_above_those_of_the_points_is_warned_of() -> None:
    shared = {"shift": np.full(X.size, 0.31), "tilt": 0.1 * X}
    data = validated_data(X, Y, errors=np.full(X.size, 0.3), shared=shared)
    assert codes(data) == ["shared-larger"]
    assert "The shared error shift is larger" in error_preview(data).doubts[0].sentence


def test_an_unknown_size_is_estimated_in_three_ways_that_agree() -> None:
    found = error_preview(validated_data(X, Y + 0.2 * NOISE, source=ErrorSource.ESTIMATE))
    assert [size.sigma for size in found.sizes] == pytest.approx([0.2] * 3, rel=0.2)
    assert found.standard_errors == pytest.approx(np.full(X.size, found.sizes[0].sigma))
    assert found.doubts == ()


def test_estimates_that_disagree_are_warned_of() -> None:
    ripple = 0.5 * np.sin(2.0 * np.pi * 45.0 * X)
    data = validated_data(X, Y + ripple + 0.05 * NOISE, source=ErrorSource.ESTIMATE)
    assert codes(data) == ["estimates-disagree"]


def test_relative_errors_are_scaled() -> None:
    relative = 1.0 + X
    data = validated_data(X, Y + 0.2 * relative * NOISE, source=ErrorSource.ESTIMATE, errors=relative)
    found = error_preview(data)
    assert found.standard_errors == pytest.approx(found.sizes[0].sigma * relative)


def test_errors_beside_an_unknown_size_are_drawn_once_with_the_shared_ones() -> None:
    shared = {"shift": np.full(X.size, 0.1)}
    found = error_preview(validated_data(X, Y + 0.2 * NOISE, source=ErrorSource.ESTIMATE, shared=shared))
    expected = np.hypot(found.sizes[0].sigma, 0.1)
    assert found.standard_errors == pytest.approx(np.full(X.size, expected))
    assert found.shared == {"shift": pytest.approx(0.1 / found.sizes[0].sigma)}


def test_a_profile_is_drawn_as_it_is_estimated() -> None:
    sigma = 0.1 * np.exp(X)
    found = error_preview(validated_data(X, Y + sigma * NOISE, source=ErrorSource.PROFILE))
    assert found.standard_errors == pytest.approx(sigma, rel=0.4)
    assert found.standard_errors[-1] > 1.5 * found.standard_errors[0]


def test_counts_have_the_errors_that_the_transform_makes_1() -> None:
    counts = np.round(100.0 + 50.0 * Y)
    found = error_preview(validated_data(X, counts, source=ErrorSource.COUNTS))
    assert found.standard_errors == pytest.approx(np.sqrt(counts + 0.375))


def test_few_points_are_estimated_at_a_lower_resolution() -> None:
    found = error_preview(validated_data(X[:19], NOISE[:19], source=ErrorSource.ESTIMATE))
    assert found.sizes[0].freedom == 10.0


def test_data_without_scatter_are_refused() -> None:
    with pytest.raises(InputRefused, match="no scatter"):
        error_preview(validated_data(X, np.ones(X.size), source=ErrorSource.ESTIMATE))
