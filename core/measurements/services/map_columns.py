"""Say which column of a draft is which."""

from collections.abc import Sequence

from django.db import transaction

from core.errors import UserError
from core.measurements.models import Release
from core.measurements.stored_release import data_of


def map_columns(release: Release, roles: Sequence[str]) -> None:
    """Give the draft's columns these roles, unless the table breaks a rule under them."""
    data_of(release, roles)
    columns = [
        {"header": column["header"], "role": role}
        for column, role in zip(release.columns, roles, strict=True)
    ]
    with transaction.atomic():
        drafts = Release.objects.filter(pk=release.pk, state=Release.State.DRAFT)
        if not drafts.update(columns=columns):
            raise UserError(
                "not-a-draft", "this release is a draft no more", "Look at the measurement's page"
            )
    release.columns = columns
