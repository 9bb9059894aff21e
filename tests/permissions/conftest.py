"""One world for all tests of a module: each works in a savepoint of its own, which is rolled back."""

from collections.abc import Iterator

import pytest
from django.db import transaction
from django.test import Client
from pytest_django import DjangoDbBlocker

from tests.permissions.world import World, world


@pytest.fixture(scope="module")
def shared_world(django_db_setup: None, django_db_blocker: DjangoDbBlocker) -> Iterator[World]:
    """The world of a module's tests."""
    with django_db_blocker.unblock(), transaction.atomic():
        yield world()
        transaction.set_rollback(True)


@pytest.fixture
def here(shared_world: World, db: None) -> World:
    """The world as it was made: what a test changes is rolled back to its savepoint."""
    return shared_world


def client_of(here: World, who: str) -> Client:
    """A client that is signed in as them; "nobody" is not."""
    client = Client(raise_request_exception=False)
    if who != "nobody":
        client.force_login(here.people[who])
    return client
