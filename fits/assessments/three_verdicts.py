"""The three verdicts on a curve, in the words of all pages, and the level at which overviews and e-mails give them."""

from collections.abc import Mapping
from typing import Any

from fits.engine.ball import is_above

INSIDE, OFF, OUTSIDE = "inside", "inside, but off", "outside"
LEVEL = 0.95
LEVEL_KEY = "0.95"


def is_inside_by(verdict: Mapping[str, Any]) -> bool:
    """Whether the exact p-value admits the curve at 95 %, by these fields of a verdict."""
    # An assessment may have asked for other levels; its p-value answers for each.
    return bool(verdict["inside"].get(LEVEL_KEY, is_above(verdict["p_value"], LEVEL)))


def verdict_word(*, is_inside: bool, scale_p_value: float, level: float = LEVEL) -> str:
    """The verdict in words. "Inside, but off": the ball admits the curve and the scale set rejects it."""
    if not is_inside:
        return OUTSIDE
    return INSIDE if is_above(scale_p_value, level) else OFF
