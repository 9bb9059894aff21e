"""A release of a million rows through the page, with the web server and a worker as they run: time and memory."""

import sys
import threading
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import psutil
import pytest
from django.urls import reverse

from core import broker
from core.measurements.models import Measurement, Release
from core.measurements.reading.limits import MAXIMUM_ROWS
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.models import Assessment
from tests.conftest import power
from tests.real_processes import real_worker, wait_until_ready
from tests.real_web_server import Server, real_web_server
from tests.waiting import BETWEEN_LOOKS, wait_until

pytestmark = pytest.mark.django_db(transaction=True)

MEBIBYTE = 1024**2
WORKER_MEBIBYTES = 1536
WEB_MEBIBYTES = 1024
# Generous: other work may share the cores. On two free ones it takes 2 s and 30 s.
PREVIEW_SECONDS, WHOLE_SECONDS = 6.0, 60.0


class Watch:
    """The most memory that a process and those under it held at once, each by itself, in MiB."""

    def __init__(self, pid: int) -> None:
        self.process, self.largest = psutil.Process(pid), 0.0
        self._ended = threading.Event()
        self._thread = threading.Thread(target=self._look, daemon=True)
        self._thread.start()

    def _look(self) -> None:
        while not self._ended.wait(BETWEEN_LOOKS):
            for process in (self.process, *self.process.children(recursive=True)):
                try:
                    self.largest = max(self.largest, process.memory_info().rss / MEBIBYTE)
                except psutil.NoSuchProcess:
                    continue

    def end(self) -> float:
        """Stop watching."""
        self._ended.set()
        self._thread.join()
        return self.largest


@pytest.fixture
def worker(db: None, tmp_path: Path) -> Iterator[int]:
    """The process id of a worker that waits for work."""
    found = broker.find_or_start()
    log = tmp_path / "worker.log"
    with real_worker(log) as process:
        wait_until_ready(process, log)
        yield process.pid
    if found.child:
        found.child.end()


@pytest.fixture
def web(db: None, tmp_path: Path) -> Iterator[Server]:
    """A web server."""
    with real_web_server(tmp_path / "web.log", file_name="million.csv") as server:
        yield server


def processor_seconds(web: Server) -> float:
    """What the web server and the children that read its uploads have used of the cores."""
    return sum(sum(worker.cpu_times()[:4]) for worker in web.workers())


def million_rows() -> bytes:
    """x, y and error, as an instrument would write them."""
    rng = np.random.default_rng(5)
    x = np.linspace(0.5, 4.5, MAXIMUM_ROWS)
    y = power(x) + rng.normal(0.0, 0.5, x.size)
    rows = zip(x.tolist(), y.tolist(), strict=True)
    return ("x,y,error\n" + "".join(f"{a:.6f},{b:.6f},0.5\n" for a, b in rows)).encode()


def test_a_million_rows_are_previewed_published_and_assessed_in_time_and_in_bounds(
    web: Server,
    worker: int,
    measurement: Measurement,
    curve: Curve,
    lead: User,
    capsys: pytest.CaptureFixture[str],
) -> None:
    content = million_rows()
    # What a server does once, at its first upload, is none of this: each of its processes has had one.
    for _ in range(4):
        web.ask(reverse("measurements:upload", args=[measurement.pk]), lead, {"table": b"refused"})
    watches = {"web": Watch(web.process.pid), "worker": Watch(worker)}
    idle = processor_seconds(web)
    start = time.monotonic()
    sent = web.ask(reverse("measurements:upload", args=[measurement.pk]), lead, {"table": content})
    assert sent.status == 302, sent.page
    uploaded = time.monotonic()
    page = web.ask(sent.location, lead).page
    assert "1000000 points" in page
    previewed = time.monotonic()
    used = processor_seconds(web) - idle
    draft = Release.objects.get()
    assert web.ask(reverse("measurements:publish", args=[draft.pk]), lead, {}).status == 302
    published = time.monotonic()
    asked = web.ask(
        reverse("assessments:new", args=[draft.pk]),
        lead,
        {},
        curves=str(curve.pk),
        levels="67, 90, 95, 99",
        resolution_choice="default",
        shrinkage="monotone",
        radius="calibrated",
        draws="2000",
        seed="1",
    )
    assert asked.status == 302, asked.page
    wait_until(
        lambda: Assessment.objects.filter(status=Assessment.Status.DONE).exists(),
        seconds=WHOLE_SECONDS,
        what="the assessment is done",
    )
    assessed = time.monotonic()
    assert "inside" in web.ask(asked.location, lead).page
    shown = time.monotonic()
    largest = {name: watch.end() for name, watch in watches.items()}
    steps = {
        "upload": uploaded,
        "preview": previewed,
        "publish": published,
        "assess": assessed,
        "result": shown,
    }
    spent = np.diff([start, *steps.values()])
    told = [f"{name} {seconds:.2f} s" for name, seconds in zip(steps, spent, strict=True)]
    told.append(f"upload and preview on the processor {used:.2f} s")
    told += [f"{name} {size:.0f} MiB" for name, size in largest.items()]
    with capsys.disabled():
        sys.stdout.write(f"\na million rows, {len(content) / MEBIBYTE:.0f} MiB: {', '.join(told)}\n")
    assert previewed - start < PREVIEW_SECONDS
    assert shown - start < WHOLE_SECONDS
    assert largest["web"] < WEB_MEBIBYTES
    assert largest["worker"] < WORKER_MEBIBYTES
