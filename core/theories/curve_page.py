"""What the page of a curve shows: the curve over the newest data, and what looks wrong."""

from dataclasses import dataclass

from core.measurements.error_preview import error_preview
from core.measurements.models import Release
from core.measurements.preview_figure import PreviewFigure, Series, preview_figure
from core.measurements.preview_table import PreviewTable, preview_table
from core.measurements.reading.stored import from_bytes
from core.measurements.stored_release import data_to_draw
from core.theories.doubts import doubts
from core.theories.models import Curve
from core.theories.stored_curve import table_of


@dataclass(frozen=True, eq=False)
class CurvePage:
    """`release` is the newest published one, None while there is none."""

    figure: PreviewFigure
    table: PreviewTable
    release: Release | None
    doubts: tuple[str, ...]


def curve_page(curve: Curve) -> CurvePage:
    """Everything on the page, from the rows."""
    measurement = curve.measurement
    line = table_of(curve)
    published = measurement.releases.filter(state=Release.State.PUBLISHED)
    release = published.select_related("measurement").order_by("-number").first()
    data = None if release is None else data_to_draw(release)
    errors = None if data is None else error_preview(data).standard_errors
    figure = preview_figure(
        measurement,
        data,
        errors,
        data_name=str(release) if release else "",
        curves=[Series(str(curve), line.x, line.y)],
    )
    titles = (measurement.x_label, measurement.y_label)
    return CurvePage(
        figure=figure,
        table=preview_table(titles, from_bytes(curve.table)),
        release=release,
        doubts=() if data is None else tuple(doubts(line, data, errors)),
    )
