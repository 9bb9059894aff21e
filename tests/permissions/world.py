"""A collaboration with somebody in each role, and rows of every kind that an address can name."""

from dataclasses import dataclass, field
from datetime import timedelta
from typing import Any

import numpy as np
from django.utils import timezone

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment, FeatureSearch
from fits.reports.models import Report
from fits.reports.services import create_link
from tests.browser.survey import SETTINGS, computed, curve_of, draft_of
from tests.conftest import ERROR, FREQUENCIES, npy, power

SHARED_ROLES = (Role.LEAD, Role.MEMBER, Role.OBSERVER)


@dataclass(frozen=True)
class Rows:
    """What stands where someone works: shared by all, or at a student's desk."""

    theory: Theory
    curve: Curve
    done: Assessment
    running: Assessment
    search: FeatureSearch


@dataclass
class World:
    """All of it. `rows[None]` are the shared ones, the others those of a student's desk."""

    people: dict[str, User]
    collaboration: Collaboration
    measurement: Measurement
    release: Release
    draft: Release
    rows: dict[str | None, Rows]
    report: Report
    link: Any
    secret: str
    more: dict[str, Any] = field(default_factory=dict)  # rows of single addresses, made by their cases

    def around(self, who: str) -> Rows:
        """The rows that somebody works with: a student's are those of their desk."""
        return self.rows[who if who in self.rows else None]

    def draft_curve(self, who: str) -> Curve:
        """A draft of theirs; of the lead's for those who have none."""
        owner = self.people[who] if who in ("lead", "member", "student") else self.people["lead"]
        return Curve.objects.get(submitted_by=owner, state=Curve.State.DRAFT)


def assessment_of(release: Release, curve: Curve, mark: str, **fields: Any) -> Assessment:
    """An assessment of one curve, of the desk at which the curve stands."""
    assessment = Assessment.objects.create(
        release=release,
        settings=SETTINGS,
        seed=1,
        fingerprint=f"{mark:0>64}",
        requested_by=curve.submitted_by,
        desk=curve.theory.desk,
        **fields,
    )
    assessment.curves.set([curve])
    return assessment


def rows_at(release: Release, by: User, desk: User | None, marks: str) -> Rows:
    """A theory with a curve, judged, and with another assessment under way."""
    measurement = release.measurement
    theory = Theory.objects.create(
        collaboration=measurement.collaboration, name="Parabolic floor", submitted_by=by, desk=desk
    )
    curve = curve_of(theory, measurement, by, stretch=1.0, version=1)
    done = computed(assessment_of(release, curve, marks[0]))
    running = assessment_of(release, curve, marks[1], status=Assessment.Status.RUNNING)
    search = FeatureSearch.objects.create(
        assessment=done, fingerprint=marks[0] * 64, requested_by=by, status=FeatureSearch.Status.RUNNING
    )
    return Rows(theory, curve, done, running, search)


def release_of(measurement: Measurement, by: User, number: int) -> Release:
    """A published release: 40 points of the spectrum."""
    noise = np.random.default_rng(number).normal(0.0, ERROR, FREQUENCIES.size)
    table = np.column_stack([FREQUENCIES, power(FREQUENCIES) + noise, np.full(FREQUENCIES.size, ERROR)])
    return Release.objects.create(
        measurement=measurement,
        number=number,
        state=Release.State.PUBLISHED,
        table=npy(table),
        lines=npy(np.arange(2, FREQUENCIES.size + 2)),
        columns=[{"header": name, "role": name} for name in ("x", "y", "error")],
        file_name=f"merrow-{number}.csv",
        file_sha256=f"{number:064d}",
        points=FREQUENCIES.size,
        created_by=by,
        published_at=timezone.now(),
    )


def world() -> World:
    """Build it."""
    people = {
        name: User.objects.create_user(f"{name}@merrow.example", name=f"{name.title()} of Merrow")
        for name in ("lead", "second_lead", "member", "student", "other_student", "observer", "stranger")
    }
    collaboration = Collaboration.objects.create(name="Lake Merrow survey")
    for name, role in (
        ("lead", Role.LEAD),
        ("second_lead", Role.LEAD),
        ("member", Role.MEMBER),
        ("student", Role.STUDENT),
        ("other_student", Role.STUDENT),
        ("observer", Role.OBSERVER),
    ):
        Membership.objects.create(user=people[name], collaboration=collaboration, role=role)
    elsewhere = Collaboration.objects.create(name="Another lake")
    Membership.objects.create(user=people["stranger"], collaboration=elsewhere, role=Role.LEAD)
    measurement = Measurement.objects.create(
        collaboration=collaboration,
        name="Surface seiche power",
        x_name="frequency",
        y_name="power",
        created_by=people["lead"],
    )
    release = release_of(measurement, people["lead"], 1)
    shared = rows_at(release, people["member"], None, "ab")
    desk = rows_at(release, people["student"], people["student"], "cd")
    for name, theory in (("lead", shared.theory), ("member", shared.theory), ("student", desk.theory)):
        curve_of(theory, measurement, people[name], stretch=1.1, version=None)
    report = report_of(people["lead"], shared.done)
    week = timezone.now() + timedelta(days=7)
    link = create_link(user=people["lead"], report=report, label="the harbour office", expires_at=week)
    return World(
        people=people,
        collaboration=collaboration,
        measurement=measurement,
        release=release,
        draft=draft_of(release, ("x", "y", "error"), ("x", "y", "error")),
        rows={None: shared, "student": desk},
        report=report,
        link=link.link,
        secret=link.secret,
    )


def report_of(lead: User, assessment: Assessment) -> Report:
    """A frozen report on an assessment."""
    from fits.reports.services import create_report

    return create_report(user=lead, assessment=assessment, title="What release 1 says", words="Calm.")
