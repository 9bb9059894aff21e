"""The settings that are tried, and what of each is computed once: its coordinates and curves in them."""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np

from fits.engine.coordinates import Coordinates, coordinates_of
from fits.engine.coverage.curves import TrueCurve, WrongCurve, true_curve, wrong_curve
from fits.engine.data import Data, ErrorSource, FloatArray, validated_data
from fits.engine.observation import interval_of
from fits.engine.resolution import functions_for
from fits.engine.settings import Settings
from fits.engine.whitening import Whitening, whitening_of

POINTS = (50, 200, 1000)
# Correlation of the errors of points i and j: this to the power |i − j|.
CORRELATION = 0.5


class ErrorKind(StrEnum):
    """What is known of the errors."""

    KNOWN = "known"
    ESTIMATED = "estimated"
    CORRELATED = "correlated"


@dataclass(frozen=True)
class Cell:
    """One setting. The errors are 1 throughout.

    resolved  whether the truth is what the J functions hold of the curve. If not, structure finer than the resolution
              is left in the data, where an estimate of the errors takes it for error.
    """

    errors: ErrorKind
    points: int
    truth: TrueCurve
    resolved: bool = True

    @property
    def has_wrong_curves(self) -> bool:
        """Wrong curves are wrong about the three peaks."""
        return self.truth is TrueCurve.THREE_PEAKS and self.resolved


@dataclass(frozen=True, eq=False)
class PreparedCell:
    """A cell in its coordinates.

    whitening, coordinates  of the errors as they are, σ = 1
    whitened                the truth, whitened, shape (n,)
    curves                  coordinates of the truth and, below it, of the wrong curves, shape (1 or 9, J)
    """

    cell: Cell
    data: Data
    whitening: Whitening
    coordinates: Coordinates
    whitened: FloatArray
    curves: FloatArray


def cells() -> tuple[Cell, ...]:
    """All settings: 54 with a truth that is resolved, then 6 that show what structure that is not does."""
    resolved = [
        Cell(errors, points, truth) for errors in ErrorKind for points in POINTS for truth in TrueCurve
    ]
    unresolved = [
        Cell(ErrorKind.ESTIMATED, points, truth, resolved=False)
        for points in POINTS
        for truth in (TrueCurve.STEP, TrueCurve.NARROW_PEAK)
    ]
    return (*resolved, *unresolved)


def prepared(cell: Cell) -> PreparedCell:
    """Whiten and bring into coordinates everything that does not change from repeat to repeat."""
    t = (np.arange(cell.points) + 0.5) / cell.points
    values = [true_curve(cell.truth, t)]
    if cell.has_wrong_curves:
        values += [wrong_curve(kind, t) for kind in WrongCurve]
    data = _data(cell, t, values[0])
    whitening = whitening_of(data)
    functions = functions_for(Settings(), points=cell.points, span=interval_of(data).span)
    coordinates = coordinates_of(data, whitening, functions=functions)
    whitened = [whitening.apply(curve) for curve in values]
    truth, beta = whitened[0], coordinates.of(whitened[0])
    if cell.resolved:
        truth = truth - coordinates.residuals(truth, beta)
    return PreparedCell(
        cell, data, whitening, coordinates, truth, np.array([coordinates.of(curve) for curve in whitened])
    )


def _data(cell: Cell, t: FloatArray, y: FloatArray) -> Data:
    if cell.errors is ErrorKind.ESTIMATED:
        return validated_data(t, y, source=ErrorSource.ESTIMATE)
    if cell.errors is ErrorKind.CORRELATED:
        apart = np.abs(np.subtract.outer(np.arange(cell.points), np.arange(cell.points)))
        return validated_data(t, y, covariance=CORRELATION**apart)
    return validated_data(t, y, errors=np.ones(cell.points))
