"""What the page of a release shows: its table, its plot, and what still keeps a draft from being published."""

from dataclasses import dataclass

from core.measurements.models import Release
from core.measurements.preview_figure import PreviewFigure, preview_figure
from core.measurements.preview_table import PreviewTable, preview_table
from core.measurements.reading.roles import problems_of_roles
from core.measurements.stored_release import data_to_draw, roles_of, table_of
from core.user_error import UserError
from fits.engine.data import Data
from fits.engine.observation import observation_of


@dataclass(frozen=True, eq=False)
class ReleasePage:
    """Figure and ranges are None while faults are left."""

    table: PreviewTable
    faults: tuple[UserError, ...]
    figure: PreviewFigure | None = None
    x_min: float | None = None
    x_max: float | None = None
    errors: str = ""


def release_page(release: Release) -> ReleasePage:
    """Everything on the page, from the row."""
    table = table_of(release)
    preview = preview_table(table.titles, table.values, table.lines)
    faults = problems_of_roles(roles_of(release), release.file_name)
    if faults:
        return ReleasePage(preview, tuple(faults))
    try:
        data = data_to_draw(release)
    except UserError as fault:
        return ReleasePage(preview, (fault,))
    name = str(release)
    low, high = observation_of(data).reach
    return ReleasePage(
        preview,
        (),
        preview_figure(release.measurement, data, data_name=name),
        low,
        high,
        errors_in_words(data, has_covariance=release.variances is not None),
    )


def errors_in_words(data: Data, *, has_covariance: bool) -> str:
    """Where the errors come from."""
    words = "a covariance matrix" if has_covariance else "an error for each point"
    if data.shared:
        words += f", and shared: {', '.join(sorted(data.shared))}"
    return words
