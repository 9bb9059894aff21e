"""Publish a draft release: from then on it never changes."""

from django.db import transaction
from django.db.models import Max
from django.utils import timezone

from core.measurements.error_preview import error_preview
from core.measurements.models import Measurement, Release
from core.measurements.range_announced import refuse_wider_than_announced
from core.measurements.services.locked_draft import locked_draft, reading_of
from core.measurements.signals import release_published
from core.measurements.stored_release import data_of
from core.people.log import Deed, record
from core.people.models import User
from core.user_error import UserError
from fits.engine.data import Data, ErrorSource
from fits.engine.refusal import InputRefused


@transaction.atomic
def publish_release(release: Release, user: User, *, seen: str | None = None) -> Release:
    """Number the draft and make it immutable, once all rules of its data hold.

    seen  the reading of it that its publisher looked at; without a word, the one that `release` has
    """
    # The measurement's row is the lock: two who publish at once get one number after the other.
    measurement = Measurement.objects.select_for_update(no_key=True).get(pk=release.measurement_id)
    # Nor may it be mapped otherwise, or discarded, between the check and the number.
    draft = locked_draft(release, seen=reading_of(release) if seen is None else seen)
    draft.measurement = measurement
    _refuse_unestimable(data_of(draft))
    low, high = measurement.announced_x_min, measurement.announced_x_max
    if measurement.is_sealed and low is not None and high is not None:
        refuse_wider_than_announced(draft, low, high)
    last = measurement.releases.aggregate(last=Max("number"))["last"] or 0
    draft.number = last + 1
    draft.state = Release.State.PUBLISHED
    draft.published_at = timezone.now()
    draft.created_by = user  # whoever publishes answers for it
    draft.save(update_fields=["number", "state", "published_at", "created_by"])
    record(
        Deed.PUBLISHED,
        who=user,
        collaboration=measurement.collaboration,
        about=f"{draft} of {measurement}",
        url=draft.get_absolute_url(),
        detail={"points": draft.points, "sha256": draft.file_sha256},
        hidden_with=measurement,
    )
    release_published.send(sender=Release, release=draft, by=user)
    return draft


def _refuse_unestimable(data: Data) -> None:
    """Errors that are to be estimated must be there to be found: nothing else could be assessed."""
    if data.source not in (ErrorSource.ESTIMATE, ErrorSource.PROFILE):
        return
    try:
        error_preview(data)
    except InputRefused as refusal:
        raise UserError(refusal.code, refusal.reason, refusal.remedy) from refusal
