"""Workers and sites as real processes, on the database of the tests."""

import contextlib
import os
import signal
import socket
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path
from urllib.parse import quote

from django.conf import settings
from django.db import connection

from tests.waiting import wait_until

BASE_DIR = Path(__file__).resolve().parent.parent


def database_url() -> str:
    """The database of the tests as other processes name it."""
    found = connection.settings_dict
    if connection.vendor == "sqlite":
        return f"sqlite:///{found['NAME']}"
    user, password, host = (quote(str(found[key]), safe="") for key in ("USER", "PASSWORD", "HOST"))
    return f"postgres://{user}:{password}@{host}:{found['PORT'] or 5432}/{found['NAME']}"


def free_port() -> int:
    """A port that nobody listens on."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


def worker_command(app: str) -> list[str]:
    """A worker of one process with its scheduler."""
    # fmt: off
    return [
        sys.executable, "-m", "celery", "--app", app, "worker", "--beat", "--concurrency", "1",
        "--without-mingle", "--without-gossip", "--loglevel", "INFO",
    ]
    # fmt: on


@contextlib.contextmanager
def real_worker(
    log: Path, *, app: str = "core.worker", **environment: str
) -> Iterator[subprocess.Popen[bytes]]:
    """A worker on the tests' database, killed with all its children at the end of the block."""
    settings.HOME.joinpath("schedule").unlink(missing_ok=True)
    with log.open("wb") as out:
        process = subprocess.Popen(
            worker_command(app),
            cwd=BASE_DIR,
            env=os.environ | {"DATABASE_URL": database_url()} | environment,
            stdout=out,
            stderr=subprocess.STDOUT,
            start_new_session=True,
        )
    try:
        yield process
    finally:
        kill_group(process)


def wait_until_ready(worker: subprocess.Popen[bytes], log: Path) -> None:
    """Wait until a worker takes work; fails at once, with its log, if it ends instead."""

    def ready() -> bool:
        assert worker.poll() is None, log.read_text()
        return "ready." in log.read_text()

    wait_until(ready, seconds=60.0, what="the worker is ready")


def kill_group(process: subprocess.Popen[bytes]) -> None:
    """End a process and all that it started, the hard way."""
    with contextlib.suppress(ProcessLookupError):
        os.killpg(process.pid, signal.SIGKILL)
    process.wait()
