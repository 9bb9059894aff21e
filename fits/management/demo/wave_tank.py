"""A lab class with a wave tank, invented: does it show one resonance or two?"""

import numpy as np

from fits.management.demo.lake import FloatArray
from fits.management.demo.survey import File, ReleaseFiles, TheoryInWords, text_table

POINTS = 60
ERROR = 0.35  # mm
SEED = 4
CURVE_GRID = np.linspace(0.55, 1.45, 181)

ONE = TheoryInWords(
    "One resonance",
    "The class (made up)",
    "The tank as one damped oscillator.",
    "A damped oscillator that a paddle drives",
)
TWO = TheoryInWords(
    "Two resonances",
    "The class (made up)",
    "Lengthwise and crosswise sloshing, close together.",
    "Two damped oscillators that a paddle drives",
)
FIRST_BENCH = TheoryInWords(
    "Our one peak",
    "Bench 1 (made up)",
    "One resonance, read off by eye.",
    "A damped oscillator that a paddle drives",
)
SECOND_BENCH = TheoryInWords(
    "Our two peaks",
    "Bench 2 (made up)",
    "Two resonances; the second one guessed a little too high.",
    "Two damped oscillators that a paddle drives",
)


def _peak(frequency: FloatArray, centre: float, height: float, width: float) -> FloatArray:
    return height * width**2 / ((frequency - centre) ** 2 + width**2)


def one_resonance(frequency: FloatArray) -> FloatArray:
    """Amplitude in mm against the frequency of the paddle in Hz: the best that one broad peak can do."""
    return 0.4 + _peak(frequency, 1.003, 7.4, 0.122)


def two_resonances(frequency: FloatArray) -> FloatArray:
    """The truth of this tank."""
    return 0.8 + _peak(frequency, 0.96, 5.0, 0.08) + _peak(frequency, 1.06, 4.0, 0.08)


def one_peak_by_eye(frequency: FloatArray) -> FloatArray:
    """What bench 1 drew."""
    return 0.6 + _peak(frequency, 1.0, 6.6, 0.11)


def two_peaks_guessed(frequency: FloatArray) -> FloatArray:
    """What bench 2 drew."""
    return 0.8 + _peak(frequency, 0.96, 5.0, 0.08) + _peak(frequency, 1.06, 4.3, 0.08)


THEORIES = (
    (one_resonance, ONE),
    (two_resonances, TWO),
    (one_peak_by_eye, FIRST_BENCH),
    (two_peaks_guessed, SECOND_BENCH),
)


def class_release() -> ReleaseFiles:
    """The table that the class measured: 60 points, an error column."""
    x = np.linspace(0.6, 1.4, POINTS)
    y = two_resonances(x) + np.random.default_rng(SEED).normal(0.0, ERROR, POINTS)
    comment = "Wave tank, an invented class: amplitude (mm) against paddle frequency (Hz)"
    table = text_table(comment, x=x, y=y, error=np.full(POINTS, ERROR))
    return ReleaseFiles("Measured on one afternoon (invented).", File("wave-tank.csv", table))


def class_curve(words: TheoryInWords) -> File:
    """A bench's curve."""
    curve = next(function for function, theory in THEORIES if theory is words)
    name = words.name.lower().replace(" ", "-")
    return File(f"{name}.csv", text_table(words.name, x=CURVE_GRID, y=curve(CURVE_GRID)))
