"""Read an upload of many curves into a batch to look at, and throw one away."""

import hashlib

import numpy as np
from django.db import transaction

from core.errors import UserError
from core.measurements.models import Measurement
from core.measurements.reading.apart import read_batch_apart
from core.measurements.reading.batch import BatchCurve
from core.measurements.reading.names import safe_name
from core.measurements.reading.stored import to_bytes
from core.people.access import desk_of
from core.people.models import User
from core.theories.batch_rules import (
    current_of,
    mark,
    refuse_names,
    refuse_nothing_new,
    refuse_uncovered,
    theories_of,
)
from core.theories.models import Batch, BatchItem
from core.theories.rules import refuse_closed

LONGEST_ITEM_NAME = BatchItem._meta.get_field("name").max_length


def draft_batch(
    *, user: User, measurement: Measurement, content: bytes, file_name: str, note: str = ""
) -> Batch:
    """Each curve of the upload as accepted or refused; none counts yet. A UserError for what cannot be taken apart."""
    refuse_closed(measurement)
    found = read_batch_apart(content, file_name)
    if not found:
        reason = "there is no curve in it"
        raise UserError("no-curves", reason, "Put the curve files into the archive", safe_name(file_name))
    batch = Batch(
        collaboration=measurement.collaboration,
        measurement=measurement,
        desk=desk_of(user, measurement.collaboration),
        uploaded_by=user,
        note=note,
        file_name=safe_name(file_name),
        file_sha256=hashlib.sha256(content).hexdigest(),
    )
    items = [_item(batch, order, read) for order, read in enumerate(found, start=1)]
    refuse_names(items)
    refuse_uncovered(batch, items)
    names = [item.name for item in items if item.is_accepted]
    refuse_nothing_new(batch, items, current_of(batch, theories_of(batch, names)))
    with transaction.atomic():
        batch.save()
        BatchItem.objects.bulk_create(items)
    return batch


@transaction.atomic
def discard_batch(batch: Batch) -> None:
    """Delete what has not been submitted."""
    # Whoever submits it at this moment holds the same lock.
    waiting = Batch.objects.select_for_update().filter(pk=batch.pk, submitted_at=None)
    if not waiting.values_list("pk", flat=True).first():
        raise UserError("batch-submitted", "this batch is submitted or gone already", "Nothing was discarded")
    Batch.objects.filter(pk=batch.pk).delete()


def _item(batch: Batch, order: int, read: BatchCurve) -> BatchItem:
    item = BatchItem(
        batch=batch, order=order, name=read.name[:LONGEST_ITEM_NAME], source=read.source, sha256=read.sha256
    )
    if read.fault is not None:
        mark(item, read.fault)
    if read.curve is not None:
        x, y = read.curve.x, read.curve.y
        item.table = to_bytes(np.column_stack([x, y]))
        item.points, item.x_min, item.x_max = x.size, float(x[0]), float(x[-1])
    return item
