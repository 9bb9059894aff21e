"""Throw a draft release away."""

from django.db import transaction

from core.measurements.models import Measurement, Release
from core.measurements.services.locked_draft import locked_draft, reading_of
from core.people.log import Deed, record
from core.people.models import User


@transaction.atomic
def discard_release(release: Release, user: User, *, seen: str | None = None) -> None:
    """Delete the draft with all that was uploaded for it.

    seen  the reading of it that was looked at; without a word, the one that `release` has
    """
    measurement = Measurement.objects.select_related("collaboration").get(pk=release.measurement_id)
    # Django deletes by key what it has looked up before: without the lock it may have been published meanwhile.
    draft = locked_draft(release, seen=reading_of(release) if seen is None else seen)
    record(
        Deed.DISCARDED_DRAFT,
        who=user,
        collaboration=measurement.collaboration,
        about=f"{draft.file_name}, for {measurement}",
        url=measurement.get_absolute_url(),
        hidden_with=measurement,
    )
    Release.objects.filter(pk=release.pk).delete()
