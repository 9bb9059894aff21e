"""More of everything: what pages list, several times over."""

from datetime import timedelta

from django.utils import timezone

from core.measurements.models import EarlyLook, Measurement
from core.people.log import Deed, record
from core.people.models import Invitation, Membership, Role, User
from core.theories.models import Batch, BatchItem, Curve, Theory
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch, Verdict
from fits.reports.models import Report, ReportPart
from fits.reports.services import create_link
from fits.talk.models import Comment, Mention
from tests.browser.survey import curve_of, draft_of
from tests.permissions.world import World, assessment_of, release_of, report_of

TIMES = 4


def grow(world: World) -> None:
    """Let the collaboration have been at work for a while."""
    for number in range(2, 2 + TIMES):
        _people(world, number)
        _measurements(world, number)
        for desk in (None, world.people["student"]):
            _theories(world, number, desk)
        _reports(world, number)
        _words(world, number)


def _people(world: World, number: int) -> None:
    for role in Role:
        user = User.objects.create_user(f"{role}{number}@merrow.example", name=f"{role.title()} {number}")
        Membership.objects.create(user=user, collaboration=world.collaboration, role=role)
    Invitation.objects.create(
        collaboration=world.collaboration,
        token_sha256=f"{number:064d}",
        created_by=world.people["lead"],
        expires_at=timezone.now() + timedelta(days=number),
        is_for_many=bool(number % 2),
    )
    record(
        Deed.JOINED, who=world.people["member"], collaboration=world.collaboration, about=f"person {number}"
    )


def _measurements(world: World, number: int) -> None:
    measurement = Measurement.objects.create(
        collaboration=world.collaboration,
        name=f"Gauge {number}",
        x_name="frequency",
        y_name="power",
        created_by=world.people["lead"],
    )
    sealed = Measurement.objects.create(
        collaboration=world.collaboration,
        name=f"Sealed gauge {number}",
        x_name="frequency",
        y_name="power",
        sealed_at=timezone.now(),
        created_by=world.people["lead"],
    )
    EarlyLook.objects.create(measurement=sealed, user=world.people["lead"])
    lead = world.people["lead"]
    for measured in (measurement, sealed):
        curve = curve_of(world.rows[None].theory, measured, world.people["member"], stretch=1.0, version=1)
        _judged(assessment_of(release_of(measured, lead, 1), curve, f"m{number}{measured.pk}"), curve)
    newer = release_of(world.measurement, lead, number)
    for place, rows in enumerate(world.rows.values()):
        _judged(assessment_of(newer, rows.curve, f"r{number}{place}"), rows.curve)
    draft_of(world.release, ("x", "y", "error"), ("x", "y", "error"))


def _theories(world: World, number: int, desk: User | None) -> None:
    owner = desk or world.people["member"]
    theory = Theory.objects.create(
        collaboration=world.collaboration, name=f"Floor {number}", submitted_by=owner, desk=desk
    )
    curves: list[Curve] = [
        curve_of(theory, world.measurement, owner, stretch=1.0 + number / 50, version=version)
        for version in (1, 2)
    ]
    for place, curve in enumerate(curves):
        assessment = _judged(
            assessment_of(world.release, curve, f"t{number}{place}{'d' if desk else 's'}"), curve
        )
        search = FeatureSearch.objects.create(
            assessment=assessment, fingerprint=f"{assessment.pk:064d}", requested_by=owner, status="done"
        )
        FeaturePart.objects.create(search=search, kind=FeaturePart.Kind.PLAN, order=0, status="done")
    batch = Batch.objects.create(
        collaboration=world.collaboration,
        measurement=world.measurement,
        desk=desk,
        uploaded_by=owner,
        file_name=f"many-{number}.zip",
        file_sha256=f"{number:064d}",
        submitted_at=timezone.now(),
    )
    BatchItem.objects.create(batch=batch, order=1, name=theory.name, source="a.csv", curve=curves[0])


def _judged(assessment: Assessment, curve: Curve) -> Assessment:
    """As computed, without the result's charts."""
    Verdict.objects.create(
        assessment=assessment,
        curve=curve,
        rank=1,
        distance=0.2,
        entry_level=0.5,
        p_value=0.5,
        scale_p_value=0.5,
        inside={"0.95": True},
    )
    Assessment.objects.filter(pk=assessment.pk).update(
        status=Assessment.Status.DONE,
        ended_at=timezone.now(),
        radius=0.3,
        separations={"curves": [curve.pk], "distances": []},
    )
    return assessment


def _reports(world: World, number: int) -> None:
    lead = world.people["lead"]
    report_of(lead, world.rows[None].done)
    create_link(user=lead, report=world.report, label=f"office {number}", expires_at=None)
    for draft in Report.objects.filter(state=Report.State.DRAFT):
        ReportPart.objects.create(report=draft, order=number, assessment=world.rows[None].done)


def _words(world: World, number: int) -> None:
    for desk, rows in world.rows.items():
        for target in ("theory", "done"):
            about = (
                {"theory": rows.theory}
                if target == "theory"
                else {
                    "assessment": rows.done,
                    "measurement": world.measurement,
                }
            )
            comment = Comment.objects.create(
                collaboration=world.collaboration,
                author=world.people[desk or "member"],
                desk=rows.theory.desk,
                words=f"Word {number}.",
                **about,
            )
            Mention.objects.create(comment=comment, user=world.people["lead"])
