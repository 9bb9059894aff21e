"""Withdraw a release: it and what was found of it stay, and say so."""

from django.db import transaction
from django.utils import timezone

from core.errors import UserError
from core.measurements.models import Measurement, Release
from core.measurements.signals import release_withdrawn
from core.people.log import Deed, record
from core.people.models import User


@transaction.atomic
def withdraw_release(*, user: User, release: Release, reason: str) -> None:
    """Mark a published release as withdrawn, for a reason that everybody reads."""
    reason = reason.strip()
    if not reason:
        raise UserError(
            "no-reason", "a release is not withdrawn without a reason", "Say what is wrong with it"
        )
    measurement = Measurement.objects.select_for_update(no_key=True).get(pk=release.measurement_id)
    # Whoever asks for an assessment of it at this moment holds its lock.
    rows = Release.objects.select_for_update().filter(pk=release.pk).order_by("pk")
    state = rows.values_list("state", flat=True).first()
    if state == Release.State.WITHDRAWN:
        raise UserError("withdrawn-already", f"{release} is withdrawn already", "Look at its page")
    if state != Release.State.PUBLISHED:
        raise UserError("not-published", "this release is a draft", "Discard it instead")
    # An update, since a published row is never saved again.
    Release.objects.filter(pk=release.pk).update(
        state=Release.State.WITHDRAWN,
        withdrawn_at=timezone.now(),
        withdrawn_by=user,
        withdrawal_reason=reason,
    )
    record(
        Deed.WITHDREW,
        who=user,
        collaboration=measurement.collaboration,
        about=f"{release} of {measurement}",
        url=release.get_absolute_url(),
        detail={"reason": reason},
        hidden_with=measurement,
    )
    release_withdrawn.send(sender=Release, release=release, by=user)
    release.refresh_from_db(fields=["state", "withdrawn_at", "withdrawn_by", "withdrawal_reason"])
