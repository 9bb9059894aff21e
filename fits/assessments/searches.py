"""Searches for features from plan to end: what the end of a part means for its search."""

from collections.abc import Iterator
from functools import partial
from typing import Any

from django.db import transaction
from django.db.models import Exists, OuterRef, Q

from fits.assessments.dispatch import enqueue
from fits.assessments.leases import Lease
from fits.assessments.models import FeaturePart, FeatureSearch

Kind = FeaturePart.Kind
Status = FeaturePart.Status


def begin(search: FeatureSearch) -> None:
    """Make the plan, on which all other parts hang, and hand it to the workers."""
    plan = FeaturePart.objects.create(search=search, kind=Kind.PLAN, order=0)
    transaction.on_commit(partial(enqueue, FeaturePart, plan.pk))


def finish(lease: Lease[FeaturePart], part: FeaturePart, result: Any) -> None:
    """Save a part; once the plan is made, hand over the parts. Raises Cancelled or Superseded."""
    if part.kind != Kind.PLAN:
        lease.finish(result=result)
        return
    with transaction.atomic():
        # The search's row is the lock between planning and cancelling: no part comes to be that cancelling misses.
        search = FeatureSearch.objects.select_for_update().get(pk=part.search_id)
        lease.finish(result=result)
        search.status = Status.RUNNING
        search.save(update_fields=["status"])
        FeaturePart.objects.bulk_create(_planned(search, result["windows"]))
        for pk in search.parts.filter(order__gt=0).values_list("pk", flat=True):
            transaction.on_commit(partial(enqueue, FeaturePart, pk))


def _planned(search: FeatureSearch, windows: dict[str, list[list[float]]]) -> Iterator[FeaturePart]:
    """The short and telling ones first."""
    kinds: list[tuple[Kind, list[float] | None]] = [(Kind.COUNT, None), (Kind.DIP_COUNT, None)]
    kinds += [(kind, window) for kind in (Kind.PEAK, Kind.DIP) for window in windows[kind]]
    kinds += [(Kind.SPACING, None), (Kind.HARMONIC, None)]
    for order, (kind, window) in enumerate(kinds, start=1):
        yield FeaturePart(search=search, kind=kind, window=window, order=order)


def settle(**which: Any) -> None:
    """End the searches (all, or those that `which` selects) all of whose parts have ended."""
    parts = FeaturePart.objects.filter(search=OuterRef("pk"))
    over = FeatureSearch.objects.filter(
        ~Exists(parts.filter(status__in=FeaturePart.LIVING)), status__in=FeaturePart.LIVING, **which
    )
    unfinished = Exists(parts.filter(~Q(status=Status.DONE)))
    over.filter(unfinished).update(status=Status.FAILED)
    # Said again, as the last part of a search may fail between these two updates.
    over.filter(~unfinished).update(status=Status.DONE)
