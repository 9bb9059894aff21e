"""What the page of a curve shows: the curve over the newest data that its reader may see, and what looks wrong."""

from dataclasses import dataclass

from core.measurements.error_preview import error_preview
from core.measurements.models import Measurement, Release
from core.measurements.preview_figure import PreviewFigure, Series, preview_figure
from core.measurements.preview_table import PreviewTable, preview_table
from core.measurements.reading.stored import from_bytes
from core.measurements.stored_release import data_to_draw
from core.people.access import Someone, sees_data
from core.theories.doubts import doubts, doubts_of_range
from core.theories.models import Curve
from core.theories.stored_curve import table_of
from fits.engine.data import CurveTable


@dataclass(frozen=True, eq=False)
class CurvePage:
    """`release` is the newest published one, None while there is none or its data are sealed for the reader."""

    figure: PreviewFigure
    table: PreviewTable
    release: Release | None
    is_sealed: bool
    doubts: tuple[str, ...]

    @property
    def words(self) -> str:
        """What is drawn."""
        of = f"{self.figure.y_label} against {self.figure.x_label}: the curve"
        return f"{of}, and the data with bars of one standard error." if self.release else f"{of}."


def curve_page(curve: Curve, reader: Someone) -> CurvePage:
    """Everything on the page, from the rows."""
    measurement = curve.measurement
    line = table_of(curve)
    is_open = sees_data(reader, measurement)
    release = _newest(measurement) if is_open else None
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
        is_sealed=not is_open,
        doubts=_of_announced(line, measurement) if data is None else tuple(doubts(line, data, errors)),
    )


def _newest(measurement: Measurement) -> Release | None:
    published = measurement.releases.filter(state=Release.State.PUBLISHED)
    return published.select_related("measurement").order_by("-number").first()


def _of_announced(line: CurveTable, measurement: Measurement) -> tuple[str, ...]:
    """What is doubtful before any data are to be seen: the stretch of x that was announced."""
    low, high = measurement.announced_x_min, measurement.announced_x_max
    if low is None or high is None or not measurement.is_sealed:
        return ()
    return tuple(doubts_of_range(line, low, high, "the announced stretch"))
