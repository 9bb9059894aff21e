"""The assessment of the newest release of measurements: what a later version of a report would show."""

from collections.abc import Iterable

from django.db.models import Count

from core.measurements.models import Measurement, Release
from fits.assessments.models import Assessment


def newest_assessment(measurement: Measurement) -> Assessment | None:
    """Of shared curves, done, on the newest release that is not withdrawn and has one."""
    found = newest_keys([measurement.pk]).get(measurement.pk)
    rows = Assessment.objects.select_related("release__measurement__collaboration").defer("detail")
    return rows.get(pk=found[0]) if found else None


def newest_keys(measurements: Iterable[int]) -> dict[int, tuple[int, int]]:
    """Measurement → (assessment, number of the release), in one query: of that release, the one that judged the most
    curves, the newest of those."""
    rows = (
        Assessment.objects.annotate(judged=Count("curves"))
        .filter(
            release__measurement__in=list(measurements),
            release__state=Release.State.PUBLISHED,
            status=Assessment.Status.DONE,
            desk=None,
        )
        .order_by("-release__number", "-judged", "-created_at", "-pk")
    )
    found: dict[int, tuple[int, int]] = {}
    for measurement, assessment, number in rows.values_list("release__measurement", "pk", "release__number"):
        found.setdefault(measurement, (assessment, number or 0))
    return found
