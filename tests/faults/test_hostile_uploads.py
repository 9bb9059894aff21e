"""Hostile uploads to the web server as it runs: refused with a reason, and the server goes on, of modest size."""

import html
import io
import secrets
import subprocess
import urllib.error
import urllib.request
import zipfile
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import psutil
import pytest
import yaml
from django.conf import settings
from django.test import Client
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.measurements.reading.limits import CHILD_WALL_SECONDS, MAXIMUM_ROWS
from core.people.models import User
from core.single_machine import web_server
from core.theories.models import Curve, Theory
from tests.real_processes import BASE_DIR, database_url, free_port, kill_group
from tests.waiting import wait_until

pytestmark = pytest.mark.django_db(transaction=True)

GIB = 1024**3
MEGABYTE = 1024**2
GOOD = b"x,y,error\n" + b"".join(b"%d,%d,0.1\n" % (x, x * x) for x in range(1, 11))
# A name that would leave any folder, and that would ring a bell on a terminal.
NAME = "../../../etc/cron.d/tide\x07\x1b[2J.csv"
SHOWN_NAME = "tide[2J.csv"


@dataclass(frozen=True)
class Answer:
    """Status and page, as text."""

    status: int
    page: str


class NoRedirect(urllib.request.HTTPRedirectHandler):
    """Leaves a redirect as the answer that it is."""

    def redirect_request(self, *arguments: object, **more: object) -> None:
        return None


@dataclass(frozen=True)
class Server:
    """The running web server."""

    process: subprocess.Popen[bytes]
    address: str

    def ask(
        self, path: str, user: User | None = None, files: dict[str, bytes] | None = None, **fields: str
    ) -> Answer:
        """Get a page, or post a form with files under a hostile name, signed in as the user."""
        headers, body = {}, None
        token = secrets.token_hex(16)
        cookies = [f"{settings.CSRF_COOKIE_NAME}={token}"]
        if user is not None:
            client = Client()
            client.force_login(user)
            cookies.append(
                f"{settings.SESSION_COOKIE_NAME}={client.cookies[settings.SESSION_COOKIE_NAME].value}"
            )
        if files is not None:
            headers["Content-Type"] = "multipart/form-data; boundary=edge"
            body = multipart({"csrfmiddlewaretoken": token, **fields}, files)
        headers["Cookie"] = "; ".join(cookies)
        request = urllib.request.Request(self.address + path, body, headers)
        try:
            with urllib.request.build_opener(NoRedirect).open(request, timeout=60.0) as answer:
                return Answer(answer.status, html.unescape(answer.read().decode()))
        except urllib.error.HTTPError as error:
            return Answer(error.code, html.unescape(error.read().decode()))

    def is_up(self) -> bool:
        """Whether it answers."""
        assert self.process.poll() is None
        try:
            return self.ask("/accounts/login/").status == 200
        except urllib.error.URLError:
            return False

    def workers(self) -> list[psutil.Process]:
        """The processes that answer."""
        return psutil.Process(self.process.pid).children()

    def largest(self) -> int:
        """The most memory that any process of it ever held, in bytes."""
        pids = [self.process.pid, *(worker.pid for worker in self.workers())]
        status = [Path(f"/proc/{pid}/status").read_text() for pid in pids]
        peaks = [text.split("VmHWM:")[1].split()[0] for text in status]
        return max(int(peak) for peak in peaks) * 1024


def multipart(fields: dict[str, str], files: dict[str, bytes]) -> bytes:
    """A form as it goes over the wire, with NAME as the name of each file."""
    parts = [
        f'--edge\r\nContent-Disposition: form-data; name="{name}"\r\n\r\n{value}\r\n'.encode()
        for name, value in fields.items()
    ]
    for name, content in files.items():
        disposition = f'form-data; name="{name}"; filename="{NAME}"'
        head = f"--edge\r\nContent-Disposition: {disposition}\r\nContent-Type: text/csv\r\n\r\n"
        parts += [head.encode(), content, b"\r\n"]
    return b"".join([*parts, b"--edge--\r\n"])


@pytest.fixture(scope="module")
def server(django_db_setup: None, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Server]:
    """The web server with the command that `serve` gives it, on the tests' database."""
    port = free_port()
    log = tmp_path_factory.mktemp("web") / "web.log"
    with log.open("wb") as out, pytest.MonkeyPatch.context() as patch:
        patch.setenv("DATABASE_URL", database_url())
        process = subprocess.Popen(
            web_server(port), cwd=BASE_DIR, stdout=out, stderr=subprocess.STDOUT, start_new_session=True
        )
    found = Server(process, f"http://127.0.0.1:{port}")
    try:
        wait_until(found.is_up, seconds=60.0, what="the web server answers")
        yield found
    finally:
        kill_group(process)


@pytest.fixture
def unharmed(server: Server, lead: User) -> Iterator[None]:
    """The same processes as before answer the next request, and none ever grew past 1 GiB."""
    before = {worker.pid for worker in server.workers()}
    yield
    assert server.ask("/", lead).status == 200
    assert {worker.pid for worker in server.workers()} == before
    assert server.largest() < GIB


def npy_header(shape: tuple[int, ...], dtype: str) -> bytes:
    """The start of a .npy file that announces an array, without the array."""
    buffer = io.BytesIO()
    np.lib.format.write_array_header_1_0(buffer, {"shape": shape, "fortran_order": False, "descr": dtype})
    return buffer.getvalue()


