"""What is measured: points, their errors, and the rules that both must keep."""

from dataclasses import dataclass, field
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from fits.engine.covariance import validated_covariance
from fits.engine.refusal import InputRefused
from fits.engine.windows import Windows, validated_windows

FloatArray = NDArray[np.float64]

MINIMUM_POINTS = 8
# At the default resolution these leave 10 degrees of freedom to estimate one size of error from.
MINIMUM_POINTS_TO_ESTIMATE = 19
MINIMUM_POINTS_FOR_A_PROFILE = 60


class Axis(StrEnum):
    """What the resolution is even on: x itself or its logarithm."""

    LINEAR = "linear"
    LOG = "log"


class ErrorSource(StrEnum):
    """Where the errors come from."""

    GIVEN = "given"  # an error column or a covariance
    ESTIMATE = "estimate"  # Σ = σ² diag(r²), σ unknown, r = 1 where no relative errors are given
    COUNTS = "counts"  # y are Poisson counts
    PROFILE = "profile"  # Σ = diag(σ(x)²), a smooth σ(x) estimated from local differences


@dataclass(frozen=True, eq=False)
class Data:
    """One measured curve. Arrays are float64 and read-only; build it with `validated_data`.

    x, y        shape (n,), in the order of the upload
    errors      shape (n,): standard errors (GIVEN), relative errors (ESTIMATE); None with a covariance,
                with counts, or where all relative errors are 1
    covariance  shape (n, n) or None
    shared      name → shape (n,): errors fully correlated across the points
    calibration the fraction c to which the scale of the data is known; 0 where it is exact
    low, high   shape (n,) or None: each point is the mean of the curve over [low, high]
    windows     or each point sees the curve through a row of a matrix
    """

    x: FloatArray
    y: FloatArray
    axis: Axis = Axis.LINEAR
    source: ErrorSource = ErrorSource.GIVEN
    errors: FloatArray | None = None
    covariance: FloatArray | None = None
    shared: dict[str, FloatArray] = field(default_factory=dict)
    calibration: float = 0.0
    low: FloatArray | None = None
    high: FloatArray | None = None
    windows: Windows | None = None

    @property
    def points(self) -> int:
        """n."""
        return int(self.x.size)


@dataclass(frozen=True, eq=False)
class CurveTable:
    """A theory's prediction on a grid of its own: shape (k,) each, x strictly increasing."""

    name: str
    x: FloatArray
    y: FloatArray


def validated_data(
    x: FloatArray,
    y: FloatArray,
    *,
    axis: Axis = Axis.LINEAR,
    source: ErrorSource = ErrorSource.GIVEN,
    errors: FloatArray | None = None,
    covariance: FloatArray | None = None,
    shared: dict[str, FloatArray] | None = None,
    calibration: float = 0.0,
    low: FloatArray | None = None,
    high: FloatArray | None = None,
    windows: Windows | None = None,
) -> Data:
    """Check every rule once and return arrays that the kernels can trust.

    Raises InputRefused with field "x", "y", "errors", "covariance", "low", "high", "shared:NAME", "windows",
    "windows:grid" or "calibration", and the index of the first offending point.
    """
    x = _clean("x", x)
    n = x.size
    if n < MINIMUM_POINTS:
        raise InputRefused(
            "too-few-points", "x", f"{n} points, at least {MINIMUM_POINTS} are needed", "Add points"
        )
    y = _clean("y", y, n)
    shared = shared or {}
    _combined(source, errors=errors, covariance=covariance, shared=shared)
    _enough_to_estimate(source, n)
    if low is not None or high is not None:
        low, high = _bins(low, high, n)
    if windows is not None:
        if low is not None:
            remedy = "Give bins or windows, not both"
            raise InputRefused("bins-and-windows", "windows", "there are bins as well", remedy)
        windows = validated_windows(windows, n)
    if not 0.0 <= calibration < 1.0:
        raise InputRefused(
            "calibration",
            "calibration",
            f"a calibration of {calibration:g} is no fraction from 0 to below 1",
            "Give 0.05 for 5 %",
        )
    if float(x.min()) == float(x.max()):
        raise InputRefused("all-x-equal", "x", "all x are equal", "A curve needs at least two different x")
    if axis is Axis.LOG:
        _positive(
            "x-not-positive", "x" if low is None else "low", x if low is None else low, "on a log axis x"
        )
    return Data(
        x=x,
        y=y,
        axis=axis,
        source=source,
        errors=_errors(source, errors, covariance, y),
        covariance=None if covariance is None else validated_covariance(covariance, n),
        shared={name: _clean(f"shared:{name}", column, n) for name, column in shared.items()},
        calibration=calibration,
        low=low,
        high=high,
        windows=windows,
    )


