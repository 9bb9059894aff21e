"""The price of a peak (or dip) at each place, against the radii."""

from fits.reports.features.document import Features, Kind
from fits.reports.figures import palette
from fits.reports.figures.features.over_data import x_axis, x_ends
from fits.reports.figures.features.radii import TOP, price_axis, price_lines, radius_lines
from fits.reports.figures.figure import Cell, Figure, Layer, Marker, Panel, Place, Points, Table
from fits.reports.snapshot import Snapshot


def peak_prices(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """Of all peaks, each in its window."""
    return _prices(snapshot, level, curve, Kind.PEAK, "peak_prices", palette.PEAK)


def dip_prices(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """Of all dips."""
    return _prices(snapshot, level, curve, Kind.DIP, "dip_prices", palette.DIP)


def _prices(snapshot: Snapshot, level: str, curve: str, kind: Kind, name: str, colour: str) -> Figure | None:
    features = Features.of(snapshot)
    found = features.found(kind) if features else ()
    if features is None or not found:
        return None
    layers: list[Layer] = radius_lines(features, x_ends(snapshot))
    rows: list[tuple[Cell, ...]] = []
    for feature in found:
        x, price = feature.found["profile"]["x"], feature.found["profile"]["price"]
        layers += price_lines(x, price, label=f"price of a {kind}", colour=colour)
        known = [(value, at) for at, value in feature.profile if value is not None]
        if known:
            layers.append(_number(feature.number, min(known)[1], features, colour))
        rows += [(feature.name, *row) for row in feature.profile]
    return Figure(
        name=name,
        title=f"Price of a {kind} along x",
        caption=(
            f"How far from the fit the nearest curve lies that has its {kind} of that window at x. Below a radius: "
            "some curve of that ball has it there; the stretches below are the location intervals of the table. Dearer "
            "places are cut off, and a broken line means that no price is known there."
        ),
        x=x_axis(snapshot),
        panels=(Panel(price_axis(features)),),
        layers=tuple(layers),
        table=Table((str(kind), snapshot.x_label, "price"), tuple(rows)),
        level=level,
        curve=curve,
        height=3.2,
    )


def _number(number: int, x: float, features: Features, colour: str) -> Points:
    """Inside the valley, near its top."""
    return Points(
        colour=colour,
        x=(x,),
        y=(0.9 * TOP * features.largest_radius,),
        marker=Marker.NONE,
        words=(str(number),),
        place=Place.BELOW,
    )
