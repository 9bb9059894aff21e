"""Bring the made-up scenario in, through the same services as the pages do."""

import secrets
from collections.abc import Sequence
from dataclasses import asdict, dataclass

from django.db import transaction

from core.measurements.models import Measurement, Release
from core.measurements.services import create_measurement, draft_release, publish_release
from core.people.models import Collaboration, Role, User
from core.people.services import add_member, create_collaboration
from core.theories.models import Curve
from core.theories.services import create_theory, draft_curve, submit_curve
from fits.assessments.models import Assessment
from fits.assessments.services import request_assessment
from fits.engine.settings import Settings
from fits.management.demo import survey, wave_tank
from fits.management.demo.survey import File, ReleaseFiles, TheoryInWords

MARK = "Invented for the demo: no such lake, people or data exist."
SEED = 1


@dataclass(frozen=True)
class Account:
    """Somebody who can sign in to the demo."""

    email: str
    name: str
    does: str


LEAD = Account("lead@merrow.example", "Lin Merrow", "leads the Lake Merrow survey")
MEMBER = Account("member@merrow.example", "Mo Merrow", "submits theories to it")
TEACHER = Account("teacher@tank.example", "Tess Tank", "leads the wave tank class")
PUPIL = Account("bench@tank.example", "Ben Tank", "is a member of it")
ACCOUNTS = (LEAD, MEMBER, TEACHER, PUPIL)


def load() -> list[Assessment]:
    """The demo's assessments in order, the survey's by release first; what is there already is not doubled."""
    return [*_load_survey(), *_load_class()]


def fresh_passwords() -> dict[Account, str]:
    """A new password for each account at each start, so that none of them can be known from the code."""
    passwords = {account: f"merrow-{secrets.token_hex(4)}" for account in ACCOUNTS}
    for account, password in passwords.items():
        user = User.objects.get(email=account.email)
        user.set_password(password)
        user.save(update_fields=["password"])
    return passwords


def _load_survey() -> list[Assessment]:
    with transaction.atomic():
        lead, member, collaboration, is_new = _people(
            LEAD, MEMBER, "Lake Merrow survey", "A lake 52 km long."
        )
        if is_new:
            measurement = create_measurement(
                user=lead,
                collaboration=collaboration,
                name="Surface seiche power",
                about=f"Standing waves of Lake Merrow: power against frequency. {MARK}",
                x_name="frequency",
                x_unit="cycles per hour",
                y_name="surface seiche power",
                y_unit="mm²",
            )
            for number, stage in enumerate(survey.STAGES, start=1):
                _publish(lead, measurement, survey.survey_release(stage, number))
            for floor, words in survey.FLOORS:
                _submit(member, measurement, words, survey.floor_curve(floor, words))
    return _assess(lead, collaboration)


def _load_class() -> list[Assessment]:
    with transaction.atomic():
        teacher, pupil, collaboration, is_new = _people(TEACHER, PUPIL, "Wave tank class", "A lab class.")
        if is_new:
            measurement = create_measurement(
                user=teacher,
                collaboration=collaboration,
                name="Wave height in the tank",
                about=f"One resonance or two? {MARK}",
                x_name="paddle frequency",
                x_unit="Hz",
                y_name="amplitude",
                y_unit="mm",
            )
            _publish(teacher, measurement, wave_tank.class_release())
            for _, words in wave_tank.THEORIES:
                _submit(pupil, measurement, words, wave_tank.class_curve(words))
    return _assess(teacher, collaboration)


def _people(lead: Account, member: Account, name: str, about: str) -> tuple[User, User, Collaboration, bool]:
    users = [
        User.objects.filter(email=account.email).first()
        or User.objects.create_user(account.email, secrets.token_hex(), name=account.name)
        for account in (lead, member)
    ]
    found = Collaboration.objects.filter(name=name, memberships__user=users[0]).first()
    if found:
        return users[0], users[1], found, False
    collaboration = create_collaboration(user=users[0], name=name, about=f"{about} {MARK}")
    add_member(collaboration=collaboration, email=member.email, role=Role.MEMBER)
    return users[0], users[1], collaboration, True


def _publish(user: User, measurement: Measurement, files: ReleaseFiles) -> None:
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
    publish_release(draft, user)


def _submit(user: User, measurement: Measurement, words: TheoryInWords, file: File) -> None:
    theory = create_theory(user=user, collaboration=measurement.collaboration, **asdict(words))
    draft = draft_curve(
        user=user, theory=theory, measurement=measurement, content=file.content, file_name=file.name
    )
    submit_curve(draft)


def _assess(user: User, collaboration: Collaboration) -> list[Assessment]:
    releases = Release.objects.filter(measurement__collaboration=collaboration, state=Release.State.PUBLISHED)
    return [
        request_assessment(
            user=user,
            release=release,
            curves=_first_versions(release.measurement),
            settings=default_settings(),
            seed=SEED,
        )
        for release in releases.order_by("measurement", "number")
    ]


def _first_versions(measurement: Measurement) -> Sequence[Curve]:
    return list(measurement.curves.filter(version=1))


def default_settings() -> dict[str, object]:
    """The engine's defaults as an assessment's row keeps them."""
    settings = Settings()
    return asdict(settings) | {"levels": list(settings.levels), "shrinkage": settings.shrinkage.value}
