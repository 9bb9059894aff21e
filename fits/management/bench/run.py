"""All cases, one after the other."""

from collections.abc import Callable

from threadpoolctl import threadpool_limits

from fits.management.bench import fitting, judging, memory
from fits.management.bench.case import Case, Row

CASES: tuple[Callable[[int], Case], ...] = (
    fitting.smoothing_spline,
    judging.exact_verdicts,
    fitting.full_covariance,
    fitting.many_points,
    judging.batch_of_distances,
    judging.draws_alone,
    judging.whole_assessment,
)


def run_bench(*, repeats: int, scale: int = 1, tell: Callable[[Row], None]) -> list[Row]:
    """The rows, each told as it comes. scale: how many times smaller the larger cases are made."""
    rows: list[Row] = []
    with threadpool_limits(limits=1):
        for make in CASES:
            rows.append(make(scale).timed(repeats))
            tell(rows[-1])
    rows.append(memory.peak_of_a_fit(scale))
    tell(rows[-1])
    return rows
