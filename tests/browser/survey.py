"""Everything that a page can show, of an invented lake: rows in each state they can be in."""

import hashlib
from dataclasses import dataclass
from datetime import timedelta
from typing import Any

import numpy as np
from django.utils import timezone
from numpy.typing import NDArray

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, User
from core.theories.models import Curve, Theory
from fits.assessments import pipeline
from fits.assessments.models import Assessment, Verdict
from fits.reports.models import Report
from fits.reports.services import create_link, create_report
from tests.conftest import npy, power

SETTINGS: dict[str, Any] = {
    "levels": [0.67, 0.9, 0.95, 0.99],
    "resolution": None,
    "feature_width": None,
    "full": False,
    "shrinkage": "monotone",
    "draws": 500,
}
# How far each theory's peaks are from the true ones, and who proposed it.
THEORIES = {
    "Flat floor": (1.05, "Group A (made up)"),
    "Triangular floor": (1.02, "Group C (made up)"),
    "Two joined basins of unequal depth": (1.12, "Group D (made up)"),
}


@dataclass(frozen=True)
class Survey:
    """One of each."""

    lead: User
    member: User
    stranger: User
    collaboration: Collaboration
    measurement: Measurement
    release: Release
    draft: Release
    unmapped: Release
    theory: Theory
    curve: Curve
    draft_curve: Curve
    done: Assessment
    queued: Assessment
    running: Assessment
    failed: Assessment
    cancelled: Assessment
    report: Report
    secret: str
    revoked_secret: str


def curve_of(
    theory: Theory, measurement: Measurement, by: User, *, stretch: float, version: int | None
) -> Curve:
    """A curve whose peaks stand at `stretch` times the true places; without a version a draft."""
    x = np.linspace(0.4, 4.6, 200)
    content = npy(np.column_stack([x, power(x / stretch)]))
    return Curve.objects.create(
        theory=theory,
        measurement=measurement,
        version=version,
        state=Curve.State.SUBMITTED if version else Curve.State.DRAFT,
        note="Friction left out.",
        table=content,
        file_name=f"{theory.name.lower().replace(' ', '-')}.csv",
        file_sha256=hashlib.sha256(content).hexdigest(),
        points=x.size,
        x_min=float(x[0]),
        x_max=float(x[-1]),
        submitted_by=by,
        submitted_at=timezone.now() if version else None,
    )


def draft_of(release: Release, headers: tuple[str, str, str], roles: tuple[str, str, str]) -> Release:
    """A draft with a published release's table."""
    return Release.objects.create(
        measurement=release.measurement,
        note="The second season, with a better gauge.",
        table=release.table,
        lines=release.lines,
        columns=[{"header": header, "role": role} for header, role in zip(headers, roles, strict=True)],
        file_name="merrow-2.csv",
        file_sha256=release.file_sha256,
        points=release.points,
        created_by=release.created_by,
    )


def assessment_of(release: Release, curves: list[Curve], by: User, mark: str, **fields: Any) -> Assessment:
    """An assessment in whatever state the fields say."""
    assessment = Assessment.objects.create(
        release=release, settings=SETTINGS, seed=1, fingerprint=mark * 64, requested_by=by, **fields
    )
    assessment.curves.set(curves)
    return assessment


def computed(assessment: Assessment) -> Assessment:
    """The assessment with its result, computed here rather than by a worker."""
    outcome = pipeline.compute(assessment, lambda stage, share: None)
    assessment.result, assessment.detail = outcome.result, outcome.detail
    assessment.radius, assessment.separations = outcome.radius, outcome.separations
    assessment.status, assessment.stage = Assessment.Status.DONE, Assessment.Stage.ENDED
    assessment.started_at = assessment.ended_at = timezone.now()
    assessment.engine_version = outcome.result["engine"]
    assessment.save()
    Verdict.objects.bulk_create(
        Verdict(
            assessment=assessment,
            curve_id=outcome.curve_keys[curve["name"]],
            rank=curve["rank"],
            distance=curve["distance"],
            entry_level=curve["entry_level"]["calibrated"],
            p_value=curve["p_value"],
            scale_p_value=curve["scales"]["p_value"],
            inside=curve["inside"]["exact"],
        )
        for curve in outcome.result["curves"]
    )
    return assessment


def second_release(first: Release) -> Release:
    """The same lake measured at more points and more precisely."""
    x: NDArray[np.float64] = np.linspace(0.5, 4.5, 120)
    noise = np.random.default_rng(3).normal(0.0, 0.07, x.size)
    content = npy(np.column_stack([x, power(x) + noise, np.full(x.size, 0.07)]))
    return Release.objects.create(
        measurement=first.measurement,
        number=2,
        state=Release.State.PUBLISHED,
        note="A second gauge at the outflow.",
        table=content,
        lines=npy(np.arange(2, x.size + 2)),
        columns=first.columns,
        file_name="merrow-2.csv",
        file_sha256=hashlib.sha256(content).hexdigest(),
        points=x.size,
        created_by=first.created_by,
        published_at=timezone.now(),
    )


def survey_of(first: Release, theory: Theory, curve: Curve, member: User, stranger: User) -> Survey:
    """All of it, around what the tests start from."""
    measurement, lead = first.measurement, first.created_by
    now = timezone.now()
    curves = [curve]
    for name, (stretch, group) in THEORIES.items():
        other = Theory.objects.create(
            collaboration=measurement.collaboration, name=name, proposed_by=group, submitted_by=member
        )
        curves.append(curve_of(other, measurement, member, stretch=stretch, version=1))
    computed(assessment_of(first, curves, member, "a"))
    release = second_release(first)
    done = computed(assessment_of(release, curves, member, "b"))
    report = create_report(
        user=lead,
        assessment=done,
        title="What the second release says of the floor of the lake",
        words="We asked whether the second gauge can tell the floors apart.\n\nIt can tell most of them.",
    )
    week = now + timedelta(days=7)
    link = create_link(user=lead, report=report, label="the harbour office", expires_at=week)
    revoked = create_link(user=lead, report=report, label="", expires_at=None)
    revoked.link.revoked_at = now
    revoked.link.save()
    status = Assessment.Status
    return Survey(
        lead=lead,
        member=member,
        stranger=stranger,
        collaboration=measurement.collaboration,
        measurement=measurement,
        release=release,
        draft=draft_of(release, ("frequency", "power", "error"), ("x", "y", "error")),
        unmapped=draft_of(release, ("frequency", "power", "spread"), ("x", "", "")),
        theory=theory,
        curve=curve,
        draft_curve=curve_of(theory, measurement, lead, stretch=1.3, version=None),
        done=done,
        queued=assessment_of(release, curves[:1], member, "c"),
        running=assessment_of(
            release,
            curves[:2],
            member,
            "d",
            status=status.RUNNING,
            stage=Assessment.Stage.CALIBRATING,
            progress=0.4,
            attempt=2,
            started_at=now,
            heartbeat_at=now,
        ),
        failed=assessment_of(
            release,
            curves[:3],
            member,
            "e",
            status=status.FAILED,
            stage=Assessment.Stage.ENDED,
            ended_at=now,
            failure_code="curve-range",
            failure="The curve of Flat floor ends at 4.2, the data at 4.5. Give a curve that reaches over the data.",
        ),
        cancelled=assessment_of(
            release,
            curves[1:],
            member,
            "f",
            status=status.CANCELLED,
            stage=Assessment.Stage.ENDED,
            cancel_requested=True,
            ended_at=now,
        ),
        report=report,
        secret=link.secret,
        revoked_secret=revoked.secret,
    )
