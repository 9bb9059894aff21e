"""What is chosen before looking at the verdicts."""

from dataclasses import dataclass
from enum import StrEnum

from fits.engine.refusal import InputRefused

DEFAULT_LEVELS = (0.67, 0.9, 0.95, 0.99)
DEFAULT_DRAWS = 2000
MAXIMUM_DRAWS = 100_000
# Draws times functions: 200 MB of normal numbers.
MAXIMUM_DRAWN_NUMBERS = 25_000_000
FULL_RESOLUTION_POINTS = 3000


class Shrinkage(StrEnum):
    """The family of shrinkage factors that the risk is minimised over."""

    MONOTONE = "monotone"
    NESTED = "nested"


class RadiusKind(StrEnum):
    """The radius that bands and rings are drawn with."""

    CALIBRATED = "calibrated"
    CAUTIOUS = "cautious"


@dataclass(frozen=True)
class Settings:
    """Levels, resolution, shrinkage, radius and number of draws. At most one of the three resolution choices is set.

    resolution     number of basis functions J
    feature_width  narrowest feature to be judged, in units of x (of ln x on a log axis); J = 2 (b − a)/width
    full           J = n
    radius         what is drawn and cut at; verdicts are those of the exact p-value under either
    """

    levels: tuple[float, ...] = DEFAULT_LEVELS
    resolution: int | None = None
    feature_width: float | None = None
    full: bool = False
    shrinkage: Shrinkage = Shrinkage.MONOTONE
    draws: int = DEFAULT_DRAWS
    radius: RadiusKind = RadiusKind.CALIBRATED

    def __post_init__(self) -> None:
        if not self.levels or any(not 0.0 < level < 1.0 for level in self.levels):
            raise InputRefused(
                "levels", "levels", "levels lie between 0 and 1", "Give them as 0.67,0.9,0.95,0.99"
            )
        if list(self.levels) != sorted(set(self.levels)) or len(self.levels) > 12:
            raise InputRefused(
                "levels", "levels", "levels must increase, at most 12 of them", "Sort them, each once"
            )
        chosen = sum([self.resolution is not None, self.feature_width is not None, self.full])
        if chosen > 1:
            raise InputRefused(
                "resolution",
                "resolution",
                "more than one resolution is given",
                "Give a number, a width or full",
            )
        if self.resolution is not None and self.resolution < 4:
            raise InputRefused("resolution", "resolution", "fewer than 4 functions", "Give at least 4")
        if self.feature_width is not None and not self.feature_width > 0.0:
            raise InputRefused(
                "feature-width", "feature_width", "a width must be above 0", "Give it in units of x"
            )
        if not 100 <= self.draws <= MAXIMUM_DRAWS:
            raise InputRefused(
                "draws", "draws", f"draws lie between 100 and {MAXIMUM_DRAWS}", "2000 are usual"
            )


def refuse_too_many_draws(settings: Settings, *, functions: int) -> None:
    """Raise InputRefused where the draws of so many functions would not fit into a worker."""
    if settings.draws * functions > MAXIMUM_DRAWN_NUMBERS:
        raise InputRefused(
            "draws",
            "draws",
            f"{settings.draws} draws of {functions} functions are too many",
            f"Take at most {MAXIMUM_DRAWN_NUMBERS // functions} draws, or a lower resolution",
        )
