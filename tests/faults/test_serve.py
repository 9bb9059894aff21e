"""The site on a single machine: whatever ends it, no process of it is left."""

import os
import signal
import socket
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import psutil
import pytest

from tests.real_processes import BASE_DIR, free_port, kill_group
from tests.waiting import wait_until


class Serving:
    """`manage.py serve` in a home of its own."""

    def __init__(self, home: Path) -> None:
        self.output = home / "output"
        environment = os.environ | {
            "INRADIUS_HOME": str(home),
            "DATABASE_URL": f"sqlite:///{home}/db.sqlite3",
        }
        environment.pop("REDIS_URL", None)
        with self.output.open("wb") as out:
            self.process = subprocess.Popen(
                [sys.executable, "manage.py", "serve", "--port", str(free_port())],
                cwd=BASE_DIR,
                env=environment,
                stdout=out,
                stderr=subprocess.STDOUT,
                start_new_session=True,
            )

    def said(self) -> str:
        """All that it printed."""
        return self.output.read_text()

    def is_up(self) -> bool:
        """Whether it says so; fails at once, with what it said, if it has ended."""
        assert self.process.poll() is None, self.said()
        return "Inradius is at" in self.said()

    def family(self) -> list[psutil.Process]:
        """All processes that it started."""
        return list(psutil.Process(self.process.pid).children(recursive=True))

    def wait_for_end(self) -> int:
        """Its exit code."""
        return self.process.wait(30)


@pytest.fixture
def serving(tmp_path: Path) -> Iterator[Serving]:
    """The site, up."""
    site = Serving(tmp_path)
    family: list[psutil.Process] = []
    try:
        wait_until(site.is_up, seconds=60.0, what="the site is up")
        worker_log = tmp_path / "logs" / "worker.log"
        wait_until(lambda: "ready." in worker_log.read_text(), seconds=60.0, what="its worker is ready")
        family = site.family()
        yield site
    finally:
        kill_group(site.process)
        for process in family:
            if process.is_running():
                process.kill()


def gone(family: list[psutil.Process]) -> bool:
    return not any(process.is_running() and process.status() != psutil.STATUS_ZOMBIE for process in family)


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM, signal.SIGKILL])
def test_whatever_ends_it_no_process_is_left(serving: Serving, number: signal.Signals) -> None:
    family = serving.family()
    assert {"redis-server", "celery", "gunicorn"} <= {
        word
        for process in family
        for word in ("redis-server", "celery", "gunicorn")
        if word in " ".join(process.cmdline())
    }
    serving.process.send_signal(number)
    code = serving.wait_for_end()
    assert code == (-signal.SIGKILL if number == signal.SIGKILL else 0), serving.said()
    wait_until(lambda: gone(family), seconds=30.0, what="all its processes have ended")


def test_when_one_process_dies_it_says_which_and_ends_all(serving: Serving) -> None:
    family = serving.family()
    worker = next(process for process in family if "celery" in process.cmdline())
    worker.kill()
    assert serving.wait_for_end() == 1
    assert "worker ended by itself" in serving.said()
    wait_until(lambda: gone(family), seconds=30.0, what="all its processes have ended")


def test_a_taken_port_gets_one_line_before_anything_is_started(tmp_path: Path) -> None:
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        taken.listen()
        port = str(taken.getsockname()[1])
        done = subprocess.run(
            [sys.executable, "manage.py", "serve", "--port", port],
            cwd=BASE_DIR,
            env=os.environ | {"INRADIUS_HOME": str(tmp_path)},
            capture_output=True,
            text=True,
            check=False,
        )
    assert done.returncode == 2
    assert done.stderr.splitlines() == [
        f"CommandError: Port {port} is taken by another program. Choose another by --port"
    ]
    assert not (tmp_path / "logs").exists()
    assert not (tmp_path / "inradius.sqlite3").exists()
