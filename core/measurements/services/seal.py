"""Seal a measurement, and change its seal while it holds. Nothing but opening ends one."""

from datetime import datetime

from django.db import transaction
from django.utils import timezone

from core.errors import UserError
from core.measurements.models import EarlyLook, Measurement, Release
from core.measurements.range_announced import refuse_wider_than_announced
from core.measurements.seal_terms import SealTerms, moment_in_words
from core.measurements.services.look import record_look
from core.people.access import sees_data
from core.people.log import Deed, record
from core.people.models import User
from core.revision import save_if_current

FIELDS = ("opens_at", "curves_until", "announced_x_min", "announced_x_max")


@transaction.atomic
def seal_measurement(*, user: User, measurement: Measurement, seen: int, terms: SealTerms) -> None:
    """Hide data and verdicts to come until it opens."""
    # Whoever publishes, or draws up a release, at this moment holds the same lock.
    kept = Measurement.objects.select_for_update(no_key=True).get(pk=measurement.pk)
    if kept.was_sealed:
        raise UserError("sealed-already", f"{kept} has been sealed already", "Look at its page")
    if kept.releases.exclude(state=Release.State.DRAFT).exists():
        raise UserError(
            "data-known", "a release has been published, and its data are known", "Seal a new measurement"
        )
    terms.refuse_contradiction()
    for field in ("opens_at", "curves_until"):
        _refuse_past(getattr(terms, field), field)
    kept.sealed_at = timezone.now()
    _save(kept, seen, terms, "sealed_at")
    drafts = list(kept.releases.select_related("created_by").only("measurement", "created_by"))
    record(
        Deed.SEALED,
        who=user,
        collaboration=kept.collaboration,
        about=kept.name,
        url=kept.get_absolute_url(),
        detail=terms.in_words,
    )
    # Until now every lead could see them; of those who brought them it is known that they did.
    for draft in drafts:
        record_look(kept, draft.created_by, EarlyLook.How.UPLOADED)
    measurement.refresh_from_db()


@transaction.atomic
def change_seal(*, user: User, measurement: Measurement, seen: int, terms: SealTerms) -> None:
    """Other terms, as far as nobody has relied on the old ones."""
    # Whoever submits a curve or opens it at this moment holds the same lock.
    kept = Measurement.objects.select_for_update(no_key=True).get(pk=measurement.pk)
    if not kept.is_sealed:
        raise UserError("not-sealed", f"{kept} is not sealed", "Look at its page")
    before = SealTerms.of(kept)
    if terms == before:
        return
    terms.refuse_contradiction()
    if terms.opens_at != before.opens_at:
        _refuse_past(terms.opens_at, "opens_at")
    if terms.curves_until != before.curves_until:
        if not kept.takes_curves:
            raise UserError(
                "deadline-passed",
                "the time for curves is over: who kept it would have been misled",
                "Leave it as it is",
            )
        _refuse_past(terms.curves_until, "curves_until")
    if terms.announces != before.announces:
        _refuse_other_range(kept, user, terms)
    _save(kept, seen, terms)
    old, new = before.in_words, terms.in_words
    record(
        Deed.CHANGED_SEAL,
        who=user,
        collaboration=kept.collaboration,
        about=kept.name,
        url=kept.get_absolute_url(),
        detail={name: f"{old[name]} → {new[name]}" for name in new if old[name] != new[name]},
    )
    measurement.refresh_from_db()


def _save(kept: Measurement, seen: int, terms: SealTerms, *more: str) -> None:
    for field in FIELDS:
        setattr(kept, field, getattr(terms, field))
    save_if_current(kept, seen=seen, fields=(*FIELDS, *more))


def _refuse_past(moment: datetime | None, field: str) -> None:
    if moment is None or moment > timezone.now():
        return
    said = f"{moment_in_words(moment)} is past"
    if field == "opens_at":
        raise UserError("opening-past", said, "Give a later time, or open it by a lead’s word")
    raise UserError("deadline-past", said, "Give a later time, or none")


def _refuse_other_range(kept: Measurement, user: User, terms: SealTerms) -> None:
    if kept.curves.exclude(version=None).exists():
        raise UserError(
            "range-relied-on",
            "curves are submitted already, which cover the x that was announced",
            "Leave it as it is",
        )
    # What is published is told to those alone who see it.
    low, high = terms.announces
    if low is None or high is None or not sees_data(user, kept):
        return
    for release in kept.releases.filter(state=Release.State.PUBLISHED).select_related("measurement"):
        refuse_wider_than_announced(release, low, high)
