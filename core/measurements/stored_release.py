"""A release's row turned back into its table and into data for the engine."""

from collections.abc import Sequence

from core.measurements.models import Release
from core.measurements.reading.release import release_data
from core.measurements.reading.stored import from_bytes
from core.measurements.reading.table import Table
from fits.engine.data import Axis, Data


def table_of(release: Release) -> Table:
    """The table as it was uploaded."""
    return Table(
        file_name=release.file_name,
        headers=tuple(column["header"] for column in release.columns),
        values=from_bytes(release.table),
        lines=from_bytes(release.lines),
    )


def roles_of(release: Release) -> list[str]:
    """What each column is."""
    return [column["role"] for column in release.columns]


def data_of(release: Release, roles: Sequence[str] | None = None) -> Data:
    """The release's points, all rules checked; under other roles than the stored ones when given."""
    return release_data(
        table_of(release),
        roles_of(release) if roles is None else roles,
        axis=Axis(release.measurement.axis),
        covariance=None if release.covariance is None else from_bytes(release.covariance),
        covariance_name=release.covariance_name,
    )
