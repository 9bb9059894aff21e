"""Throw a draft release away."""

from django.db import transaction

from core.errors import UserError
from core.measurements.models import Release


@transaction.atomic
def discard_release(release: Release) -> None:
    """Delete the draft with all that was uploaded for it."""
    # Django deletes by key what it has looked up before: without the lock it may have been published meanwhile.
    drafts = Release.objects.select_for_update().filter(pk=release.pk, state=Release.State.DRAFT)
    if not drafts.values_list("pk", flat=True).first():
        raise UserError("not-a-draft", "a published release stays", "Publish a correction as a new release")
    Release.objects.filter(pk=release.pk).delete()
