"""Hostile uploads to the web server as it runs: refused with a reason, and the server goes on, of modest size."""

import io
import zipfile
from collections.abc import Callable, Iterator

import numpy as np
import pytest
import yaml
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.measurements.reading.limits import CHILD_WALL_SECONDS, MAXIMUM_ROWS
from core.people.models import User
from core.single_machine import web_server
from core.theories.models import Batch, Curve, Theory
from tests.real_processes import BASE_DIR
from tests.real_web_server import Server, real_web_server

pytestmark = pytest.mark.django_db(transaction=True)

GIB = 1024**3
MEGABYTE = 1024**2
GOOD = b"x,y,error\n" + b"".join(b"%d,%d,0.1\n" % (x, x * x) for x in range(1, 11))
# A name that would leave any folder, and that would ring a bell on a terminal.
NAME = "../../../etc/cron.d/tide\x07\x1b[2J.csv"
SHOWN_NAME = "tide[2J.csv"


@pytest.fixture(scope="module")
def server(django_db_setup: None, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Server]:
    """The web server, which is sent every file under NAME."""
    with real_web_server(tmp_path_factory.mktemp("web") / "web.log", file_name=NAME) as found:
        yield found


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


def hundred_thousand_files() -> bytes:
    """An archive of many empty files."""
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w") as archive:
        for number in range(100_000):
            archive.writestr(zipfile.ZipInfo(f"{number}.csv"), b"")
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
@pytest.mark.parametrize(
    ("content", "words"),
    [
        (npy_header((11, 2**29), "<f8"), "at most 20000 columns"),
        (npy_header((11, 20000), "<f8"), "announces 1760000 bytes of numbers and 0"),
        (pickled(), "holds Python objects, not numbers"),
        (zip_bomb(), "is not text"),
        (b"1 " * (20 * MEGABYTE), "a line may have"),
    ],
    ids=["header asking for 44 GiB", "header asking for more than follows", "pickle", "zip bomb", "one line"],
)
def test_hostile_windows_are_refused_on_the_page_and_nothing_is_kept(
    content: bytes, words: str, server: Server, measurement: Measurement, lead: User
) -> None:
    files = {"table": GOOD, "windows": content}
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
@pytest.mark.parametrize(
    ("make", "words"),
    [
        (zip_bomb, "holds more than the 50 MB allowed, unpacked"),
        (hundred_thousand_files, "holds more than the 500 curves allowed"),
        (lambda: b"PK\x03\x04" + bytes(range(256)) * 1000, "is no zip archive that can be read"),
    ],
    ids=["zip bomb", "100 000 files", "nonsense"],
)
def test_a_hostile_archive_of_curves_is_refused_on_the_page_and_nothing_is_kept(
    make: Callable[[], bytes], words: str, server: Server, measurement: Measurement, lead: User
) -> None:
    address = reverse("theories:new_batch", args=[measurement.pk])
    answer = server.ask(address, lead, {"table": make()})
    assert answer.status == 400
    told = facts(answer.page)
    assert words in told
    assert f"File{SHOWN_NAME}" in told
    assert not Batch.objects.exists()


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
