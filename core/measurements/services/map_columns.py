"""Say which column of a draft is which, and where its errors come from."""

from collections.abc import Sequence

from django.db import transaction

from core.errors import UserError
from core.measurements.models import Release
from core.measurements.said_of_errors import SaidOfErrors, refuse_contradiction
from core.measurements.stored_release import data_of
from fits.engine.data import ErrorSource


def map_columns(
    release: Release,
    roles: Sequence[str],
    *,
    said: SaidOfErrors | None = None,
    calibration: float | None = None,
) -> None:
    """Read the draft under these roles and words, unless it breaks a rule under them; None leaves a word as it is."""
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
        drafts = Release.objects.filter(pk=release.pk, state=Release.State.DRAFT)
        if not drafts.update(columns=columns, error_source=source.value, calibration=calibration):
            raise UserError(
                "not-a-draft", "this release is a draft no more", "Look at the measurement's page"
            )
    release.columns, release.error_source, release.calibration = columns, source.value, calibration
