"""Six true curves and eight wrong ones, on t = 0 … 1, in error bars."""

import math
from collections.abc import Callable
from enum import StrEnum

import numpy as np

from fits.engine.data import FloatArray

# The sizes of wrong curves are stated for this many points.
STATED_FOR_POINTS = 200


class TrueCurve(StrEnum):
    """What may be true."""

    THREE_PEAKS = "three peaks"
    STEP = "step"
    CHIRP = "chirp"
    LOW_RIPPLE = "low ripple"
    ZERO = "zero"
    NARROW_PEAK = "one narrow peak"


class WrongCurve(StrEnum):
    """What a theory of the three peaks may get wrong."""

    OFFSET = "offset"
    TILT = "tilt"
    TOO_LOW = "a peak too low"
    SHIFTED = "a peak shifted"
    TOO_WIDE = "a peak too wide"
    ABSENT = "a peak absent"
    RIPPLE = "a fine ripple"
    EXTRA_PEAK = "an extra narrow peak"


_TRUE: dict[TrueCurve, Callable[[FloatArray], FloatArray]] = {
    TrueCurve.THREE_PEAKS: lambda t: three_peaks(t),
    TrueCurve.STEP: lambda t: np.where(t > 0.45, 3.0, 0.0),
    TrueCurve.CHIRP: lambda t: 2.0 * np.sin(2.0 * np.pi * (1.0 + 5.0 * t) * t),
    TrueCurve.LOW_RIPPLE: lambda t: 0.5 * np.sin(2.0 * np.pi * 8.0 * t),
    TrueCurve.ZERO: lambda t: np.zeros_like(t),
    TrueCurve.NARROW_PEAK: lambda t: peak(t, 0.6, 0.02, 8.0),
}

# Each with a = sqrt(200/n): a misfit of about 12 in χ² at every n, but for the absent peak, which has one size only.
_WRONG: dict[WrongCurve, Callable[[FloatArray, float], FloatArray]] = {
    WrongCurve.OFFSET: lambda t, a: three_peaks(t) + 0.25 * a,
    WrongCurve.TILT: lambda t, a: three_peaks(t) + 0.43 * a * (2.0 * t - 1.0),
    WrongCurve.TOO_LOW: lambda t, a: three_peaks(t, third=4.0 - 0.78 * a),
    WrongCurve.SHIFTED: lambda t, a: three_peaks(t, first_at=0.2 + 0.009 * a),
    WrongCurve.TOO_WIDE: lambda t, a: three_peaks(t, third_width=0.08 + 0.018 * a),
    WrongCurve.ABSENT: lambda t, a: three_peaks(t, second=0.0),
    WrongCurve.RIPPLE: lambda t, a: three_peaks(t) + 0.35 * a * np.cos(20.0 * np.pi * t),
    WrongCurve.EXTRA_PEAK: lambda t, a: three_peaks(t) + peak(t, 0.92, 0.025, 1.4 * a),
}

WRONG_IN_WORDS: dict[WrongCurve, str] = {
    WrongCurve.OFFSET: "0.25 error bars up everywhere",
    WrongCurve.TILT: "0.43 error bars down at one end and up at the other",
    WrongCurve.TOO_LOW: "the third peak 3.22 high, not 4",
    WrongCurve.SHIFTED: "the first peak shifted by 0.009 of the range, 0.15 of its width",
    WrongCurve.TOO_WIDE: "the third peak 0.098 of the range wide, not 0.08",
    WrongCurve.ABSENT: "the second peak, 3 error bars high, left out; the same at every n",
    WrongCurve.RIPPLE: "a ripple of amplitude 0.35 and period a tenth of the range",
    WrongCurve.EXTRA_PEAK: "a fourth peak, 1.4 error bars high and 0.025 of the range wide",
}


def peak(t: FloatArray, at: float, width: float, height: float) -> FloatArray:
    """height · exp(−((t − at)/width)²)."""
    return np.asarray(height * np.exp(-(((t - at) / width) ** 2)))


def three_peaks(
    t: FloatArray,
    *,
    first_at: float = 0.2,
    second: float = 3.0,
    third: float = 4.0,
    third_width: float = 0.08,
) -> FloatArray:
    """Peaks 6, 3 and 4 error bars high."""
    first, last = peak(t, first_at, 0.06, 6.0), peak(t, 0.75, third_width, third)
    return first + peak(t, 0.5, 0.06, second) + last


def true_curve(kind: TrueCurve, t: FloatArray) -> FloatArray:
    """Its values at t."""
    return np.asarray(_TRUE[kind](t), dtype=np.float64)


def wrong_curve(kind: WrongCurve, t: FloatArray) -> FloatArray:
    """Its values at the data's t; sizes go with 1/sqrt(n)."""
    return _WRONG[kind](t, math.sqrt(STATED_FOR_POINTS / t.size))
