"""What looks wrong with a curve beside the data that it predicts. None of it stops a submission."""

import numpy as np

from fits.engine.data import CurveTable, Data, FloatArray
from fits.engine.interpolation import curve_at_data
from fits.engine.observation import observation_of
from fits.engine.refusal import InputRefused

# A curve this many times larger or smaller than the data is likely to be in another unit.
ODD_RATIO = 10.0
# Cubic and monotone cubic interpolation may differ by this share of an error bar.
COARSE = 0.05
ROUNDING = 1e-9


def doubts(curve: CurveTable, data: Data, errors: FloatArray | None) -> list[str]:
    """One sentence for each doubt: range, size, grid. errors: in units of y, shape (n,)."""
    low, high = observation_of(data).reach
    if curve.x[-1] < low or curve.x[0] > high:
        return doubts_of_range(curve, low, high)
    return [*doubts_of_range(curve, low, high), *_odd_size(curve, data), *_coarse_grid(curve, data, errors)]


def doubts_of_range(curve: CurveTable, low: float, high: float, of_what: str = "the data") -> list[str]:
    """What a curve lacks of a stretch of x."""
    covers = f"Your curve covers {stretch(curve.x[0], curve.x[-1])}, {of_what} {stretch(low, high)}: "
    if curve.x[-1] < low or curve.x[0] > high:
        return [f"{covers}they have no x in common. Check the unit of x."]
    slack = ROUNDING * (high - low)
    missing = []
    if curve.x[0] > low + slack:
        missing.append(stretch(low, curve.x[0]))
    if curve.x[-1] < high - slack:
        missing.append(stretch(curve.x[-1], high))
    if not missing:
        return []
    return [
        f"{covers}missing stretch {' and '.join(missing)}. "
        "A curve is never continued, so it cannot be assessed on these data."
    ]


def _odd_size(curve: CurveTable, data: Data) -> list[str]:
    values = np.interp(data.x, curve.x, curve.y)
    there = (data.x >= curve.x[0]) & (data.x <= curve.x[-1])
    if not there.any():
        return []
    of_curve, of_data = _size(values[there]), _size(data.y[there])
    if of_curve == 0.0 or of_data == 0.0:
        return []
    ratio = of_curve / of_data
    if 1.0 / ODD_RATIO <= ratio <= ODD_RATIO:
        return []
    if ratio > 1.0:
        return [f"Your curve is typically {_times(ratio)} times as large as the data. Check the unit of y."]
    return [f"Your curve is typically {_times(1.0 / ratio)} times as small as the data. Check the unit of y."]


def _coarse_grid(curve: CurveTable, data: Data, errors: FloatArray | None) -> list[str]:
    try:
        at_data = curve_at_data(curve, observation_of(data), data.axis)
    except InputRefused:
        return []
    if errors is None:
        return []
    difference = float(np.sqrt(np.mean(((at_data.cubic - at_data.monotone) / errors) ** 2)))
    if difference <= COARSE:
        return []
    return [
        f"Two ways of interpolating your curve differ by {difference:.2g} error bars: "
        "its grid is too coarse. Give it at more values of x."
    ]


def _size(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2)))


def _times(ratio: float) -> str:
    return f"{ratio:.0f}" if ratio < 1e6 else f"{ratio:.1e}"


def stretch(low: float, high: float) -> str:
    """From one x to another, in words."""
    return f"{low:.6g}–{high:.6g}" if low >= 0.0 else f"{low:.6g} to {high:.6g}"
