"""Say which column of a draft is which, and where its errors come from."""

from collections.abc import Sequence

from django.db import transaction

from core.measurements.models import Measurement, Release
from core.measurements.said_of_errors import SaidOfErrors, refuse_contradiction
from core.measurements.services.locked_draft import locked_draft, reading_of
from core.measurements.stored_release import data_of
from core.people.log import Deed, record
from core.people.models import User
from fits.engine.data import ErrorSource


def map_columns(
    release: Release,
    roles: Sequence[str],
    *,
    user: User,
    said: SaidOfErrors | None = None,
    calibration: float | None = None,
    seen: str | None = None,
) -> None:
    """Read the draft under these roles and words, unless it breaks a rule under them; None leaves a word as it is.

    seen  the reading of it that was looked at; without a word, the one that `release` has
    """
    seen = reading_of(release) if seen is None else seen
    if said is not None:
        refuse_contradiction(said, roles, has_covariance=release.variances is not None)
    source = ErrorSource(release.error_source) if said is None else said.source
    calibration = release.calibration if calibration is None else calibration
    data_of(release, roles, source=source, calibration=calibration)
    columns = [
        {"header": column["header"], "role": role}
        for column, role in zip(release.columns, roles, strict=True)
    ]
    with transaction.atomic():
        draft = locked_draft(release, seen=seen)
        draft.columns, draft.error_source, draft.calibration = columns, source.value, calibration
        draft.save(update_fields=["columns", "error_source", "calibration"])
        if reading_of(draft) != seen:
            _record(draft, user)
    release.columns, release.error_source, release.calibration = columns, source.value, calibration


def _record(draft: Release, user: User) -> None:
    measurement = Measurement.objects.select_related("collaboration").get(pk=draft.measurement_id)
    read = [
        f"{column['header'] or i}: {column['role'] or 'not used'}"
        for i, column in enumerate(draft.columns, 1)
    ]
    record(
        Deed.MAPPED_COLUMNS,
        who=user,
        collaboration=measurement.collaboration,
        about=f"{draft.file_name}, for {measurement}",
        url=draft.get_absolute_url(),
        detail={
            "columns": read,
            "errors": draft.get_error_source_display(),
            "calibration": draft.calibration,
        },
        hidden_with=measurement,
    )