def pickled() -> bytes:
    """An array of Python objects, which NumPy keeps as a pickle."""
    buffer = io.BytesIO()
    np.save(buffer, np.array([[print] * 10] * 10, dtype=object), allow_pickle=True)
    return buffer.getvalue()


def zip_bomb() -> bytes:
    """A small archive of a large file."""
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("lake.csv", b"0" * (100 * MEGABYTE))
    return buffer.getvalue()


def formula() -> bytes:
    """A table that a spreadsheet would compute."""
    return GOOD + b'11,"=HYPERLINK(""http://elsewhere.example"")",0.1\n'


TABLES: dict[str, tuple[Callable[[], bytes], list[str]]] = {
    "binary": (lambda: bytes(range(256)) * 1000, ["is not text", "Line1"]),
    "zip bomb": (zip_bomb, ["is not text", "Line1"]),
    "one line of 45 MB": (lambda: b"1," * (45 * MEGABYTE // 2), ["a line may have", "Line1"]),
    "formula": (formula, ["=HYPERLINK", "is not a number", "Line12", "Column2 (y)"]),
}
COVARIANCES = {
    "header asking for 32 GiB": (npy_header((65536, 65536), "<f8"), "has shape 65536 × 65536 for 10 points"),
    "header asking for more than follows": (
        npy_header((10, 10), "<f8"),
        "announces 800 bytes of numbers and 0",
    ),
    "pickle": (pickled(), "holds Python objects, not numbers"),
    "nonsense": (b"\x93NUMPY\x01\x00\xff\xff" + b"{" * 70_000, "its header is broken"),
}


def facts(page: str) -> str:
    """The refusal on the page, without tags."""
    start = page.index("data-faults")
    text = page[start : page.index("</div>", start)]
    return "".join(piece.split(">", 1)[-1] for piece in text.split("<"))


@pytest.mark.usefixtures("unharmed")
@pytest.mark.parametrize("kind", TABLES)
def test_a_hostile_table_is_refused_on_the_page_and_nothing_is_kept(
    kind: str, server: Server, measurement: Measurement, lead: User
) -> None:
    make, words = TABLES[kind]
    answer = server.ask(reverse("measurements:upload", args=[measurement.pk]), lead, {"table": make()})
    assert answer.status == 400
    told = facts(answer.page)
    assert [word for word in [*words, f"File{SHOWN_NAME}"] if word not in told] == [], told
    assert not Release.objects.exists()


@pytest.mark.usefixtures("unharmed")
@pytest.mark.parametrize("kind", COVARIANCES)
def test_a_hostile_covariance_is_refused_on_the_page_and_nothing_is_kept(
    kind: str, server: Server, measurement: Measurement, lead: User
) -> None:
    content, words = COVARIANCES[kind]
    files = {"table": GOOD, "covariance": content}
    answer = server.ask(reverse("measurements:upload", args=[measurement.pk]), lead, files)
    assert answer.status == 400
    told = facts(answer.page)
    assert words in told
    assert f"File{SHOWN_NAME}" in told
    assert not Release.objects.exists()


@pytest.mark.usefixtures("unharmed")
def test_a_file_over_the_limit_is_refused_before_it_is_read(
    server: Server, measurement: Measurement, lead: User
) -> None:
    content = b"1,2,3\n" * (10 * MEGABYTE)
    answer = server.ask(reverse("measurements:upload", args=[measurement.pk]), lead, {"table": content})
    assert answer.status == 400
    assert "The file is larger than 50 MB" in facts(answer.page)
    assert not Release.objects.exists()


@pytest.mark.usefixtures("unharmed")
def test_a_hostile_curve_is_refused_on_the_page_and_nothing_is_kept(
    server: Server, theory: Theory, measurement: Measurement, lead: User
) -> None:
    address = reverse("theories:new_curve", args=[theory.pk])
    answer = server.ask(address, lead, {"table": zip_bomb()}, measurement=str(measurement.pk))
    assert answer.status == 400
    assert "is not text" in facts(answer.page)
    assert not Curve.objects.exists()


@pytest.mark.usefixtures("unharmed")
def test_of_a_hostile_file_name_only_the_last_part_is_kept(
    server: Server, measurement: Measurement, lead: User
) -> None:
    answer = server.ask(reverse("measurements:upload", args=[measurement.pk]), lead, {"table": GOOD})
    assert answer.status == 302
    assert Release.objects.get().file_name == SHOWN_NAME


@pytest.mark.usefixtures("unharmed")
def test_a_table_as_large_as_any_may_be_is_read_and_shown(
    server: Server, measurement: Measurement, lead: User
) -> None:
    x = np.arange(MAXIMUM_ROWS) / 1000.0
    rows = "".join(f"{value:.3f},{value % 7.0:.15f},0.123456789012345678\n" for value in x.tolist())
    table = f"x,y,error\n{rows}".encode()
    assert 40 * MEGABYTE < len(table) < 50 * MEGABYTE
    answer = server.ask(reverse("measurements:upload", args=[measurement.pk]), lead, {"table": table})
    assert answer.status == 302
    draft = Release.objects.get()
    assert draft.points == MAXIMUM_ROWS
    assert "1000000 points" in server.ask(draft.get_absolute_url(), lead).page


def test_the_web_server_waits_longer_than_a_reading_may_take() -> None:
    services = yaml.safe_load((BASE_DIR / "docker" / "compose.yaml").read_text())["services"]
    for command in (web_server(8000), services["web"]["command"]):
        assert float(command[command.index("--timeout") + 1]) > CHILD_WALL_SECONDS
