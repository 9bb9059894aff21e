"""Charts: documents → a neutral figure → Plotly JSON for pages, SVG for print, a table for both.

To add a chart: a builder here, its name in BUILDERS, and its place in templates/reports/result.html.
"""

from typing import Protocol

from fits.reports.figures.ball import ball
from fits.reports.figures.curves import curves
from fits.reports.figures.features import (
    dip_ladder,
    dip_prices,
    harmonic,
    ladder,
    neighbours,
    peak_prices,
    regions,
    spacing,
    witnesses,
)
from fits.reports.figures.figure import Figure
from fits.reports.figures.misfit import misfit
from fits.reports.figures.scales import scales
from fits.reports.figures.trust import quantiles, risk, shrinkage
from fits.reports.snapshot import Snapshot


class Builder(Protocol):
    """Makes a figure; None where there is nothing to draw."""

    def __call__(self, snapshot: Snapshot, *, level: str, curve: str) -> Figure | None: ...


BUILDERS: dict[str, Builder] = {
    "curves": curves,
    "scales": scales,
    "misfit": misfit,
    "ball": ball,
    "shrinkage": shrinkage,
    "risk": risk,
    "quantiles": quantiles,
}
# Nothing to draw without features. They are many, so that pages draw them when they come near.
FEATURE_BUILDERS: dict[str, Builder] = {
    "ladder": ladder,
    "witnesses": witnesses,
    "regions": regions,
    "peak_prices": peak_prices,
    "neighbours": neighbours,
    "spacing": spacing,
    "harmonic": harmonic,
    "dip_ladder": dip_ladder,
    "dip_prices": dip_prices,
}


def figure_of(
    name: str, snapshot: Snapshot, *, level: str | None = None, curve: str | None = None
) -> Figure | None:
    """The figure of this name under the chosen level and curve; None for an unknown name or nothing to draw."""
    builder = BUILDERS.get(name) or FEATURE_BUILDERS.get(name)
    if builder is None:
        return None
    return builder(snapshot, level=snapshot.level_or_default(level), curve=snapshot.name_or_first(curve))
