"""The price of a harmonic series: peaks at whole multiples of the spacing."""

from fits.reports.features.document import Features
from fits.reports.figures.features.spacing import spacing_figure
from fits.reports.figures.figure import Figure
from fits.reports.snapshot import Snapshot


def harmonic(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """Even spacing with the first peak at the spacing itself."""
    features = Features.of(snapshot)
    if features is None or features.harmonic is None:
        return None
    caption = "The same for peaks at one, two, three, … times the spacing: the first peak stands at the spacing itself."
    return spacing_figure(
        snapshot, features, features.harmonic, "harmonic", "Harmonic series", caption, level
    )
