"""What points see: bins against exact integrals, windows against sums, and a million points in blocks."""

import numpy as np
import pytest

from fits.engine import coordinates as coordinates_module
from fits.engine.assess import assess
from fits.engine.coordinates import coordinates_of
from fits.engine.data import Axis, Data, FloatArray, validated_curve, validated_data
from fits.engine.design import StoredDesign, StreamedDesign
from fits.engine.interpolation import curve_at_data
from fits.engine.observation import interval_of, observation_of
from fits.engine.refusal import InputRefused
from fits.engine.settings import Settings
from fits.engine.whitening import whitening_of
from fits.engine.windows import Windows

RNG = np.random.default_rng(2)
EDGES = np.linspace(1.0, 4.0, 61)


def line(x: FloatArray) -> FloatArray:
    """A Gaussian on a falling background."""
    return np.asarray(np.exp(-(((x - 2.0) / 0.2) ** 2)) + 1.0 / x)


def binned(values: FloatArray, axis: Axis = Axis.LINEAR) -> Data:
    middle = (EDGES[1:] + EDGES[:-1]) / 2
    return validated_data(middle, values, errors=np.full(60, 0.01), low=EDGES[:-1], high=EDGES[1:], axis=axis)


@pytest.mark.parametrize("axis", list(Axis))
def test_curves_over_bins_are_their_integrals_to_a_millionth_of_an_error_bar(axis: Axis) -> None:
    """Exact: ∫ exp(−((x − 2)/0.2)²) = 0.1 sqrt(π) [erf], ∫ 1/x = ln."""
    from scipy.special import erf

    integral = 0.1 * np.sqrt(np.pi) * erf((EDGES - 2.0) / 0.2) + np.log(EDGES)
    exact = np.diff(integral) / np.diff(EDGES)
    grid = np.linspace(1.0, 4.0, 3001)
    found = curve_at_data(
        validated_curve("line", grid, line(grid)), observation_of(binned(exact, axis)), axis
    )
    assert np.abs(found.cubic - exact).max() / 0.01 < 1e-6


def test_a_fit_over_bins_is_of_the_curve_and_not_of_its_averages() -> None:
    """The mean of cos(kx) over a bin is smaller than its middle value; the fit must undo that."""
    middle = (EDGES[1:] + EDGES[:-1]) / 2
    wave = np.cos(14 * np.pi * (middle - 1.0) / 3.0)
    means = wave * np.sinc(14 * 0.05 / 2 / 3.0)
    grid = np.linspace(1.0, 4.0, 2001)
    truth = validated_curve("wave", grid, np.cos(14 * np.pi * (grid - 1.0) / 3.0))
    result = assess(binned(means), [truth], Settings(draws=100, resolution=20), rng=np.random.default_rng(1))
    fitted = result.fit.at(grid)
    assert np.abs(fitted - truth.y).max() < 0.02
    assert result.verdicts[0].distance < 0.5


def test_windows_that_pick_single_points_change_nothing() -> None:
    x = np.linspace(0.5, 3.0, 40)
    y = line(x) + 0.05 * RNG.normal(size=40)
    plain = validated_data(x, y, errors=np.full(40, 0.05))
    seen = validated_data(x, y, errors=np.full(40, 0.05), windows=Windows(x, np.eye(40)))
    curve = validated_curve("line", x, line(x))
    one, other = (
        assess(data, [curve], Settings(draws=100), rng=np.random.default_rng(1)) for data in (plain, seen)
    )
    assert one.verdicts[0].distance == pytest.approx(other.verdicts[0].distance, rel=1e-9)


def test_curves_are_seen_through_their_windows() -> None:
    grid = np.linspace(0.0, 5.0, 501)
    centres = np.linspace(0.5, 4.5, 50)
    weights = np.exp(-(((grid - centres[:, None]) / 0.2) ** 2))
    weights /= weights.sum(axis=1, keepdims=True)
    data = validated_data(centres, np.zeros(50), errors=np.ones(50), windows=Windows(grid, weights))
    table = validated_curve("curve", grid, line(grid + 1.0))
    found = curve_at_data(table, observation_of(data), Axis.LINEAR)
    assert found.cubic == pytest.approx(weights @ table.y, abs=1e-12)


