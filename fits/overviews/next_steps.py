"""What a collaboration lacks before its first verdict."""

from collections.abc import Iterable
from dataclasses import dataclass

from django.db.models import Model, OuterRef, Q, QuerySet, Subquery
from django.urls import reverse
from django.utils import timezone

from core.measurements.models import Measurement, Release
from core.people.access import PERMITTED, Action, in_overview
from core.people.models import Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment


@dataclass(frozen=True)
class NextStep:
    """What is missing, and the link to it for those who may add it; the others read who does."""

    missing: str
    words: str
    url: str


@dataclass(frozen=True)
class Found:
    """The first row of each kind that the reader sees in a collaboration, by key; None where there is none.

    sealed  a measurement of whose data the reader is told nothing; curves for it are asked for all the same
    """

    measurement: int | None
    sealed: int | None
    release: int | None
    theory: int | None
    curve: int | None
    assessment: int | None


def next_steps(reader: User, memberships: Iterable[Membership]) -> dict[int, NextStep]:
    """The next step of each of these collaborations that has no done assessment yet. One query."""
    roles = {membership.collaboration_id: Role(membership.role) for membership in memberships}
    steps = {key: _step(key, found, roles[key]) for key, found in _found(reader, roles).items()}
    return {key: step for key, step in steps.items() if step is not None}


def _found(reader: User, collaborations: Iterable[int]) -> dict[int, Found]:
    rows = (
        Membership.objects.filter(collaboration__in=collaborations)
        .order_by()
        .values("collaboration")
        .distinct()
        .annotate(
            measurement=_first(Measurement.objects.all(), "collaboration"),
            sealed=_first(
                Measurement.objects.filter(
                    Q(opens_at=None) | Q(opens_at__gt=timezone.now()), sealed_at__isnull=False, opened_at=None
                ),
                "collaboration",
            ),
            release=_first(
                in_overview(Release.objects.filter(state=Release.State.PUBLISHED), reader),
                "measurement__collaboration",
            ),
            theory=_first(in_overview(Theory.objects.all(), reader), "collaboration"),
            curve=_first(
                in_overview(Curve.objects.filter(state=Curve.State.SUBMITTED), reader),
                "theory__collaboration",
            ),
            assessment=_first(
                in_overview(Assessment.objects.filter(status=Assessment.Status.DONE), reader),
                "release__measurement__collaboration",
            ),
        )
    )
    return {
        row["collaboration"]: Found(
            measurement=row["measurement"],
            sealed=row["sealed"],
            release=row["release"],
            theory=row["theory"],
            curve=row["curve"],
            assessment=row["assessment"],
        )
        for row in rows
    }


def _first(rows: QuerySet[Model], path: str) -> Subquery:
    mine = rows.filter(**{path: OuterRef("collaboration")})
    return Subquery(mine.order_by("pk").values("pk")[:1])


def _step(collaboration: int, found: Found, role: Role) -> NextStep | None:
    if found.assessment:
        return None
    if not found.measurement:
        url = reverse("measurements:new_measurement", args=[collaboration])
        return _offer(role, Action.PUBLISH, "There is no measurement yet.", "Add the first measurement", url)
    if not found.release and not found.sealed:
        url = reverse("measurements:upload", args=[found.measurement])
        return _offer(role, Action.PUBLISH, "No release is published yet.", "Upload the first release", url)
    if not found.theory:
        url = reverse("theories:new_theory", args=[collaboration])
        return _offer(role, Action.SUBMIT, "There is no theory yet.", "Add the first theory", url)
    if not found.curve:
        url = reverse("theories:new_curve", args=[found.theory])
        return _offer(role, Action.SUBMIT, "No curve is submitted yet.", "Submit the first curve", url)
    if not found.release:
        return None
    url = reverse("assessments:new", args=[found.release])
    return _offer(role, Action.ASSESS, "Nothing is assessed yet.", "Assess the curves", url)


def _offer(role: Role, action: Action, missing: str, words: str, url: str) -> NextStep:
    if role in PERMITTED[action]:
        return NextStep(missing, words, url)
    return NextStep(missing, "A lead adds it; you will see it here.", "")
