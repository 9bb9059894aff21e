"""People who bring theories from a desk, or only read; uploads read without a child process, which takes its time."""

import pytest

from core.measurements.reading.batch import read_batch
from core.measurements.reading.curve import read_curve
from core.people.models import Collaboration, Membership, Role, User
from core.theories.services import batch_draft, draft


def person(collaboration: Collaboration, name: str, role: Role) -> User:
    user = User.objects.create_user(f"{name}@merrow.example", name=name.title())
    Membership.objects.create(user=user, collaboration=collaboration, role=role)
    return user


@pytest.fixture
def student(collaboration: Collaboration) -> User:
    return person(collaboration, "student", Role.STUDENT)


@pytest.fixture
def neighbour(collaboration: Collaboration) -> User:
    """Another student."""
    return person(collaboration, "neighbour", Role.STUDENT)


@pytest.fixture
def observer(collaboration: Collaboration) -> User:
    return person(collaboration, "observer", Role.OBSERVER)


@pytest.fixture
def read_in_this_process(monkeypatch: pytest.MonkeyPatch) -> None:
    """For tests of what becomes of a curve; tests of reading have a child process of their own."""
    monkeypatch.setattr(draft, "read_curve_apart", read_curve)
    monkeypatch.setattr(batch_draft, "read_batch_apart", read_batch)
