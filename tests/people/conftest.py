"""The other roles, and what tests of people ask again and again."""

from collections.abc import Callable
from datetime import datetime, timedelta

import pytest
from django.core.cache import cache
from django.test import Client
from django.utils import timezone

from core.people import services
from core.people.models import Collaboration, Membership, Role, User
from core.people.services import NewInvitation
from tests.conftest import PASSWORD

SignedIn = Callable[[User], Client]


def membership(user: User, collaboration: Collaboration) -> Membership:
    return Membership.objects.select_related("user").get(user=user, collaboration=collaboration)


def in_a_week() -> datetime:
    return timezone.now() + timedelta(days=7)


def add(collaboration: Collaboration, name: str, role: Role) -> User:
    """Somebody of this name, in this role."""
    user = User.objects.create_user(f"{name.split()[0].lower()}@merrow.example", PASSWORD, name=name)
    Membership.objects.create(user=user, collaboration=collaboration, role=role)
    return user


@pytest.fixture(autouse=True)
def forget_rates() -> None:
    """Else many tests in a minute look like somebody who tries too often."""
    cache.clear()


@pytest.fixture
def second_lead(collaboration: Collaboration) -> User:
    return add(collaboration, "Lou Lead", Role.LEAD)


@pytest.fixture
def student(collaboration: Collaboration) -> User:
    return add(collaboration, "Stu Student", Role.STUDENT)


@pytest.fixture
def observer(collaboration: Collaboration) -> User:
    return add(collaboration, "Ona Observer", Role.OBSERVER)


@pytest.fixture
def for_one(collaboration: Collaboration, lead: User) -> NewInvitation:
    """A link by which one student joins."""
    return services.invite_by_link(
        by=lead, collaboration=collaboration, role=Role.STUDENT, expires_at=in_a_week(), label="Nell"
    )


@pytest.fixture
def for_many(collaboration: Collaboration, lead: User) -> NewInvitation:
    """A link by which students join."""
    return services.invite_by_link(
        by=lead,
        collaboration=collaboration,
        role=Role.STUDENT,
        expires_at=in_a_week(),
        label="The class",
        is_for_many=True,
    )
