"""What a collaboration lacks before its first verdict."""

from collections.abc import Iterable
from dataclasses import dataclass

from django.db.models import Model, OuterRef, QuerySet, Subquery
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.access import PERMITTED, Action
from core.people.models import Membership, Role
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
    """The first row of each kind that a collaboration has, by key; None where it has none."""

    measurement: int | None
    release: int | None
    theory: int | None
    curve: int | None
    assessment: int | None


def next_steps(memberships: Iterable[Membership]) -> dict[int, NextStep]:
    """The next step of each of these collaborations that has no done assessment yet. One query."""
    roles = {membership.collaboration_id: Role(membership.role) for membership in memberships}
    steps = {key: _step(key, found, roles[key]) for key, found in _found(roles).items()}
    return {key: step for key, step in steps.items() if step is not None}


def _found(collaborations: Iterable[int]) -> dict[int, Found]:
    rows = (
        Membership.objects.filter(collaboration__in=collaborations)
        .order_by()
        .values("collaboration")
        .distinct()
        .annotate(
            measurement=_first(Measurement.objects.all(), "collaboration"),
            release=_first(
                Release.objects.filter(state=Release.State.PUBLISHED), "measurement__collaboration"
            ),
            theory=_first(Theory.objects.all(), "collaboration"),
            curve=_first(Curve.objects.filter(state=Curve.State.SUBMITTED), "theory__collaboration"),
            assessment=_first(
                Assessment.objects.filter(status=Assessment.Status.DONE),
                "release__measurement__collaboration",
            ),
        )
    )
    return {
        row["collaboration"]: Found(
            measurement=row["measurement"],
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
    if not found.release:
        url = reverse("measurements:upload", args=[found.measurement])
        return _offer(role, Action.PUBLISH, "No release is published yet.", "Upload the first release", url)
    if not found.theory:
        url = reverse("theories:new_theory", args=[collaboration])
        return _offer(role, Action.SUBMIT, "There is no theory yet.", "Add the first theory", url)
    if not found.curve:
        url = reverse("theories:new_curve", args=[found.theory])
        return _offer(role, Action.SUBMIT, "No curve is submitted yet.", "Submit the first curve", url)
    url = reverse("assessments:new", args=[found.release])
    return _offer(role, Action.ASSESS, "Nothing is assessed yet.", "Assess the curves", url)


def _offer(role: Role, action: Action, missing: str, words: str, url: str) -> NextStep:
    if role in PERMITTED[action]:
        return NextStep(missing, words, url)
    return NextStep(missing, "A lead adds it; you will see it here.", "")
