"""How many basis functions are judged."""

import math

from fits.engine.refusal import InputRefused
from fits.engine.settings import FULL_RESOLUTION_POINTS, Settings

DEFAULT_FUNCTIONS = 40
MINIMUM_FUNCTIONS = 4


def functions_for(settings: Settings, *, points: int, span: float) -> int:
    """J before dependent columns are dropped: what is asked for, at most n.

    span is b − a, in the units of the axis. Default min(40, n // 2); for a feature width w, 2 span / w rounded
    up. Raises InputRefused for `full` above 3000 points.
    """
    if settings.full:
        if points > FULL_RESOLUTION_POINTS:
            raise InputRefused(
                "full-too-large",
                "resolution",
                f"full resolution of {points} points; at most {FULL_RESOLUTION_POINTS} are supported",
                "Choose a number of functions or a feature width",
            )
        return points
    if settings.resolution is not None:
        asked = settings.resolution
    elif settings.feature_width is not None:
        asked = max(MINIMUM_FUNCTIONS, math.ceil(min(2.0 * span / settings.feature_width - 1e-9, points)))
    else:
        asked = max(MINIMUM_FUNCTIONS, min(DEFAULT_FUNCTIONS, points // 2))
    return min(asked, points)


def feature_width(functions: int, span: float) -> float:
    """The width 2 (b − a)/J of the narrowest feature that J functions resolve."""
    return 2.0 * span / functions
