"""What people of the demo do on pages: publish, submit, ask."""

from dataclasses import asdict

from core.measurements.models import Measurement, Release
from core.measurements.services import draft_release, publish_release
from core.people.models import User
from core.theories.batch_rules import seen_now
from core.theories.models import Curve, Theory
from core.theories.services import create_theory, draft_batch, draft_curve, submit_batch, submit_curve
from fits.assessments.default_settings import DEFAULT_SEED, default_settings
from fits.assessments.models import Assessment
from fits.assessments.services import request_assessment
from fits.management.demo.survey import File, ReleaseFiles, TheoryInWords


def publish(user: User, measurement: Measurement, files: ReleaseFiles) -> Release:
    """Upload a release and publish it."""
    covariance = files.covariance
    draft = draft_release(
        user=user,
        measurement=measurement,
        content=files.table.content,
        file_name=files.table.name,
        covariance_content=covariance.content if covariance else None,
        covariance_name=covariance.name if covariance else "",
        note=files.note,
    )
    return publish_release(draft, user)


def propose(user: User, measurement: Measurement, words: TheoryInWords) -> Theory:
    """Name a theory."""
    return create_theory(user=user, collaboration=measurement.collaboration, **asdict(words))


def submit(user: User, theory: Theory, measurement: Measurement, file: File) -> Curve:
    """Upload a curve and submit it."""
    draft = draft_curve(
        user=user, theory=theory, measurement=measurement, content=file.content, file_name=file.name
    )
    return submit_curve(draft)


def submit_together(user: User, measurement: Measurement, file: File) -> None:
    """Upload a table of curves and submit all of them."""
    batch = draft_batch(user=user, measurement=measurement, content=file.content, file_name=file.name)
    submit_batch(batch, seen=seen_now(batch))


def assess(user: User, release: Release, curves: list[Curve]) -> Assessment:
    """Ask for an assessment with the settings that the form offers."""
    return request_assessment(
        user=user, release=release, curves=curves, settings=default_settings(), seed=DEFAULT_SEED
    )
