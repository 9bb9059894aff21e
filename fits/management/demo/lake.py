"""Lake Merrow, an invented lake 52 km long: the seiches that four theories of its floor predict.

Every group sets its mean depth so that the slowest seiche has the frequency long known from one gauge; the
theories differ in the overtones.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq
from scipy.special import jn_zeros

FloatArray = NDArray[np.float64]

GRAVITY = 9.81  # m/s²
LENGTH = 52_000.0  # m
SECONDS_PER_HOUR = 3600.0
MODES = 6
SLOWEST = 0.62  # cycles per hour: a period of 97 minutes
LINE_WIDTH = 0.095  # half width at half height, cycles per hour
BASIN_LENGTHS = (31_000.0, 21_000.0)  # m
BASIN_DEPTH_RATIO = 0.35


def flat_floor(mean_depth: float) -> FloatArray:
    """Merian's formula: f_n = n sqrt(g h) / (2 L), evenly spaced. In cycles per hour."""
    modes = np.arange(1, MODES + 1)
    speed = np.sqrt(GRAVITY * mean_depth)
    return np.asarray(SECONDS_PER_HOUR * modes * speed / (2.0 * LENGTH), dtype=np.float64)


def parabolic_floor(mean_depth: float) -> FloatArray:
    """Chrystal's lake: f_n = sqrt(n (n + 1) g h0) / (π L), h0 = 3/2 of the mean depth."""
    modes = np.arange(1, MODES + 1)
    speed = np.sqrt(GRAVITY * 1.5 * mean_depth)
    overtones = np.sqrt(modes * (modes + 1.0))
    return np.asarray(SECONDS_PER_HOUR * overtones * speed / (np.pi * LENGTH), dtype=np.float64)


def triangular_floor(mean_depth: float) -> FloatArray:
    """A floor of two equal slopes: 2 π f_n = j_n sqrt(g h0) / L with j_n the zeros of J0 and J1 in turn.

    h0 is twice the mean depth. On a slope the elevation is J0(2 ω sqrt(a s / (g h0))), s the distance from the
    shore and a = L/2; at the middle it vanishes (odd n) or is level (even n).
    """
    zeros = np.sort(np.concatenate([jn_zeros(0, MODES), jn_zeros(1, MODES)]))[:MODES]
    speed = np.sqrt(GRAVITY * 2.0 * mean_depth)
    return np.asarray(SECONDS_PER_HOUR * zeros * speed / (2.0 * np.pi * LENGTH), dtype=np.float64)


def joined_basins(mean_depth: float) -> FloatArray:
    """Two flat basins, the second shallower: sqrt(h1) tan(ω L1/c1) + sqrt(h2) tan(ω L2/c2) = 0, c = sqrt(g h)."""
    first, second = BASIN_LENGTHS
    deep = mean_depth * LENGTH / (first + BASIN_DEPTH_RATIO * second)
    shallow = BASIN_DEPTH_RATIO * deep
    k1, k2 = first / np.sqrt(GRAVITY * deep), second / np.sqrt(GRAVITY * shallow)

    def mismatch(omega: float) -> float:
        # The condition times both cosines: it has the same roots and no poles.
        left = np.sqrt(deep) * np.sin(k1 * omega) * np.cos(k2 * omega)
        return float(left + np.sqrt(shallow) * np.cos(k1 * omega) * np.sin(k2 * omega))

    grid = np.linspace(1e-6, 10.0 * np.pi / (k1 + k2), 4000)
    values = np.array([mismatch(omega) for omega in grid])
    brackets = np.flatnonzero(values[:-1] * values[1:] < 0.0)[:MODES]
    roots = np.array([brentq(mismatch, grid[i], grid[i + 1]) for i in brackets])
    return np.asarray(SECONDS_PER_HOUR * roots / (2.0 * np.pi), dtype=np.float64)


@dataclass(frozen=True)
class Gauge:
    """How strongly it sees the seiches: power of the slowest, by what each overtone is fainter, and the background at
    1 cycle per hour."""

    slowest: float
    fainter: float
    background: float


SURFACE = Gauge(6.0, 0.72, 0.8)  # mm²
NARROWS = Gauge(3.0, 0.9, 0.6)  # (cm/s)²: the current there has its strongest overtones higher up


def spectrum(
    frequency: FloatArray, floor: Callable[[float], FloatArray], gauge: Gauge = SURFACE
) -> FloatArray:
    """Power as a gauge sees it: a line for each seiche, fainter for each overtone, on a falling background."""
    # All frequencies go with the square root of the depth, so that one ratio sets the depth.
    depth = (SLOWEST / floor(1.0)[0]) ** 2
    power = gauge.background / frequency
    for mode, centre in enumerate(floor(depth)):
        height = gauge.slowest * gauge.fainter**mode
        power = power + height * LINE_WIDTH**2 / ((frequency - centre) ** 2 + LINE_WIDTH**2)
    return np.asarray(power, dtype=np.float64)
