"""Read an upload into a draft release."""

import hashlib
from collections.abc import Sequence

import numpy as np

from core.measurements.models import Measurement, Release
from core.measurements.reading.apart import read_covariance_apart, read_table_apart
from core.measurements.reading.names import safe_name
from core.measurements.reading.release import release_data
from core.measurements.reading.roles import UNUSED, guess_roles, problems_of_roles
from core.measurements.reading.stored import to_bytes
from core.measurements.reading.table import Table
from core.people.models import User
from fits.engine.data import Axis


def draft_release(
    *,
    user: User,
    measurement: Measurement,
    content: bytes,
    file_name: str,
    covariance_content: bytes | None = None,
    covariance_name: str = "",
    note: str = "",
) -> Release:
    """A draft to look at before it is published. A UserError for what cannot be read; nothing is kept then."""
    table = read_table_apart(content, file_name)
    roles = guess_roles(table)
    covariance = None
    if covariance_content is not None:
        covariance_name = safe_name(covariance_name)
        covariance = read_covariance_apart(covariance_content, covariance_name, len(table.lines))
    if not _left_to_the_reader(table, roles, has_covariance=covariance is not None):
        # Only the rules are of interest here: a table whose columns are plain is refused at once.
        release_data(
            table,
            roles,
            axis=Axis(measurement.axis),
            covariance=covariance,
            covariance_name=covariance_name,
        )
    return Release.objects.create(
        measurement=measurement,
        note=note,
        table=to_bytes(table.values),
        lines=to_bytes(table.lines),
        columns=[{"header": header, "role": role} for header, role in zip(table.headers, roles, strict=True)],
        covariance=None if covariance is None else to_bytes(covariance),
        variances=None if covariance is None else to_bytes(np.diagonal(covariance)),
        file_name=table.file_name,
        file_sha256=hashlib.sha256(content).hexdigest(),
        covariance_name=covariance_name if covariance_content is not None else "",
        covariance_sha256=""
        if covariance_content is None
        else hashlib.sha256(covariance_content).hexdigest(),
        points=len(table.lines),
        created_by=user,
    )


def _left_to_the_reader(table: Table, roles: Sequence[str], *, has_covariance: bool) -> bool:
    """Whether the preview page must first ask which column is which."""
    if UNUSED not in roles:
        return False
    lacks_errors = not has_covariance and "error" not in roles
    return lacks_errors or bool(problems_of_roles(roles, table.file_name))
