"""The whole site on one machine without any services: Redis, a worker with its scheduler, a web server."""

import contextlib
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from dataclasses import dataclass

from django.conf import settings
from django.core.management import call_command

from core import alive, broker
from core.processes import Child, Processes, end_like_ctrl_c_on_sigterm, refuse_taken_port, start

SECONDS_TO_COME_UP = 120.0
BETWEEN_LOOKS = 1.0

# fmt: off
WORKER = [
    sys.executable, "-m", "celery", "--app", "core.worker", "worker", "--beat",
    "--without-mingle", "--without-gossip", "--loglevel", "INFO",
]


def web_server(port: int) -> list[str]:
    """The command of the web server, which listens on this machine only."""
    return [
        sys.executable, "-m", "gunicorn", "core.wsgi", "--bind", f"127.0.0.1:{port}",
        "--workers", "2", "--threads", "4", "--timeout", "120", "--no-control-socket",
    ]
# fmt: on


@dataclass
class Site:
    """The running site."""

    address: str
    processes: Processes
    worker: Child
    worker_started: float

    def watch(self) -> None:
        """Stay until Ctrl-C or until a process ends (ProcessEnded); start a worker that hangs anew."""
        while True:
            self.processes.check()
            if self.worker_hangs():
                self.worker = self.processes.restart(self.worker, WORKER)
                self.worker_started = time.time()
            time.sleep(BETWEEN_LOOKS)

    def worker_hangs(self) -> bool:
        """Whether the worker got nothing done for so long that it must have lost its connection."""
        since_start = time.time() - self.worker_started
        silence = alive.silence()
        quiet = since_start if silence is None else min(silence, since_start)
        return quiet > settings.WORKER_SILENCE_SECONDS


@contextlib.contextmanager
def running_site(port: int) -> Iterator[Site]:
    """The site from migrated database to answering web server; all its processes end with the block.

    Raises UserError for a taken port, before anything is started, and where there is no Redis.
    """
    refuse_taken_port(port)
    end_like_ctrl_c_on_sigterm()
    call_command("migrate", verbosity=0, interactive=False)
    with Processes() as processes:
        found = broker.find_or_start()
        if found.child:
            processes.add(found.child)
        worker = processes.add(start("worker", WORKER))
        processes.add(start("web", web_server(port)))
        address = f"http://127.0.0.1:{port}/"
        processes.wait_until(
            lambda: _answers(f"{address}health"), seconds=SECONDS_TO_COME_UP, what="the web server"
        )
        yield Site(address, processes, worker, time.time())


def _answers(address: str) -> bool:
    try:
        with urllib.request.urlopen(address, timeout=5.0) as answer:  # noqa: S310 - our own address
            return bool(answer.status == 200)
    except (urllib.error.URLError, OSError):
        return False