def validated_curve(name: str, x: FloatArray, y: FloatArray) -> CurveTable:
    """A curve sorted by x. Raises InputRefused for repeats and for fewer than two points."""
    x = _clean("x", x)
    y = _clean("y", y, x.size)
    if x.size < 2:
        raise InputRefused("too-few-points", "x", "a curve needs at least two points", "Add points")
    order = np.argsort(x, kind="stable")
    repeats = np.flatnonzero(np.diff(x[order]) == 0.0)
    if repeats.size:
        second = int(order[repeats[0] + 1])
        raise InputRefused(
            "repeated-x", "x", f"x = {x[second]:g} stands twice", "Give each x of a curve once", second
        )
    return CurveTable(name, _frozen(x[order]), _frozen(y[order]))


def _frozen(values: FloatArray) -> FloatArray:
    values = np.array(values, dtype=np.float64, copy=True)
    values.flags.writeable = False
    return values


def _clean(name: str, values: FloatArray, size: int | None = None) -> FloatArray:
    """A read-only copy, one-dimensional, of the given size and finite."""
    array = np.asarray(values, dtype=np.float64)
    if array.ndim != 1 or (size is not None and array.size != size):
        expected = "one column" if size is None else f"{size} values"
        raise InputRefused("wrong-shape", name, f"has shape {array.shape}, not {expected}")
    wrong = np.flatnonzero(~np.isfinite(array))
    if wrong.size:
        index = int(wrong[0])
        kind = "infinite" if np.isinf(array[index]) else "not a number"
        raise InputRefused(
            "not-finite", name, f"is {kind}", "Give a finite number or leave the row out", index
        )
    return _frozen(array)


def _positive(code: str, name: str, values: FloatArray, what: str) -> None:
    wrong = np.flatnonzero(values <= 0.0)
    if wrong.size:
        index = int(wrong[0])
        raise InputRefused(
            code,
            name,
            f"{what} must be above 0, not {values[index]:g}",
            "Correct it or leave the row out",
            index,
        )


def _combined(
    source: ErrorSource,
    *,
    errors: FloatArray | None,
    covariance: FloatArray | None,
    shared: dict[str, FloatArray],
) -> None:
    """Refuse whatever is given beside errors that do not take it: it would be ignored in silence."""
    if source not in (ErrorSource.COUNTS, ErrorSource.PROFILE):
        return
    what = (
        "counts bring their errors with them"
        if source is ErrorSource.COUNTS
        else "the errors are estimated along x"
    )
    if covariance is not None:
        remedy = "Leave the covariance out, or say that the errors are given"
        raise InputRefused(
            "covariance-unused", "covariance", f"{what}: the covariance would be ignored", remedy
        )
    if errors is not None:
        remedy = "Leave the column out, mark it as not used, or say that the errors are given"
        raise InputRefused("errors-unused", "errors", f"{what}: the error column would be ignored", remedy)
    if shared and source is ErrorSource.COUNTS:
        name = next(iter(shared))
        reason = f"{what}, and a shared error ({name}) has no place on the scale on which counts are judged"
        remedy = "Leave the column out; for a scale that is known to a fraction give a calibration"
        raise InputRefused("shared-unused", f"shared:{name}", reason, remedy)


def _enough_to_estimate(source: ErrorSource, n: int) -> None:
    needed = {
        ErrorSource.ESTIMATE: (MINIMUM_POINTS_TO_ESTIMATE, "the size of the errors"),
        ErrorSource.PROFILE: (MINIMUM_POINTS_FOR_A_PROFILE, "a profile of errors along x"),
    }
    least, what = needed.get(source, (0, ""))
    if n < least:
        reason = f"{what} cannot be estimated from {n} points; {least} are needed"
        remedy = "Give the errors" + (
            ", or have one size of error estimated" if source is ErrorSource.PROFILE else ""
        )
        raise InputRefused("too-few-points", "x", reason, remedy)


def _errors(
    source: ErrorSource, errors: FloatArray | None, covariance: FloatArray | None, y: FloatArray
) -> FloatArray | None:
    if source is ErrorSource.COUNTS:
        wrong = np.flatnonzero((y < 0.0) | (y != np.round(y)))
        if wrong.size:
            index = int(wrong[0])
            reason = f"{y[index]:g} is not a count"
            raise InputRefused("not-a-count", "y", reason, "Counts are whole numbers from 0", index)
        return None
    if covariance is not None:
        return None
    if errors is None:
        if source is ErrorSource.GIVEN:
            raise InputRefused(
                "no-errors",
                "errors",
                "there are none",
                "Add an error column or a covariance, or have them estimated",
            )
        return None
    errors = _clean("errors", errors, y.size)
    _positive("error-not-positive", "errors", errors, "an error")
    return errors


def _bins(low: FloatArray | None, high: FloatArray | None, n: int) -> tuple[FloatArray, FloatArray]:
    if low is None or high is None:
        missing = "low" if low is None else "high"
        raise InputRefused("half-a-bin", missing, "bins need both edges", "Give lo and hi")
    low, high = _clean("low", low, n), _clean("high", high, n)
    wrong = np.flatnonzero(low >= high)
    if wrong.size:
        index = int(wrong[0])
        reason = f"lo = {low[index]:g} is not below hi = {high[index]:g}"
        raise InputRefused("bin-reversed", "low", reason, "Give lo < hi", index)
    return low, high
