"""Batches, submitted by who has just looked at them."""

from core.theories import services
from core.theories.batch_rules import seen_now
from core.theories.models import Batch


def submit(batch: Batch) -> Batch:
    return services.submit_batch(batch, seen=seen_now(batch))
