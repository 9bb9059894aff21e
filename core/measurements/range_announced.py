"""The stretch of x that is announced of sealed data, against the one that they have."""

from core.errors import UserError
from core.measurements.models import Release
from core.measurements.seal_terms import stretch_in_words
from core.measurements.stored_release import interval_of_release

ROUNDING = 1e-9


def refuse_wider_than_announced(release: Release, low: float, high: float) -> None:
    """Refuse data that reach further than was announced: curves that cover that could not be judged on them."""
    reach = interval_of_release(release)
    slack = ROUNDING * (high - low)
    if reach.low >= low - slack and reach.high <= high + slack:
        return
    raise UserError(
        "wider-than-announced",
        f"the data reach from {reach.low:g} to {reach.high:g}, and {stretch_in_words(low, high)} is announced",
        "Leave out what is beyond, or announce more while no curve is submitted",
    )
