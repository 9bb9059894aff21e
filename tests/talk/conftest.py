"""A student with a desk, an observer, and a sealed measurement that was assessed early."""

import itertools
from collections.abc import Callable

import pytest
from django.test import Client
from django.utils import timezone

from core.measurements.models import EarlyLook, Measurement, Release
from core.people.models import Collaboration, Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment, Verdict

SignedIn = Callable[[User], Client]
Judge = Callable[..., Assessment]

_numbers = itertools.count(1)


def join(collaboration: Collaboration, name: str, role: Role) -> User:
    """Somebody new in this role; known by the first of their names before the @."""
    email = f"{name.split()[0].lower()}@merrow.example"
    user = User.objects.create_user(email, name=name)
    Membership.objects.create(user=user, collaboration=collaboration, role=role)
    return user


@pytest.fixture
def second_lead(collaboration: Collaboration) -> User:
    return join(collaboration, "Leo Secondlead", Role.LEAD)


@pytest.fixture
def student(collaboration: Collaboration) -> User:
    return join(collaboration, "Stu Student", Role.STUDENT)


@pytest.fixture
def other_student(collaboration: Collaboration) -> User:
    return join(collaboration, "Ottilie Otherstudent", Role.STUDENT)


@pytest.fixture
def observer(collaboration: Collaboration) -> User:
    return join(collaboration, "Obi Observer", Role.OBSERVER)


@pytest.fixture
def desk_theory(collaboration: Collaboration, student: User) -> Theory:
    """A theory at the student's desk."""
    return Theory.objects.create(
        collaboration=collaboration, name="Tilted floor", submitted_by=student, desk=student
    )


@pytest.fixture
def judge(lead: User) -> Judge:
    """Makes done assessments: a release, p-values by curve."""

    def judged(release: Release, p_values: dict[Curve, float], *, scale_p_value: float = 0.6) -> Assessment:
        curves = list(p_values)
        assessment = Assessment.objects.create(
            release=release,
            settings={"levels": [0.95]},
            seed=1,
            fingerprint=f"{next(_numbers):064d}",
            requested_by=lead,
            desk=curves[0].theory.desk if curves else None,
            status=Assessment.Status.DONE,
            ended_at=timezone.now(),
        )
        assessment.curves.set(curves)
        for rank, (curve, p_value) in enumerate(p_values.items(), start=1):
            Verdict.objects.create(
                assessment=assessment,
                curve=curve,
                rank=rank,
                distance=0.2 * rank,
                entry_level=1.0 - p_value,
                p_value=p_value,
                scale_p_value=scale_p_value,
                inside={"0.95": p_value > 0.05},
            )
        return assessment

    return judged


@pytest.fixture
def judged(judge: Judge, release: Release, curve: Curve) -> Assessment:
    """The shared curve, judged on the release."""
    return judge(release, {curve: 0.4})


def seal(measurement: Measurement, *looked: User) -> None:
    """Seal the measurement, these leads having looked early."""
    Measurement.objects.filter(pk=measurement.pk).update(sealed_at=timezone.now())
    for lead in looked:
        EarlyLook.objects.create(measurement=measurement, user=lead)
    measurement.refresh_from_db()


@pytest.fixture
def sealed(judged: Assessment, lead: User) -> Assessment:
    """The same assessment while its measurement is sealed, and `lead` has looked."""
    seal(judged.release.measurement, lead)
    return judged
