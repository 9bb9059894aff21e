"""The releases of measurements as overviews show them: without their tables, each with the assessment that counts."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from django.db.models import Count, F, OuterRef, Subquery

from core.measurements.models import Release
from core.people.access import in_overview
from core.people.models import User
from fits.assessments.models import Assessment


@dataclass(frozen=True)
class ReleaseSummary:
    """A published or withdrawn release. `assessment`: of the done ones that the reader sees, that which judged the most
    theories, the newest of those. So nobody who tries a single curve takes the others' verdicts off the pages."""

    pk: int
    measurement: int
    number: int
    state: str
    published_at: datetime
    withdrawn_at: datetime | None
    withdrawal_reason: str
    points: int
    note: str
    file_name: str
    assessment: int | None

    @property
    def is_withdrawn(self) -> bool:
        """Whether a lead has taken it back."""
        return self.state == Release.State.WITHDRAWN


def releases_of(measurements: Iterable[int], reader: User) -> dict[int, list[ReleaseSummary]]:
    """The releases of each measurement, newest first, withdrawn ones among them. One query."""
    done = Assessment.objects.filter(release=OuterRef("pk"), status=Assessment.Status.DONE)
    judged = Count("verdicts__curve__theory", distinct=True)
    fullest = (
        in_overview(done, reader)
        .values("pk")
        .annotate(theories=judged)
        .order_by("-theories", F("ended_at").desc(nulls_last=True), "-pk")
        .values("pk")[:1]
    )
    numbered = Release.objects.filter(measurement__in=measurements).exclude(state=Release.State.DRAFT)
    rows: Iterable[Mapping[str, Any]] = (
        in_overview(numbered, reader)
        .annotate(assessment=Subquery(fullest))
        .order_by("measurement", "-number")
        .values(
            "pk",
            "measurement",
            "number",
            "state",
            "published_at",
            "withdrawn_at",
            "withdrawal_reason",
            "points",
            "note",
            "file_name",
            "assessment",
        )
    )
    found: dict[int, list[ReleaseSummary]] = {}
    for row in rows:
        found.setdefault(row["measurement"], []).append(ReleaseSummary(**row))
    return found


def newest_of(releases: Iterable[ReleaseSummary]) -> ReleaseSummary | None:
    """The first that is not withdrawn, of those of one measurement, newest first."""
    return next((release for release in releases if not release.is_withdrawn), None)


def newest_releases(measurements: Iterable[int], reader: User) -> dict[int, ReleaseSummary]:
    """The newest release of each measurement that has one which counts. One query."""
    found = {key: newest_of(releases) for key, releases in releases_of(measurements, reader).items()}
    return {key: release for key, release in found.items() if release is not None}
