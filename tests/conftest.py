"""What many tests start from: a survey of a made-up lake with its people, a release, a theory and a curve."""

import hashlib
import io
import os
from collections.abc import Callable

import numpy as np
import pytest
from django.test import Client
from django.utils import timezone
from numpy.typing import NDArray

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, Membership, Role, User
from core.theories.models import Curve, Theory

PASSWORD = "a calm made-up lake"
FREQUENCIES = np.linspace(0.5, 4.5, 40)
ERROR = 0.1


def power(frequency: NDArray[np.float64]) -> NDArray[np.float64]:
    """The true spectrum of these tests: two resonances on a falling background."""
    lines = np.exp(-(((frequency - 1.5) / 0.3) ** 2)) + 0.5 * np.exp(-(((frequency - 3.0) / 0.3) ** 2))
    return np.asarray(lines + 0.4 / frequency, dtype=np.float64)


def npy(array: NDArray[np.float64] | NDArray[np.int64]) -> bytes:
    """An array as the bytes of a .npy file, which is how tables are stored."""
    buffer = io.BytesIO()
    np.save(buffer, array, allow_pickle=False)
    return buffer.getvalue()


@pytest.fixture
def lead(db: None) -> User:
    return User.objects.create_user("lead@merrow.example", PASSWORD, name="Lin Lead")


@pytest.fixture
def member(db: None) -> User:
    return User.objects.create_user("member@merrow.example", PASSWORD, name="Mo Member")


@pytest.fixture
def stranger(db: None) -> User:
    """Somebody with an account who belongs to no collaboration."""
    return User.objects.create_user("stranger@elsewhere.example", PASSWORD, name="Sal Stranger")


@pytest.fixture
def signed_in() -> Callable[[User], Client]:
    """Makes a client that is signed in as the given user."""

    def client_of(user: User) -> Client:
        client = Client()
        client.force_login(user)
        return client

    return client_of


@pytest.fixture
def collaboration(lead: User, member: User) -> Collaboration:
    """Led by `lead`, with `member` in it."""
    collaboration = Collaboration.objects.create(name="Lake Merrow survey", about="An invented lake.")
    Membership.objects.create(user=lead, collaboration=collaboration, role=Role.LEAD)
    Membership.objects.create(user=member, collaboration=collaboration, role=Role.MEMBER)
    return collaboration


@pytest.fixture
def measurement(collaboration: Collaboration, lead: User) -> Measurement:
    return Measurement.objects.create(
        collaboration=collaboration,
        name="Surface seiche power",
        x_name="frequency",
        x_unit="cycles per hour",
        y_name="power",
        y_unit="mm²",
        created_by=lead,
    )


@pytest.fixture
def release(measurement: Measurement, lead: User) -> Release:
    """Release 1, published: 40 points of `power` with errors of 0.1."""
    noise = np.random.default_rng(1).normal(0.0, ERROR, FREQUENCIES.size)
    table = np.column_stack([FREQUENCIES, power(FREQUENCIES) + noise, np.full(FREQUENCIES.size, ERROR)])
    content = npy(table)
    return Release.objects.create(
        measurement=measurement,
        number=1,
        state=Release.State.PUBLISHED,
        table=content,
        lines=npy(np.arange(2, FREQUENCIES.size + 2)),
        columns=[
            {"header": "frequency", "role": "x"},
            {"header": "power", "role": "y"},
            {"header": "error", "role": "error"},
        ],
        file_name="merrow-1.csv",
        file_sha256=hashlib.sha256(content).hexdigest(),
        points=FREQUENCIES.size,
        created_by=lead,
        published_at=timezone.now(),
    )


@pytest.fixture
def theory(collaboration: Collaboration, member: User) -> Theory:
    return Theory.objects.create(
        collaboration=collaboration,
        name="Parabolic floor",
        proposed_by="Group B (made up)",
        reference="Chrystal 1905",
        submitted_by=member,
    )


@pytest.fixture
def curve(theory: Theory, measurement: Measurement, member: User) -> Curve:
    """Version 1, submitted: the true spectrum on a finer grid."""
    x = np.linspace(0.4, 4.6, 200)
    content = npy(np.column_stack([x, power(x)]))
    return Curve.objects.create(
        theory=theory,
        measurement=measurement,
        version=1,
        state=Curve.State.SUBMITTED,
        table=content,
        file_name="parabolic.csv",
        file_sha256=hashlib.sha256(content).hexdigest(),
        points=x.size,
        x_min=float(x[0]),
        x_max=float(x[-1]),
        submitted_by=member,
        submitted_at=timezone.now(),
    )


def _skipped(session: pytest.Session) -> list[object]:
    reporter = session.config.pluginmanager.get_plugin("terminalreporter")
    return list(reporter.stats.get("skipped", [])) if reporter else []


def pytest_sessionfinish(session: pytest.Session) -> None:
    """Where everything is installed (CI=true) a skipped test is a failure."""
    if os.environ.get("CI") == "true" and session.exitstatus == 0 and _skipped(session):
        session.exitstatus = pytest.ExitCode.TESTS_FAILED


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    """Say why a run without failures failed."""
    if os.environ.get("CI") == "true" and terminalreporter.stats.get("skipped"):
        terminalreporter.write_line("skipped tests are failures where CI=true", red=True)
