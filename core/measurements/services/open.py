"""Open a sealed measurement: once, and for good."""

from datetime import datetime

from django.db import transaction
from django.utils import timezone

from core.errors import UserError, record_fault
from core.measurements.models import Measurement
from core.measurements.seal_terms import moment_in_words
from core.measurements.signals import measurement_opened
from core.people.log import Deed, record
from core.people.models import User


@transaction.atomic
def open_measurement(*, user: User, measurement: Measurement) -> None:
    """Show data and verdicts to all, by a lead's word."""
    # Two who open it at once wait here for one another, and for whoever changes its seal or submits a curve.
    kept = Measurement.objects.select_for_update(no_key=True).get(pk=measurement.pk)
    if not kept.is_sealed:
        raise UserError("not-sealed", _why_not(kept), "Nothing is left to do")
    _open(kept, at=timezone.now(), by=user)
    measurement.refresh_from_db()


def note_openings() -> list[int]:
    """Write down that measurements have opened at their time; the keys of those that had not been noted.

    Data are seen from that time on whether this runs or not; what it brings is the entry in the log and the
    assessments that nobody asks for. It may run as often as one likes.
    """
    due = Measurement.objects.filter(
        sealed_at__isnull=False, opened_at=None, opens_at__lte=timezone.now()
    ).values_list("pk", flat=True)
    return [pk for pk in due.order_by("opens_at", "pk") if _note_or_log(pk)]


def _note_or_log(pk: int) -> bool:
    """One that cannot be noted is tried again the next time, and keeps no other from it."""
    try:
        return _note(pk)
    except Exception as error:
        record_fault(error, f"noting that measurement {pk} has opened")
        return False


@transaction.atomic
def _note(pk: int) -> bool:
    kept = Measurement.objects.select_for_update(no_key=True).get(pk=pk)
    if kept.opened_at is not None or kept.opens_at is None or kept.is_sealed:
        return False
    _open(kept, at=kept.opens_at, by=None)
    return True


def _open(kept: Measurement, *, at: datetime, by: User | None) -> None:
    kept.opened_at, kept.opened_by = at, by
    kept.save(update_fields=["opened_at", "opened_by"])
    record(
        Deed.OPENED,
        who=by,
        collaboration=kept.collaboration,
        about=kept.name,
        url=kept.get_absolute_url(),
        detail={"open from": moment_in_words(at)},
    )
    measurement_opened.send(sender=Measurement, measurement=kept, by=by)


def _why_not(kept: Measurement) -> str:
    if kept.opened is None:
        return f"{kept} was never sealed"
    by = f" by {kept.opened_by}" if kept.opened_by else " at its time"
    return f"{kept} was opened{by}, {moment_in_words(kept.opened)}"
