"""What is said of a curve that does not lie where the data are."""

import numpy as np
import pytest

from core.theories.doubts import doubts
from fits.engine.data import Data, FloatArray, validated_curve, validated_data

X = np.linspace(0.1, 4.0, 40)


@pytest.fixture
def data() -> Data:
    return validated_data(X, 2.0 + np.sin(X), errors=np.full(40, 0.1))


def said(data: Data, x: FloatArray, y: FloatArray) -> str:
    return " ".join(doubts(validated_curve("flat", x, y), data, data.errors))


def test_a_curve_that_fits_raises_no_doubt(data: Data) -> None:
    x = np.linspace(0.0, 5.0, 300)
    assert said(data, x, 2.0 + np.sin(x)) == ""


def test_a_missing_stretch_is_named(data: Data) -> None:
    x = np.linspace(0.1, 3.2, 300)
    words = said(data, x, 2.0 + np.sin(x))
    assert words.startswith("Your curve covers 0.1–3.2, the data 0.1–4: missing stretch 3.2–4.")


def test_a_stretch_missing_at_both_ends_is_named_twice(data: Data) -> None:
    x = np.linspace(1.0, 3.0, 300)
    assert "missing stretch 0.1–1 and 3–4" in said(data, x, 2.0 + np.sin(x))


def test_another_unit_of_x_is_suspected_where_nothing_is_in_common(data: Data) -> None:
    x = np.linspace(100.0, 4000.0, 300)
    assert "Check the unit of x" in said(data, x, 2.0 + np.sin(x / 1000.0))


@pytest.mark.parametrize(("factor", "words"), [(1000.0, "times as large"), (0.001, "times as small")])
def test_another_unit_of_y_is_suspected_from_the_size(data: Data, factor: float, words: str) -> None:
    x = np.linspace(0.0, 5.0, 300)
    assert words in said(data, x, factor * (2.0 + np.sin(x)))


def test_a_coarse_grid_is_named(data: Data) -> None:
    x = np.linspace(0.0, 5.0, 5)
    assert "too coarse" in said(data, x, 2.0 + np.sin(2.0 * x))
