"""A case of the bench, and how it is timed."""

import time
from collections.abc import Callable
from dataclasses import dataclass
from statistics import median
from typing import TypedDict

import numpy as np

from fits.engine.data import Data, FloatArray
from fits.engine.errors import error_model_of
from fits.engine.fit import fit_of
from fits.engine.result import Fit
from fits.engine.settings import Settings

RANDOM_SEED = 20
FUNCTIONS = 40


class Row(TypedDict):
    """What is reported of a case. ratio: the one that `wanted` names."""

    name: str
    ours_s: float
    theirs_s: float
    ratio: float
    wanted: str
    holds: bool


@dataclass(frozen=True)
class AtLeast:
    """Theirs takes at least so many times as long as ours."""

    factor: float

    def row(self, name: str, ours: float, theirs: float) -> Row:
        """The row of this case."""
        ratio, wanted = theirs / ours, f"theirs/ours ≥ {self.factor:g}"
        return Row(
            name=name,
            ours_s=ours,
            theirs_s=theirs,
            ratio=ratio,
            wanted=wanted,
            holds=ratio >= self.factor,
        )


@dataclass(frozen=True)
class AtMost:
    """Ours takes at most so many times as long as theirs."""

    factor: float

    def row(self, name: str, ours: float, theirs: float) -> Row:
        """The row of this case."""
        ratio, wanted = ours / theirs, f"ours/theirs ≤ {self.factor:g}"
        return Row(
            name=name,
            ours_s=ours,
            theirs_s=theirs,
            ratio=ratio,
            wanted=wanted,
            holds=ratio <= self.factor,
        )


@dataclass(frozen=True, eq=False)
class Case:
    """ours and theirs do the same work; theirs as a number is a bound in seconds."""

    name: str
    ours: Callable[[], object]
    theirs: Callable[[], object] | float
    wanted: AtLeast | AtMost

    def timed(self, repeats: int) -> Row:
        """Medians after a warm-up of both, which take turns so that a busy machine treats them alike."""
        theirs = self.theirs
        if isinstance(theirs, float):
            self.ours()
            return self.wanted.row(self.name, median(_seconds(self.ours) for _ in range(repeats)), theirs)
        self.ours(), theirs()
        pairs = [(_seconds(self.ours), _seconds(theirs)) for _ in range(repeats)]
        return self.wanted.row(self.name, median(a for a, _ in pairs), median(b for _, b in pairs))


def _seconds(work: Callable[[], object]) -> float:
    """Processor time of the one thread: what else the machine does must not decide a comparison."""
    start = time.thread_time()
    work()
    return time.thread_time() - start


def made_up(points: int) -> tuple[FloatArray, FloatArray, FloatArray]:
    """x, y and errors of an invented curve with two peaks."""
    rng = np.random.default_rng(RANDOM_SEED)
    x = np.linspace(0.0, 10.0, points)
    errors = 0.1 + 0.01 * x
    return x, two_peaks(x) + errors * rng.standard_normal(points), errors


def two_peaks(x: FloatArray) -> FloatArray:
    """The curve behind the invented data."""
    return np.asarray(np.exp(-((x - 3.0) ** 2)) + 0.6 * np.exp(-((x - 6.5) ** 2) / 0.5))


def fitted(data: Data) -> Fit:
    """The fit of validated data at 40 functions."""
    errors = error_model_of(data, data.y, functions=FUNCTIONS)
    return fit_of(data, data.y, errors.whitening, errors.freedom, functions=FUNCTIONS, settings=Settings())
