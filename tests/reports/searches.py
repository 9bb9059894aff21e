"""Searches for features as rows, with results that were found elsewhere."""

from collections.abc import Mapping
from typing import Any

from core.people.models import User
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch

NOTHING_FOUND: dict[str, Any] = {
    "theories": [],
    "count": [],
    "count_thinning": 0.0,
    "dip_count": [],
    "peaks": [],
    "dips": [],
    "spacing": None,
    "harmonic": None,
}
Kind, Status = FeaturePart.Kind, FeaturePart.Status


def stored_search(
    assessment: Assessment,
    features: Mapping[str, Any],
    user: User,
    *,
    mark: str = "s",
    windows: list[list[float]] | None = None,
) -> FeatureSearch:
    """A search that has ended with these features."""
    search = FeatureSearch.objects.create(
        assessment=assessment,
        windows=windows or [],
        fingerprint=mark * 64,
        requested_by=user,
        status=Status.DONE,
    )
    theories = [
        {"name": theory["name"]}
        | {kind: [place["x"] for place in theory[kind]] for kind in ("peaks", "dips")}
        for theory in features["theories"]
    ]
    results: list[tuple[FeaturePart.Kind, Any]] = [
        (Kind.PLAN, {"windows": {}, "theories": theories}),
        (Kind.COUNT, {"at_most": features["count"], "thinning": features["count_thinning"]}),
        (Kind.DIP_COUNT, {"at_most": features["dip_count"], "thinning": 0.0}),
        *((Kind.PEAK, peak) for peak in features["peaks"]),
        *((Kind.DIP, dip) for dip in features["dips"]),
        (Kind.SPACING, features["spacing"]),
        (Kind.HARMONIC, features["harmonic"]),
    ]
    for order, (kind, result) in enumerate(results):
        window = result["window"] if kind in {Kind.PEAK, Kind.DIP} else None
        FeaturePart.objects.create(
            search=search, kind=kind, window=window, order=order, status=Status.DONE, result=result
        )
    return search


def running_search(assessment: Assessment, features: Mapping[str, Any], user: User) -> FeatureSearch:
    """One whose last two parts still run, and one part of which has failed."""
    search = stored_search(assessment, features, user, mark="r", windows=[[0.5, 1.0]])
    FeatureSearch.objects.filter(pk=search.pk).update(status=Status.RUNNING)
    last = search.parts.order_by("-order")
    for part in last[:2]:
        part.status, part.result = Status.RUNNING, None
        part.save()
    failed = search.parts.get(kind=Kind.DIP_COUNT)
    failed.status, failed.result = Status.FAILED, None
    failed.failure_code, failed.failure = "fault", "An error of ours, recorded as a1b2c3."
    failed.save()
    search.refresh_from_db()
    return search
