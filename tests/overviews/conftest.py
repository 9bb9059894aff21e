"""Assessments with verdicts, made without a computation."""

import itertools
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from datetime import datetime, timedelta

import pytest
from django.utils import timezone

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment, Verdict
from fits.reports.models import Report, ReportPart

SETTINGS = {"levels": [0.67, 0.9, 0.95, 0.99], "shrinkage": "monotone", "draws": 2000}


@dataclass
class Maker:
    """Makes rows of the made-up survey, in as many copies as a test wants."""

    lead: User
    sample: Release
    line: Curve
    counter: Iterator[int] = field(default_factory=lambda: itertools.count(1))

    def measurement(self, collaboration: Collaboration | None = None) -> Measurement:
        """Another measurement."""
        return Measurement.objects.create(
            collaboration=collaboration or self.sample.measurement.collaboration,
            name=f"Gauge {next(self.counter)}",
            x_name="frequency",
            y_name="power",
            created_by=self.lead,
        )

    def sealed(self) -> Measurement:
        """Another measurement, sealed until a lead opens it."""
        measurement = self.measurement()
        Measurement.objects.filter(pk=measurement.pk).update(sealed_at=timezone.now())
        measurement.refresh_from_db()
        return measurement

    def withdrawn(self, release: Release, reason: str = "A wrong clock") -> Release:
        """The release, taken back."""
        Release.objects.filter(pk=release.pk).update(
            state=Release.State.WITHDRAWN,
            withdrawn_at=timezone.now(),
            withdrawn_by=self.lead,
            withdrawal_reason=reason,
        )
        release.refresh_from_db()
        return release

    def student(self, name: str = "Stu Student") -> User:
        """A student of the collaboration."""
        user = User.objects.create_user(f"{next(self.counter)}@merrow.example", name=name)
        self.joined(user, Role.STUDENT)
        return user

    def joined(self, user: User, role: Role) -> None:
        """Let someone belong to the collaboration in this role."""
        collaboration = self.line.theory.collaboration
        Membership.objects.create(user=user, collaboration=collaboration, role=role)

    def release(
        self, measurement: Measurement, number: int | None, published_at: datetime | None = None
    ) -> Release:
        """A release with the sample's table; without a number a draft."""
        return Release.objects.create(
            measurement=measurement,
            number=number,
            state=Release.State.PUBLISHED if number else Release.State.DRAFT,
            note=f"note {number}",
            table=self.sample.table,
            lines=self.sample.lines,
            columns=self.sample.columns,
            file_name=f"merrow-{number}.csv",
            file_sha256="0" * 64,
            points=self.sample.points,
            created_by=self.lead,
            published_at=(published_at or timezone.now()) if number else None,
        )

    def theory(self, name: str, desk: User | None = None) -> Theory:
        """Another theory of the collaboration; of a student's desk, if one is given."""
        return Theory.objects.create(
            collaboration=self.line.theory.collaboration,
            name=name,
            proposed_by="Group F (made up)",
            submitted_by=desk or self.line.submitted_by,
            desk=desk,
        )

    def curve(
        self, theory: Theory, measurement: Measurement, version: int | None = 1, by: User | None = None
    ) -> Curve:
        """A curve with the sample's table; without a version a draft."""
        return Curve.objects.create(
            theory=theory,
            measurement=measurement,
            version=version,
            state=Curve.State.SUBMITTED if version else Curve.State.DRAFT,
            table=self.line.table,
            file_name=f"curve-{next(self.counter)}.csv",
            file_sha256="0" * 64,
            points=self.line.points,
            x_min=self.line.x_min,
            x_max=self.line.x_max,
            submitted_by=by or self.line.submitted_by,
            submitted_at=timezone.now() if version else None,
        )

    def assessment(
        self,
        release: Release,
        p_values: dict[Curve, float],
        *,
        status: str = Assessment.Status.DONE,
        ended_at: datetime | None = None,
        scale_p_value: float = 0.6,
        radius: float | None = 0.5,
        apart: Sequence[float] | None = None,
    ) -> Assessment:
        """An assessment that gave these p-values, ranked in the order given, at distances of 0.25, 0.5, …

        apart  the distances of its curves from each other, pair by pair in the order given; None: not kept
        """
        assessment = Assessment.objects.create(
            release=release,
            settings=SETTINGS,
            seed=1,
            fingerprint=f"{next(self.counter):064d}",
            requested_by=self.lead,
            status=status,
            ended_at=ended_at or timezone.now(),
            desk=next((curve.theory.desk for curve in p_values), None),
            radius=radius,
            separations=None
            if apart is None
            else {"curves": [curve.pk for curve in p_values], "distances": list(apart)},
        )
        assessment.curves.set(p_values)
        Verdict.objects.bulk_create(
            Verdict(
                assessment=assessment,
                curve=curve,
                rank=rank,
                distance=0.25 * rank,
                entry_level=1.0 - p_value,
                p_value=p_value,
                scale_p_value=scale_p_value,
                inside={"0.95": p_value > 0.05},
            )
            for rank, (curve, p_value) in enumerate(p_values.items(), start=1)
        )
        return assessment

    def report(self, assessment: Assessment, title: str, frozen_at: datetime | None = None) -> Report:
        """A frozen report of an assessment."""
        report = self.draft_report(assessment, title)
        Report.objects.filter(pk=report.pk).update(
            state=Report.State.FROZEN, frozen_at=frozen_at or timezone.now()
        )
        report.refresh_from_db()
        return report

    def draft_report(self, assessment: Assessment, title: str) -> Report:
        """A report that is being written."""
        report = Report.objects.create(
            collaboration=assessment.release.measurement.collaboration, title=title, author=self.lead
        )
        ReportPart.objects.create(report=report, order=1, assessment=assessment)
        return report


@pytest.fixture
def make(lead: User, release: Release, curve: Curve) -> Maker:
    return Maker(lead=lead, sample=release, line=curve)


@pytest.fixture
def rival(make: Maker, measurement: Measurement) -> Curve:
    """A curve of a second theory for the same measurement."""
    return make.curve(make.theory("Flat floor"), measurement)


@pytest.fixture
def ago() -> Callable[[int], datetime]:
    """A moment so many hours ago."""

    def hours(count: int) -> datetime:
        return timezone.now() - timedelta(hours=count)

    return hours
