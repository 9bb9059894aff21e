"""Submit the accepted curves of a batch, all at one moment."""

from collections.abc import Mapping
from datetime import datetime

from django.db import IntegrityError, transaction
from django.utils import timezone

from core.errors import UserError
from core.measurements.models import Measurement
from core.measurements.reading.limits import MAXIMUM_NAME_LENGTH
from core.people.log import Deed, record_all
from core.people.models import LogEntry
from core.theories.batch_rules import (
    Current,
    current_of,
    refuse_appeared,
    refuse_nothing_new,
    refuse_uncovered,
    refuse_unseen,
    theories_of,
)
from core.theories.models import Batch, BatchItem, Curve, Theory
from core.theories.rules import refuse_closed
from core.theories.services.submit import record_submission
from core.theories.services.theory import record_theory


@transaction.atomic
def submit_batch(batch: Batch, *, seen: Mapping[int, int]) -> Batch:
    """Make the theories that are new and submit the accepted curves. It is done by who uploaded them, and `seen` is
    what became of each curve when they looked (`seen_now`).

    What would become otherwise or can no more be accepted is refused now, and says so; the others are submitted all
    the same. Where none is left, the batch stays as it was but for that.
    """
    measurement = Measurement.objects.select_for_update(no_key=True).get(pk=batch.measurement_id)
    # The batch's row is the lock: of two who submit it, or submit and discard it, one comes first.
    locked = Batch.objects.select_for_update().filter(pk=batch.pk, submitted_at=None).first()
    if locked is None:
        raise UserError("batch-submitted", "this batch is submitted or gone already", "Look at its page")
    locked.measurement = measurement
    now = timezone.now()
    refuse_closed(measurement)
    items = list(locked.items.filter(refusal_code=""))
    for item in items:
        item.batch = locked
    current = _locked_theories(locked, items)
    refuse_uncovered(locked, items)
    refuse_nothing_new(locked, items, current)
    refuse_unseen(items, current, seen)
    entries: list[LogEntry] = []
    _add_theories(locked, items, current, entries)
    kept = [item for item in items if item.is_accepted]
    _add_curves(kept, current, now, entries)
    record_all(entries)
    BatchItem.objects.bulk_update(items, ["curve", "refusal_code", "refusal"], batch_size=200)
    locked.items.exclude(table=None).filter(pk__in=[item.pk for item in items]).update(table=None)
    if kept:
        locked.submitted_at = now
        locked.save(update_fields=["submitted_at"])
    return locked


def _locked_theories(batch: Batch, items: list[BatchItem]) -> dict[str, Current]:
    """Those that are there, locked one after the other, as whoever submits a version of one does."""
    theories = theories_of(batch, [item.name for item in items])
    list(theories.select_for_update().order_by("pk").values_list("pk"))
    return current_of(batch, theories)


def _add_theories(
    batch: Batch, items: list[BatchItem], current: dict[str, Current], entries: list[LogEntry]
) -> None:
    # By name: of two batches that add the same theories neither waits for the other in turn.
    new = sorted(
        (item for item in items if item.is_accepted and item.name not in current), key=lambda item: item.name
    )
    made = [_theory(batch, item) for item in new]
    try:
        with transaction.atomic():
            Theory.objects.bulk_create(made)
    except IntegrityError:
        # Somebody added one of them between the look above and now.
        made = [theory for item in new if (theory := _added_alone(batch, item))]
    for theory in made:
        record_theory(Deed.ADDED_THEORY, theory, batch.uploaded_by, into=entries)
        current[theory.name] = Current(theory, version=0)


def _added_alone(batch: Batch, item: BatchItem) -> Theory | None:
    """The theory of this item, or None where somebody else has added one of its name: the item is refused then."""
    theory = _theory(batch, item)
    try:
        with transaction.atomic():
            theory.save()
    except IntegrityError:
        there = theories_of(batch, [item.name]).select_related("submitted_by").first()
        if there is None:
            raise
        refuse_appeared(item, there)
        return None
    return theory


def _theory(batch: Batch, item: BatchItem) -> Theory:
    return Theory(
        collaboration=batch.collaboration, name=item.name, submitted_by=batch.uploaded_by, desk=batch.desk
    )


def _add_curves(
    items: list[BatchItem], current: dict[str, Current], now: datetime, entries: list[LogEntry]
) -> None:
    curves = [_curve(item, current[item.name], now) for item in items]
    for item, curve in zip(items, Curve.objects.bulk_create(curves), strict=True):
        item.curve = curve
        record_submission(curve, into=entries)


def _curve(item: BatchItem, current: Current, now: datetime) -> Curve:
    batch = item.batch
    assert item.table is not None
    # A column has no file of its own: the table's name and hash are what somebody can hold it against.
    of_table = item.sha256 == batch.file_sha256
    name = f"{batch.file_name}, {item.source}" if of_table else f"{batch.file_name}: {item.source}"
    return Curve(
        theory=current.theory,
        measurement=batch.measurement,
        version=current.version + 1,
        state=Curve.State.SUBMITTED,
        note=batch.note,
        table=item.table,
        file_name=name[:MAXIMUM_NAME_LENGTH],
        file_sha256=item.sha256,
        points=item.points or 0,
        x_min=item.x_min or 0.0,
        x_max=item.x_max or 0.0,
        submitted_by=batch.uploaded_by,
        submitted_at=now,
    )
