"""A release's row turned back into its table and into data for the engine."""

from collections.abc import Sequence

import numpy as np

from core.measurements.models import Release
from core.measurements.reading.release import release_data
from core.measurements.reading.stored import from_bytes
from core.measurements.reading.table import Table
from fits.engine.data import Axis, Data, FloatArray


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


def covariance_of(release: Release) -> FloatArray | None:
    """The covariance, fetched only where there is one, as the small column beside it tells."""
    if release.variances is None or release.covariance is None:
        return None
    return from_bytes(release.covariance)


def data_of(release: Release, roles: Sequence[str] | None = None) -> Data:
    """The release's points, all rules checked; under other roles than the stored ones when given."""
    return release_data(
        table_of(release),
        roles_of(release) if roles is None else roles,
        axis=Axis(release.measurement.axis),
        covariance=covariance_of(release),
        covariance_name=release.covariance_name,
    )


def data_to_draw(release: Release) -> Data:
    """The points with their standard errors; a covariance was checked when it came and is not loaded for a picture."""
    if release.variances is None:
        return data_of(release)
    return release_data(
        table_of(release),
        roles_of(release),
        axis=Axis(release.measurement.axis),
        standard_errors=np.sqrt(from_bytes(release.variances)),
    )
