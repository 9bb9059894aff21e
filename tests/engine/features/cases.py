"""Invented spectra for feature statements."""

import numpy as np

from fits.engine.assess import assess
from fits.engine.data import FloatArray, validated_data
from fits.engine.features.find import FeatureCase, feature_case
from fits.engine.settings import Settings


def lines(x: FloatArray, places: FloatArray, heights: FloatArray, width: float) -> FloatArray:
    """Gaussian lines on a level of 1."""
    shapes = heights * np.exp(-(((x[:, None] - places) / width) ** 2))
    return np.asarray(1.0 + shapes.sum(axis=1))


def case_of(
    x: FloatArray, y: FloatArray, error: float, *, resolution: int = 30, draws: int = 400
) -> FeatureCase:
    """The features of data with one error."""
    data = validated_data(x, y, errors=np.full(x.size, error))
    settings = Settings(resolution=resolution, draws=draws)
    return feature_case(assess(data, [], settings, rng=np.random.default_rng(1)))


def two_peaks(*, seed: int = 1, error: float = 0.3, n: int = 120) -> FeatureCase:
    """Peaks of 4 at 0.3 and 2.5 at 0.7."""
    x = np.linspace(0.0, 1.0, n)
    truth = lines(x, np.array([0.3, 0.7]), np.array([4.0, 2.5]), 0.08)
    return case_of(x, truth + error * np.random.default_rng(seed).normal(size=n), error)
