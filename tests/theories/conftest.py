"""People who bring theories from a desk, or only read."""

import pytest

from core.people.models import Collaboration, Membership, Role, User


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
