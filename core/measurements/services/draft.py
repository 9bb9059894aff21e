"""Read an upload into a draft release."""

import hashlib
from collections.abc import Sequence

import numpy as np
from django.db import transaction

from core.measurements.models import EarlyLook, Measurement, Release
from core.measurements.reading.apart import read_covariance_apart, read_table_apart, read_windows_apart
from core.measurements.reading.names import safe_name
from core.measurements.reading.release import release_data
from core.measurements.reading.roles import UNUSED, guess_roles, problems_of_roles
from core.measurements.reading.stored import to_bytes
from core.measurements.reading.table import Table
from core.measurements.said_of_errors import SaidOfErrors, refuse_contradiction, roles_under
from core.measurements.services.look import record_look
from core.people.log import Deed, record
from core.people.models import User
from fits.engine.data import Axis, ErrorSource


def draft_release(
    *,
    user: User,
    measurement: Measurement,
    content: bytes,
    file_name: str,
    said: SaidOfErrors | None = None,
    calibration: float = 0.0,
    covariance_content: bytes | None = None,
    covariance_name: str = "",
    windows_content: bytes | None = None,
    windows_name: str = "",
    note: str = "",
) -> Release:
    """A draft to look at before it is published. A UserError for what cannot be read; nothing is kept then. Whoever
    uploads the data of a sealed measurement has seen them, which is noted.

    said  where the errors come from; without a word, from the covariance if there is one, else from a column
    """
    table = read_table_apart(content, file_name)
    has_covariance = covariance_content is not None
    if said is None:
        said = SaidOfErrors.COVARIANCE if has_covariance else SaidOfErrors.COLUMN
    roles = roles_under(said, guess_roles(table))
    points = len(table.lines)
    covariance = windows = None
    covariance_name = safe_name(covariance_name) if covariance_content is not None else ""
    if covariance_content is not None:
        covariance = read_covariance_apart(covariance_content, covariance_name, points)
    windows_name = safe_name(windows_name) if windows_content is not None else ""
    if windows_content is not None:
        windows = read_windows_apart(windows_content, windows_name, points)
    if not _columns_are_left_open(table, roles):
        lacks_errors = _lacks_errors(said, roles, has_covariance=has_covariance)
        if not lacks_errors:
            refuse_contradiction(said, roles, has_covariance=has_covariance)
        # Only the rules are of interest here: what breaks one is refused at once. Where errors are still to be
        # spoken of on the preview page, others stand in for them.
        release_data(
            table,
            roles,
            axis=Axis(measurement.axis),
            source=ErrorSource.GIVEN if lacks_errors else said.source,
            standard_errors=np.ones(points) if lacks_errors else None,
            calibration=calibration,
            covariance=covariance,
            covariance_name=covariance_name,
            windows=windows,
            windows_name=windows_name,
        )
    draft = Release(
        measurement=measurement,
        note=note,
        table=to_bytes(table.values),
        lines=to_bytes(table.lines),
        columns=[{"header": header, "role": role} for header, role in zip(table.headers, roles, strict=True)],
        error_source=said.source.value,
        calibration=calibration,
        covariance=None if covariance is None else to_bytes(covariance),
        variances=None if covariance is None else to_bytes(np.diagonal(covariance)),
        windows=None if windows is None else to_bytes(windows),
        file_name=table.file_name,
        file_sha256=_sha256(content),
        covariance_name=covariance_name,
        covariance_sha256=_sha256(covariance_content),
        windows_name=windows_name,
        windows_sha256=_sha256(windows_content),
        points=points,
        created_by=user,
    )
    _keep(draft, user)
    return draft


@transaction.atomic
def _keep(draft: Release, user: User) -> None:
    # Whoever seals it at this moment holds the same lock.
    measurement = Measurement.objects.select_for_update(no_key=True).get(pk=draft.measurement_id)
    draft.save()
    record(
        Deed.UPLOADED,
        who=user,
        collaboration=measurement.collaboration,
        about=f"{draft.file_name}, for {measurement}",
        url=draft.get_absolute_url(),
        detail={"points": draft.points, "sha256": draft.file_sha256},
        hidden_with=measurement,
    )
    if measurement.is_sealed:
        record_look(measurement, user, EarlyLook.How.UPLOADED)


def _sha256(content: bytes | None) -> str:
    return "" if content is None else hashlib.sha256(content).hexdigest()


def _columns_are_left_open(table: Table, roles: Sequence[str]) -> bool:
    """Whether the preview page must first ask which column is which."""
    return UNUSED in roles and bool(problems_of_roles(roles, table.file_name))


def _lacks_errors(said: SaidOfErrors, roles: Sequence[str], *, has_covariance: bool) -> bool:
    """Whether the preview page must first ask for the errors."""
    needs_column = said in (SaidOfErrors.COLUMN, SaidOfErrors.RELATIVE) and not has_covariance
    return needs_column and "error" not in roles
