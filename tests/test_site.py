"""The health address, how much a request may bring, the first user, and the watch over the worker."""

import io
import os
import time
from urllib.parse import urlencode

import pytest
from django.core.management import CommandError, call_command
from django.test import Client
from django.urls import reverse
from pytest_django import Settings

from core import broker, health
from core.people.models import User
from core.processes import Child, Processes, start
from core.single_machine import Site

pytestmark = pytest.mark.django_db


def test_health_is_ok_when_database_and_broker_answer(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(broker, "answers", lambda url: True)
    answer = Client().get("/health")
    assert (answer.status_code, answer.content) == (200, b"ok\n")


def test_health_names_what_is_away(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(broker, "answers", lambda url: False)
    monkeypatch.setattr(health, "_database", lambda: False)
    answer = Client().get("/health")
    assert (answer.status_code, answer.content) == (503, b"database away\nbroker away\n")


@pytest.mark.parametrize(("more", "status"), [(0, 200), (1, 413)])
def test_a_request_longer_than_all_files_of_a_form_is_refused_unread(
    more: int, status: int, client: Client, settings: Settings
) -> None:
    settings.REQUEST_MAX_BYTES = 1000
    fields = {"login": "somebody@merrow.example", "password": ""}
    body = urlencode(fields).ljust(1000 + more, "x")
    unread = io.BytesIO(body.encode())
    answer = client.post(
        reverse("account_login"),
        content_type="application/x-www-form-urlencoded",
        **{"wsgi.input": unread, "CONTENT_LENGTH": str(len(body))},  # type: ignore[arg-type]
    )
    assert answer.status_code == status
    assert (unread.tell() == 0) == (status == 413)


def make_first_user(monkeypatch: pytest.MonkeyPatch, password: str) -> None:
    monkeypatch.setattr("sys.stdin", io.StringIO(f"{password}\n"))
    call_command("first_user", "Lin@Merrow.example", name="Lin", stdout=io.StringIO())


def test_the_first_user_can_sign_in(monkeypatch: pytest.MonkeyPatch) -> None:
    make_first_user(monkeypatch, "seiches all the way")
    user = User.objects.get(email="lin@merrow.example")
    assert user.check_password("seiches all the way")
    assert user.name == "Lin"


def test_a_weak_password_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    with pytest.raises(CommandError, match="too short"):
        make_first_user(monkeypatch, "short")
    assert not User.objects.exists()


def test_an_address_that_is_there_already_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    make_first_user(monkeypatch, "seiches all the way")
    with pytest.raises(CommandError, match="is a user already"):
        make_first_user(monkeypatch, "seiches all the way")


@pytest.fixture
def site(settings: Settings) -> Site:
    """A site whose worker started an hour ago and got something done just now."""
    settings.WORKER_ALIVE_FILE.touch()
    worker: Child = None  # type: ignore[assignment]
    return Site("", Processes(), worker, time.time() - 3600.0)


def silent_for(site: Site, settings: Settings, seconds: float) -> None:
    then = time.time() - seconds
    os.utime(settings.WORKER_ALIVE_FILE, (then, then))


def test_a_worker_that_gets_things_done_is_left_alone(site: Site) -> None:
    assert not site.worker_hangs()


def test_a_silent_worker_hangs(site: Site, settings: Settings) -> None:
    silent_for(site, settings, settings.WORKER_SILENCE_SECONDS + 5)
    assert site.worker_hangs()


def test_a_worker_that_never_got_anything_done_hangs(site: Site, settings: Settings) -> None:
    settings.WORKER_ALIVE_FILE.unlink()
    assert site.worker_hangs()


def test_a_worker_that_just_started_has_time(site: Site, settings: Settings) -> None:
    silent_for(site, settings, 10_000.0)
    site.worker_started = time.time()
    assert not site.worker_hangs()


def test_a_child_is_started_anew() -> None:
    with Processes() as processes:
        first = processes.add(start("child", ["sleep", "60"]))
        second = processes.restart(first, ["sleep", "60"])
        assert first.process.poll() is not None
        assert second.process.poll() is None
    assert second.process.poll() is not None
