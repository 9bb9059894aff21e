"""The terms of a seal: when the data are shown, until when curves are taken, what stretch of x they have to cover."""

from dataclasses import dataclass
from datetime import UTC, datetime

from core.errors import UserError
from core.measurements.models import Measurement

WORD_OF_A_LEAD = "by a lead’s word"


@dataclass(frozen=True)
class SealTerms:
    """None: opened by a lead's word; curves taken until it opens; nothing announced."""

    opens_at: datetime | None = None
    curves_until: datetime | None = None
    announced_x_min: float | None = None
    announced_x_max: float | None = None

    @classmethod
    def of(cls, measurement: Measurement) -> "SealTerms":
        """Those that stand in the row."""
        return cls(
            opens_at=measurement.opens_at,
            curves_until=measurement.curves_until,
            announced_x_min=measurement.announced_x_min,
            announced_x_max=measurement.announced_x_max,
        )

    @property
    def in_words(self) -> dict[str, str]:
        """For the log and for pages."""
        return {
            "opens": moment_in_words(self.opens_at) if self.opens_at else WORD_OF_A_LEAD,
            "curves until": moment_in_words(self.curves_until) if self.curves_until else "it opens",
            "announced x": stretch_in_words(self.announced_x_min, self.announced_x_max) or "nothing",
        }

    @property
    def announces(self) -> tuple[float | None, float | None]:
        """The stretch of x that curves have to cover."""
        return self.announced_x_min, self.announced_x_max

    def refuse_contradiction(self) -> None:
        """Refuse terms that do not go together."""
        low, high = self.announces
        if (low is None) != (high is None):
            raise UserError("half-a-range", "one end of the announced x is missing", "Give both, or neither")
        if low is not None and high is not None and not low < high:
            raise UserError(
                "range-turned", f"the announced x runs from {low:g} to {high:g}", "Give the smaller one first"
            )
        if self.opens_at and self.curves_until and self.curves_until > self.opens_at:
            raise UserError(
                "curves-after-opening",
                f"curves would be taken until {moment_in_words(self.curves_until)}, and the data be open from "
                f"{moment_in_words(self.opens_at)}",
                "Take curves until the opening at the latest",
            )


def moment_in_words(moment: datetime) -> str:
    """To the minute, and in which time."""
    moment = moment.astimezone(UTC)
    return f"{moment:%Y-%m-%d %H:%M} UTC"


def stretch_in_words(low: float | None, high: float | None) -> str:
    """A stretch of x; empty without one."""
    return "" if low is None or high is None else f"{low:g} to {high:g}"
