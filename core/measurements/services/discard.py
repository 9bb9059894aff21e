"""Throw a draft release away."""

from django.db import transaction

from core.errors import UserError
from core.measurements.models import Release


@transaction.atomic
def discard_release(release: Release) -> None:
    """Delete the draft with all that was uploaded for it."""
    deleted, _ = Release.objects.filter(pk=release.pk, state=Release.State.DRAFT).delete()
    if not deleted:
        raise UserError("not-a-draft", "a published release stays", "Publish a correction as a new release")
