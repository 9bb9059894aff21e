"""Each refusal at the command line: exit code 2 and one line with file, line, column and reason."""

import io
import pickle
import zipfile
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from django.core.management import call_command

from tests.commands.files import X, spectrum, write_curve, write_data, write_table

Output = pytest.CaptureFixture[str]
GOOD = "\n".join(f"{x},{x},0.1" for x in range(10))


def refusal(capsys: Output, *arguments: str) -> str:
    with pytest.raises(SystemExit) as end:
        call_command("rank", *arguments)
    assert end.value.code == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    lines = captured.err.strip().splitlines()
    assert len(lines) == 1
    return lines[0]


def zipped() -> bytes:
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("data.csv", b"0" * 50_000_000)
    return buffer.getvalue()


def rows(line: int, text: str) -> str:
    lines = ["x,y,error", *GOOD.splitlines()]
    lines[line - 1] = text
    return "\n".join(lines)


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (rows(5, "3,abc,0.1"), ("line 5", "column 2 (y)", "not a number")),
        (rows(5, "3,nan,0.1"), ("line 5", "column 2 (y)", "not a number")),
        (rows(5, "3,inf,0.1"), ("line 5", "column 2 (y)", "infinite")),
        (rows(5, "3,=1+1,0.1"), ("line 5", "column 2 (y)", "not a number")),
        (rows(6, "4,1,0"), ("line 6", "column 3 (error)", "above 0")),
        (rows(6, "4,1,-2"), ("line 6", "column 3 (error)", "above 0")),
        (rows(4, "3,1"), ("line 4",)),
        ("x,y,error\n1,2,0.1\n2,3,0.1", ("2 points", "at least 8")),
        ("x,y,error\n" + "\n".join("1,2,0.1" for _ in range(9)), ("all x are equal",)),
        ("lo,hi,y,error\n" + "\n".join(f"{i},{i},1,1" for i in range(9)), ("line 2", "(lo)", "not below hi")),
        ("a,b,c\n" + GOOD, ("no column is marked",)),
        ("", ("holds no numbers",)),
        (b"\x00\x01\x02" * 100, ("data.csv",)),
        (zipped(), ("data.csv",)),
        ("1 " * 5_000_000, ("line 1",)),
        ("x;y;error\n" + "\n".join(f"{i};1,5;0,1" for i in range(9)), ("decimal point",)),
    ],
)
def test_a_bad_table_is_refused_in_one_line(
    tmp_path: Path, capsys: Output, content: str | bytes, words: tuple[str, ...]
) -> None:
    path = tmp_path / "data.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    line = refusal(capsys, str(path), write_curve(tmp_path, "curve"))
    assert line.startswith("data.csv")
    for word in words:
        assert word in line


def save(array: object) -> bytes:
    buffer = io.BytesIO()
    np.save(buffer, np.asarray(array), allow_pickle=False)
    return buffer.getvalue()


def announcing(shape: tuple[int, int]) -> bytes:
    header = io.BytesIO()
    description = {"descr": "<f8", "fortran_order": False, "shape": shape}
    np.lib.format.write_array_header_1_0(header, description)
    return header.getvalue()


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (lambda: save(np.eye(40) + 0.5 * np.eye(40, k=1)), ("not symmetric", "0.5")),
        (lambda: save(np.eye(40) - 0.2), ("not positive definite", "smallest eigenvalue is -7")),
        (lambda: save(np.eye(7)), ("7 × 7", "40 points")),
        (lambda: save(np.where(np.eye(40) > 0, np.nan, 0.0)), ("not a number",)),
        (lambda: announcing((65536, 65536)), ("cov.npy",)),
        (lambda: announcing((40, 40)), ("bytes of numbers",)),
        (lambda: pickle.dumps({"a": 1}), ("cov.npy",)),
    ],
)
def test_a_bad_covariance_is_refused_in_one_line(
    tmp_path: Path, capsys: Output, content: Callable[[], bytes], words: tuple[str, ...]
) -> None:
    path = tmp_path / "cov.npy"
    path.write_bytes(content())
    line = refusal(capsys, write_data(tmp_path), write_curve(tmp_path, "curve"), f"--covariance={path}")
    assert line.startswith("cov.npy")
    for word in words:
        assert word in line


def test_a_curve_that_does_not_reach_is_refused_with_the_missing_stretch(
    tmp_path: Path, capsys: Output
) -> None:
    short = write_table(tmp_path / "short.csv", "x,y", X[:30], spectrum(X[:30]))
    line = refusal(capsys, write_data(tmp_path), short)
    assert "curve short" in line
    assert "to 4.5 is missing" in line


def test_a_curve_that_repeats_an_x_is_refused_by_line(tmp_path: Path, capsys: Output) -> None:
    path = tmp_path / "twice.csv"
    path.write_text("x,y\n1,1\n2,2\n3,3\n2,5\n")
    line = refusal(capsys, write_data(tmp_path), str(path))
    assert line.startswith("twice.csv, line 5, column 1 (x)")


@pytest.mark.parametrize(
    ("arguments", "word"),
    [
        (["--levels=0.9,2"], "between 0 and 1"),
        (["--levels=high"], "--levels"),
        (["--resolution=2"], "at least 4"),
        (["--draws=1"], "between 100"),
        (["--seed=-1"], "--seed"),
        (["--shrinkage=ridge"], "--shrinkage"),
        (["--resolution=9", "--full"], "not allowed with"),
        (["--json=/no/such/folder/x.json"], "cannot be written"),
    ],
)
def test_a_bad_option_is_refused_in_one_line(
    tmp_path: Path, capsys: Output, arguments: list[str], word: str
) -> None:
    assert word in refusal(capsys, write_data(tmp_path), write_curve(tmp_path, "curve"), *arguments)


def test_a_missing_file_is_refused_by_its_last_name_only(tmp_path: Path, capsys: Output) -> None:
    line = refusal(capsys, "../../no/such/secret.csv", write_curve(tmp_path, "curve"))
    assert line.startswith("secret.csv: there is no such file")


def test_a_file_above_the_limit_is_refused_unread(tmp_path: Path, capsys: Output) -> None:
    path = tmp_path / "huge.csv"
    with path.open("wb") as stream:
        stream.truncate(100 * 1024 * 1024)
    assert "is larger than 50 MB" in refusal(capsys, str(path), write_curve(tmp_path, "curve"))
