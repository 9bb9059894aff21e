"""What is doubtful about stated or estimated errors: said before a release is published and beside each result."""

from collections.abc import Sequence

from fits.engine.error_checks import SIZES_AGREE_WITHIN, sizes_disagree
from fits.engine.error_size import ErrorSize, SizeSource

IN_WORDS = {
    SizeSource.LEFTOVER: "the leftover",
    SizeSource.FIRST_DIFFERENCES: "differences of neighbours",
    SizeSource.SECOND_DIFFERENCES: "second differences",
}


def doubt_of_estimates(sizes: Sequence[ErrorSize]) -> str:
    """Estimates of one σ that look at different things and contradict one another; empty where they agree."""
    if not sizes_disagree(sizes):
        return ""
    found = ", ".join(
        f"{size.sigma:.3g} ± {size.standard_error:.2g} from {IN_WORDS[size.source]}" for size in sizes
    )
    if max(sizes, key=lambda size: size.sigma).source is SizeSource.LEFTOVER:
        reading = (
            "Neighbouring points differ by less than the leftover: there is structure finer than the resolution, or "
            "neighbours share part of their errors"
        )
    else:
        reading = (
            "Neighbouring points differ by more than the leftover: the curve changes much from one point to the "
            "next, or a few points are far off"
        )
    share = f"{100.0 * SIZES_AGREE_WITHIN:g} %"
    return f"Estimates of the error size differ by more than {share}: {found}. {reading}."


def doubt_of_shared(name: str, size: float, own: float) -> str:
    """A shared error larger than those of the points, both root-mean-square; empty where it is not."""
    if size <= own:
        return ""
    return (
        f"{name} is larger than the errors of the points ({size:.3g} against {own:.3g}, root-mean-square). It "
        "moves all points together: curves that differ by such a move are hardly told apart, while residuals "
        "scatter less than the bars drawn at the points."
    )
