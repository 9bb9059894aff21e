"""Charts of peaks and dips, one builder a figure."""

from fits.reports.figures.features.harmonic import harmonic
from fits.reports.figures.features.ladder import dip_ladder, ladder
from fits.reports.figures.features.neighbours import neighbours
from fits.reports.figures.features.prices import dip_prices, peak_prices
from fits.reports.figures.features.regions import regions
from fits.reports.figures.features.spacing import spacing
from fits.reports.figures.features.witnesses import witnesses

__all__ = [
    "dip_ladder",
    "dip_prices",
    "harmonic",
    "ladder",
    "neighbours",
    "peak_prices",
    "regions",
    "spacing",
    "witnesses",
]
