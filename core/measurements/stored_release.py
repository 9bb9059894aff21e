"""A release's row turned back into its table and into data for the engine."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from core.measurements.models import Release
from core.measurements.reading.release import release_data
from core.measurements.reading.stored import from_bytes
from core.measurements.reading.table import Table
from core.measurements.said_of_errors import SaidOfErrors, what_is_said
from fits.engine.basis import Interval
from fits.engine.data import Axis, Data, ErrorSource, FloatArray
from fits.engine.observation import interval_of


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


def said_of(release: Release) -> SaidOfErrors:
    """What is said of its errors, in the words of the page."""
    source, has_covariance = ErrorSource(release.error_source), release.variances is not None
    return what_is_said(source, roles_of(release), has_covariance=has_covariance)


def covariance_of(release: Release) -> FloatArray | None:
    """The covariance, fetched only where there is one, as the small column beside it tells."""
    if release.variances is None or release.covariance is None:
        return None
    return from_bytes(release.covariance)


def windows_of(release: Release) -> FloatArray | None:
    """The grid and weights, shape (n + 1, g), fetched only where there are any."""
    if not release.has_windows or release.windows is None:
        return None
    return from_bytes(release.windows)


def data_of(
    release: Release,
    roles: Sequence[str] | None = None,
    *,
    source: ErrorSource | None = None,
    calibration: float | None = None,
    table: Table | None = None,
) -> Data:
    """The release's points, all rules checked; under other roles, or another word on the errors, than the stored ones
    when given. `table` spares reading it again."""
    return _read_as(
        release,
        table_of(release) if table is None else table,
        roles_of(release) if roles is None else roles,
        source=ErrorSource(release.error_source) if source is None else source,
        calibration=release.calibration if calibration is None else calibration,
        covariance=covariance_of(release),
        covariance_name=release.covariance_name,
    )


def data_to_draw(release: Release, table: Table | None = None) -> Data:
    """The points for a picture. A covariance was checked when it came; where its diagonal is all that is drawn, that
    stands in for it as errors."""
    if release.variances is None or release.error_source != Release.ErrorSource.GIVEN:
        return data_of(release, table=table)
    return _read_as(
        release,
        table_of(release) if table is None else table,
        roles_of(release),
        source=ErrorSource.GIVEN,
        calibration=release.calibration,
        standard_errors=np.sqrt(from_bytes(release.variances)),
    )


def interval_of_release(release: Release) -> Interval:
    """The stretch of x that the points look at. No error has a say in it, so that a covariance stays where it is."""
    table = table_of(release)
    ones = np.ones(len(table.values))
    data = _read_as(release, table, roles_of(release), source=ErrorSource.GIVEN, standard_errors=ones)
    return interval_of(data)


def _read_as(release: Release, table: Table, roles: Sequence[str], **said: Any) -> Data:
    return release_data(
        table,
        roles,
        axis=Axis(release.measurement.axis),
        windows=windows_of(release),
        windows_name=release.windows_name,
        **said,
    )
