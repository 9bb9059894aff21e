"""What the page of a release shows: its table, its plot, what its errors come to, and what still keeps a draft from
being published."""

from dataclasses import dataclass

from core.measurements.error_preview import ErrorPreview, error_preview
from core.measurements.models import Release
from core.measurements.preview_figure import PreviewFigure, preview_figure
from core.measurements.preview_table import PreviewTable, preview_table
from core.measurements.reading.roles import problems_of_roles, role_of_header
from core.measurements.said_of_errors import WITHOUT_COLUMN, SaidOfErrors
from core.measurements.stored_release import data_to_draw, roles_of, said_of, table_of
from core.user_error import UserError
from fits.engine.data import Data
from fits.engine.observation import observation_of
from fits.engine.refusal import InputRefused


@dataclass(frozen=True, eq=False)
class ReleasePage:
    """Figure, ranges and what the errors come to are None while faults are left.

    unused  the title of an error column that is not used, since the errors come from elsewhere
    """

    table: PreviewTable
    faults: tuple[UserError, ...]
    unused: str = ""
    figure: PreviewFigure | None = None
    x_min: float | None = None
    x_max: float | None = None
    errors: str = ""
    found: ErrorPreview | None = None
    said: SaidOfErrors | None = None

    @property
    def are_counts(self) -> bool:
        """Whether y are counts."""
        return self.said is SaidOfErrors.COUNTS

    @property
    def is_relative(self) -> bool:
        """Whether an estimated size multiplies errors that are given."""
        return self.said is SaidOfErrors.RELATIVE


def release_page(release: Release) -> ReleasePage:
    """Everything on the page, from the row."""
    table = table_of(release)
    preview = preview_table(table.titles, table.values, table.lines)
    faults = problems_of_roles(roles_of(release), release.file_name)
    unused = _unused_errors(release)
    if faults:
        return ReleasePage(preview, tuple(faults), unused)
    try:
        data = data_to_draw(release, table)
        found = error_preview(data)
    except UserError as fault:
        return ReleasePage(preview, (fault,), unused)
    except InputRefused as refusal:
        unfit = UserError(refusal.code, refusal.reason, refusal.remedy, release.file_name)
        return ReleasePage(preview, (unfit,), unused)
    name, said = str(release), said_of(release)
    low, high = observation_of(data).reach
    return ReleasePage(
        table=preview,
        faults=(),
        unused=unused,
        figure=preview_figure(release.measurement, data, found.standard_errors, data_name=name),
        x_min=low,
        x_max=high,
        errors=errors_in_words(data, said, has_covariance=release.variances is not None),
        found=found,
        said=said,
    )


def errors_in_words(data: Data, said: SaidOfErrors, *, has_covariance: bool) -> str:
    """Where the errors come from, and how the points see the curve where that is not at their x."""
    words = {
        SaidOfErrors.COLUMN: "an error for each point",
        SaidOfErrors.COVARIANCE: "a covariance matrix",
        SaidOfErrors.ONE_SIZE: "errors of one size, estimated",
        SaidOfErrors.RELATIVE: f"{'a relative covariance' if has_covariance else 'relative errors'} of estimated scale",
        SaidOfErrors.COUNTS: "the errors of counts",
        SaidOfErrors.PROFILE: "errors that change along x, estimated",
    }[said]
    if data.shared:
        words += f", and shared: {', '.join(sorted(data.shared))}"
    if data.calibration:
        words += f", and a scale known to {100.0 * data.calibration:g} %"
    if data.low is not None:
        words += "; each point is a mean over its bin"
    if data.windows is not None:
        words += f"; the points see the curve through windows on {data.windows.grid.size} values of x"
    return words


def _unused_errors(release: Release) -> str:
    if said_of(release) not in WITHOUT_COLUMN:
        return ""
    named = (column["header"] for column in release.columns if not column["role"])
    return next((header for header in named if role_of_header(header) == "error"), "")
