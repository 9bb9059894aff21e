"""Hostile uploads, read in the limited child process."""

import gzip
import io
import resource
import time
import zipfile
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import psutil
import pytest

from core.measurements.reading import apart, limits
from core.measurements.reading.apart import read_covariance_apart, read_curve_apart, read_table_apart
from core.user_error import UserError

GIB = 1024**3


def zip_bomb() -> bytes:
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("lake.csv", b"0" * 30_000_000)
    return buffer.getvalue()


@pytest.fixture
def modest() -> Iterator[None]:
    """Neither this process nor its children grow past 1 GiB, and it is all over quickly."""
    start, before = time.monotonic(), psutil.Process().memory_info().rss
    yield
    assert time.monotonic() - start < 20
    assert resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss * 1024 < GIB
    assert psutil.Process().memory_info().rss - before < GIB // 4


@pytest.mark.usefixtures("modest")
@pytest.mark.parametrize(
    ("content", "code"),
    [
        (bytes(range(256)) * 100, "not-text"),
        (zip_bomb(), "not-text"),
        (gzip.compress(b"0" * 30_000_000), "not-text"),
        (b"1,2," * 11_500_000, "line-too-long"),
        (b"#" * 45_000_000, "line-too-long"),
        (b"\n" * 45_000_000, "too-many-rows"),
        (b"1" * (50 * 1024**2 + 1), "file-too-large"),
        (b"x,y\n1,=1+1\n", "not-a-number"),
    ],
    ids=["binary", "zip bomb", "gzip bomb", "one line", "one comment", "newlines", "oversize", "formula"],
)
def test_a_hostile_table_is_refused(content: bytes, code: str) -> None:
    with pytest.raises(UserError) as caught:
        read_table_apart(content, "../../etc/passwd")
    assert (caught.value.code, caught.value.file) == (code, "passwd")


@pytest.mark.usefixtures("modest")
def test_a_header_asking_for_32_gib_is_refused() -> None:
    header = io.BytesIO()
    np.lib.format.write_array_header_1_0(
        header, {"descr": "<f8", "fortran_order": False, "shape": (65536, 65536)}
    )
    with pytest.raises(UserError) as caught:
        read_covariance_apart(header.getvalue(), "errors.npy", 10)
    assert caught.value.code == "covariance-shape"


@pytest.mark.usefixtures("modest")
def test_a_long_table_is_read_within_the_limits() -> None:
    content = b"x,y,error\n" + b"1.25,-2.5e-3,0.125\n" * 1_000_000
    table = read_table_apart(content, "lake.csv")
    assert table.values.shape == (1_000_000, 3)
    assert table.values[-1].tolist() == [1.25, -2.5e-3, 0.125]
    assert table.lines[-1] == 1_000_001
    assert table.headers == ("x", "y", "error")


def test_a_fault_comes_back_with_its_place() -> None:
    with pytest.raises(UserError) as caught:
        read_table_apart(b"x,y\n1,2\n3,windy\n", "lake.csv")
    fault = caught.value
    assert (fault.code, fault.line, fault.column, fault.column_name) == ("not-a-number", 3, 2, "y")


def test_a_curve_comes_back_sorted_and_read_only() -> None:
    curve = read_curve_apart(b"2,20\n1,10\n", "flat.csv", "flat floor")
    assert (curve.name, curve.x.tolist(), curve.y.tolist()) == ("flat floor", [1, 2], [10, 20])
    assert not curve.x.flags.writeable


def test_a_covariance_is_checked_to_be_positive_definite() -> None:
    good = b"\n".join(b" ".join(b"2" if i == j else b"1" for j in range(8)) for i in range(8))
    assert read_covariance_apart(good, "errors.txt", 8).shape == (8, 8)
    with pytest.raises(UserError) as caught:
        read_covariance_apart(good.replace(b"2", b"0"), "errors.txt", 8)
    assert caught.value.code == "covariance-not-positive-definite"


def test_a_child_that_dies_leaves_a_refusal(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(apart, "CHILD", "core.measurements.reading.nowhere")
    with pytest.raises(UserError) as caught:
        read_table_apart(b"1,2\n", "lake.csv")
    assert (caught.value.code, caught.value.file) == ("unreadable", "lake.csv")


def test_a_child_that_takes_too_long_is_ended(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(apart, "CHILD_WALL_SECONDS", 0.01)
    with pytest.raises(UserError) as caught:
        read_table_apart(b"1,2\n", "lake.csv")
    assert caught.value.code == "unreadable"
    assert not [child for child in psutil.Process().children() if apart.CHILD in child.cmdline()]


def test_a_child_that_wants_more_memory_than_it_may_have_leaves_a_refusal(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    (tmp_path / "greedy.py").write_text(
        "from core.measurements.reading.child import set_limits\n"
        "set_limits()\n"
        f"bytearray({limits.CHILD_ADDRESS_SPACE})\n"
    )
    monkeypatch.setitem(apart.ENVIRONMENT, "PYTHONPATH", str(tmp_path))
    monkeypatch.setattr(apart, "CHILD", "greedy")
    with pytest.raises(UserError) as caught:
        read_table_apart(b"1,2\n", "lake.csv")
    assert caught.value.code == "unreadable"
