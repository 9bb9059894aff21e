"""The price of evenly spaced peaks for each spacing, against the radii."""

from fits.reports.features.document import Features
from fits.reports.figures import palette
from fits.reports.figures.features.radii import price_axis, price_lines, radius_lines
from fits.reports.figures.figure import NARROW, Axis, Cell, Figure, Layer, Panel, Table
from fits.reports.snapshot import Document, Snapshot


def spacing(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """At the best place for the first peak."""
    features = Features.of(snapshot)
    if features is None or features.spacing is None:
        return None
    caption = (
        "How far from the fit the nearest curve lies whose peaks are evenly spaced, whatever the first one's place. "
        "Where the line stays above a radius, no evenly spaced series is in that ball. Far above, prices are lower "
        "bounds."
    )
    return spacing_figure(snapshot, features, features.spacing, "spacing", "Even spacing", caption, level)


def spacing_figure(
    snapshot: Snapshot, features: Features, found: Document, name: str, title: str, caption: str, level: str
) -> Figure:
    """A price profile over spacings."""
    x, price, first = found["spacing"], found["price"], found.get("first") or [None] * len(found["spacing"])
    layers: list[Layer] = [
        *radius_lines(features, (float(x[0]), float(x[-1]))),
        *price_lines(x, price, label="price", colour=palette.PEAK),
    ]
    rows: tuple[tuple[Cell, ...], ...] = tuple(zip(x, price, first, strict=True))
    unit = f" ({snapshot.x_unit})" if snapshot.x_unit else ""
    return Figure(
        name=name,
        title=title,
        caption=caption,
        x=Axis(f"spacing{unit}"),
        panels=(Panel(price_axis(features)),),
        layers=tuple(layers),
        table=Table((f"spacing{unit}", "price", f"first peak{unit}"), rows),
        level=level,
        width=NARROW,
        height=3.0,
    )