def test_a_curve_must_reach_as_far_as_the_windows_look() -> None:
    grid = np.linspace(0.0, 5.0, 51)
    weights = np.where(np.arange(51) < 41, 1.0, 0.0) * np.ones((10, 1))
    data = validated_data(np.arange(10.0), np.zeros(10), errors=np.ones(10), windows=Windows(grid, weights))
    assert observation_of(data).reach == (0.0, 4.0)
    short = validated_curve("short", grid[:30], grid[:30])
    with pytest.raises(InputRefused, match=r"from 2\.9 to 4 is missing"):
        curve_at_data(short, observation_of(data), Axis.LINEAR)


@pytest.mark.parametrize(
    ("grid", "weights", "code"),
    [
        (np.array([0.0, 0.0, 1.0]), np.ones((10, 3)), "windows-grid"),
        (np.array([0.0, 1.0]), np.ones((9, 2)), "windows-shape"),
        (np.array([0.0, 1.0]), np.full((10, 2), np.nan), "not-finite"),
        (np.array([0.0, 1.0]), np.zeros((10, 2)), "windows-blind"),
    ],
)
def test_windows_that_cannot_be_are_refused(grid: FloatArray, weights: FloatArray, code: str) -> None:
    with pytest.raises(InputRefused) as refusal:
        validated_data(np.arange(10.0), np.ones(10), errors=np.ones(10), windows=Windows(grid, weights))
    assert refusal.value.code == code


@pytest.mark.parametrize("shared", [False, True])
@pytest.mark.parametrize("bins", [False, True])
def test_functions_in_blocks_give_the_coordinates_of_the_stored_ones(
    monkeypatch: pytest.MonkeyPatch, shared: bool, bins: bool
) -> None:
    n = 9000
    x = np.sort(RNG.uniform(0.0, 1.0, n))
    options = {"shared": {"tilt": 30 * x, "shift": np.full(n, 3.0)}} if shared else {}
    edges = {"low": x - 1e-3, "high": x + 1e-3} if bins else {}
    data = validated_data(x, np.sin(9 * x), errors=RNG.uniform(0.5, 2.0, n), **options, **edges)  # type: ignore[arg-type]
    whitening = whitening_of(data)
    stored = coordinates_of(data, whitening, functions=30)
    monkeypatch.setattr(coordinates_module, "STREAMED_POINTS", 1000)
    streamed = coordinates_of(data, whitening, functions=30)
    assert isinstance(stored.design, StoredDesign)
    assert isinstance(streamed.design, StreamedDesign)
    whitened = whitening.apply(data.y)
    z = stored.of(whitened)
    assert streamed.of(whitened) == pytest.approx(z, abs=1e-8)
    assert streamed.residuals(whitened, z) == pytest.approx(stored.residuals(whitened, z), abs=1e-6)
    assert streamed.design.leverage() == pytest.approx(stored.design.leverage(), abs=1e-8)
    expected = stored.basis.at(np.array([0.1, 0.5]))
    assert streamed.basis.at(np.array([0.1, 0.5])) == pytest.approx(
        expected, abs=1e-8 * np.abs(expected).max()
    )


def test_functions_that_depend_on_each_other_are_not_streamed(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(coordinates_module, "STREAMED_POINTS", 10)
    x = np.repeat(np.arange(5.0), 10)
    data = validated_data(x, x, errors=np.ones(50))
    assert coordinates_of(data, whitening_of(data), functions=12).functions == 5


def test_the_interval_of_bins_reaches_from_edge_to_edge() -> None:
    interval = interval_of(binned(np.zeros(60)))
    assert (interval.low, interval.high) == (1.0, 4.0)
