"""Publish a draft release: from then on it never changes."""

from django.db import transaction
from django.db.models import Max
from django.utils import timezone

from core.errors import UserError
from core.measurements.error_preview import error_preview
from core.measurements.models import Measurement, Release
from core.measurements.stored_release import data_of
from core.people.models import User
from fits.engine.data import Data, ErrorSource
from fits.engine.refusal import InputRefused


@transaction.atomic
def publish_release(release: Release, user: User) -> Release:
    """Number the draft and make it immutable, once all rules of its data hold."""
    # The measurement's row is the lock: two who publish at once get one number after the other.
    measurement = Measurement.objects.select_for_update().get(pk=release.measurement_id)
    # Nor may it be mapped otherwise, or discarded, between the check and the number.
    drafts = Release.objects.select_for_update()
    draft = drafts.filter(pk=release.pk, state=Release.State.DRAFT).first()
    if draft is None:
        raise UserError("not-a-draft", "this release is a draft no more", "Look at the measurement's page")
    draft.measurement = measurement
    _refuse_unestimable(data_of(draft))
    last = measurement.releases.aggregate(last=Max("number"))["last"] or 0
    draft.number = last + 1
    draft.state = Release.State.PUBLISHED
    draft.published_at = timezone.now()
    draft.created_by = user  # whoever publishes answers for it
    draft.save(update_fields=["number", "state", "published_at", "created_by"])
    return draft


def _refuse_unestimable(data: Data) -> None:
    """Errors that are to be estimated must be there to be found: nothing else could be assessed."""
    if data.source not in (ErrorSource.ESTIMATE, ErrorSource.PROFILE):
        return
    try:
        error_preview(data)
    except InputRefused as refusal:
        raise UserError(refusal.code, refusal.reason, refusal.remedy) from refusal
