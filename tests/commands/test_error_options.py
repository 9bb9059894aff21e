"""Where errors come from, at the command line: what is printed, drawn and refused."""

from pathlib import Path

import numpy as np
import pytest
from django.core.management import call_command

from tests.commands.files import X, spectrum, write_curve, write_data, write_table
from tests.commands.test_bad_input import refusal, save

Output = pytest.CaptureFixture[str]
NOISE = np.random.default_rng(1).normal(0.0, 0.1, X.size)


@pytest.fixture
def plain(tmp_path: Path) -> str:
    """A table without errors."""
    return write_table(tmp_path / "plain.csv", "x,y", X, spectrum(X) + NOISE)


@pytest.fixture
def curve(tmp_path: Path) -> str:
    return write_curve(tmp_path, "true")


def test_every_estimate_of_the_error_size_is_printed(plain: str, curve: str, capsys: Output) -> None:
    call_command("rank", plain, curve, "--errors=estimate")
    lines = [line for line in capsys.readouterr().out.splitlines() if line.startswith("error size from")]
    assert [line.split(":")[0] for line in lines] == [
        "error size from leftover",
        "error size from first differences",
        "error size from second differences",
    ]
    assert all("±" in line for line in lines)
    assert [line.endswith("which is used") for line in lines] == [True, False, False]


def test_known_errors_print_no_estimate(tmp_path: Path, curve: str, capsys: Output) -> None:
    call_command("rank", write_data(tmp_path), curve)
    assert "error size" not in capsys.readouterr().out


def test_the_page_of_counts_says_on_which_scale_they_are_drawn(tmp_path: Path) -> None:
    counts = np.random.default_rng(1).poisson(50.0 * spectrum(X))
    data = write_table(tmp_path / "counts.csv", "x,y", X, counts)
    grid = np.linspace(0.4, 4.6, 300)
    expected = write_table(tmp_path / "expected.csv", "x,y", grid, 50.0 * spectrum(grid))
    page = tmp_path / "page.html"
    call_command("rank", data, expected, "--errors=counts", f"--page={page}", "--json=-")
    text = page.read_text()
    assert "drawn as 2√(v + 3/8)" in text
    assert "2√(v + 3/8), v: y" in text


def test_the_page_shows_the_estimates_and_the_calibration(plain: str, curve: str, tmp_path: Path) -> None:
    page = tmp_path / "page.html"
    call_command(
        "rank", plain, curve, "--errors=estimate", "--calibration=0.05", f"--page={page}", "--json=-"
    )
    text = page.read_text()
    assert "error size from second differences" in text
    assert "known to 5 %" in text


def test_a_page_names_windows_and_the_command_that_uses_them_again(
    tmp_path: Path, curve: str, capsys: Output
) -> None:
    windows = tmp_path / "slit.npy"
    windows.write_bytes(save(np.vstack([X, np.eye(X.size)])))
    page = tmp_path / "page.html"
    options = [f"--windows={windows}", "--calibration=0.05"]
    call_command("rank", write_data(tmp_path), curve, *options, f"--page={page}", "--json=-")
    text = page.read_text()
    assert "slit.npy" in text
    assert "--windows slit.npy" in text
    assert "--calibration 0.05" in text
    assert str(tmp_path) not in text


@pytest.mark.parametrize("text", ["5 %", "5", "1", "-0.1", "nan", "inf", "much"])
def test_a_calibration_that_is_no_fraction_is_refused_with_one_that_is(
    text: str, tmp_path: Path, curve: str, capsys: Output
) -> None:
    line = refusal(capsys, write_data(tmp_path), curve, f"--calibration={text}")
    assert "--calibration" in line
    assert "give 0.05 for 5 %" in line


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (["--errors=counts"], ("column 3 (error)", "the error column would be ignored")),
        (["--errors=profile"], ("column 3 (error)", "the error column would be ignored")),
        (["--errors=guessed"], ("--errors",)),
    ],
)
def test_an_error_column_that_would_be_ignored_is_refused(
    options: list[str], words: tuple[str, ...], tmp_path: Path, curve: str, capsys: Output
) -> None:
    line = refusal(capsys, write_data(tmp_path), curve, *options)
    assert [word for word in words if word not in line] == []


@pytest.mark.parametrize("source", ["counts", "profile"])
def test_a_covariance_that_would_be_ignored_is_refused_by_its_name(
    source: str, plain: str, curve: str, tmp_path: Path, capsys: Output
) -> None:
    path = tmp_path / "cov.npy"
    path.write_bytes(save(np.eye(X.size)))
    line = refusal(capsys, plain, curve, f"--errors={source}", f"--covariance={path}")
    assert line.startswith("cov.npy")
    assert "would be ignored" in line


def test_too_few_points_for_a_profile_are_refused(plain: str, curve: str, capsys: Output) -> None:
    assert "60 are needed" in refusal(capsys, plain, curve, "--errors=profile")


def test_too_few_points_for_an_estimate_are_refused(tmp_path: Path, curve: str, capsys: Output) -> None:
    short = write_table(tmp_path / "short.csv", "x,y", X[:18], NOISE[:18])
    assert "19 are needed" in refusal(capsys, short, curve, "--errors=estimate")


def test_counts_beside_a_shared_error_are_refused(tmp_path: Path, curve: str, capsys: Output) -> None:
    data = write_table(tmp_path / "shared.csv", "x,y,shared:gain", X, np.round(50.0 * spectrum(X)), X)
    line = refusal(capsys, data, curve, "--errors=counts")
    assert "column 3 (shared:gain)" in line
    assert "calibration" in line


def test_a_curve_that_expects_negative_counts_is_refused(tmp_path: Path, capsys: Output) -> None:
    data = write_table(tmp_path / "counts.csv", "x,y", X, np.round(50.0 * spectrum(X)))
    low = write_curve(tmp_path, "low", offset=-1.0)
    assert "Give counts from 0" in refusal(capsys, data, low, "--errors=counts")


@pytest.mark.parametrize(
    ("matrix", "words"),
    [
        (np.eye(X.size), ("40 × 40", "for 40 points")),
        (np.vstack([X[::-1], np.eye(X.size)]), ("column 2", "does not increase")),
        (np.vstack([X, np.diag(X > 1.0)]), ("point 1", "sees nothing")),
    ],
)
def test_bad_windows_are_refused_by_their_name(
    matrix: np.ndarray, words: tuple[str, ...], tmp_path: Path, curve: str, capsys: Output
) -> None:
    path = tmp_path / "slit.npy"
    path.write_bytes(save(matrix))
    line = refusal(capsys, write_data(tmp_path), curve, f"--windows={path}")
    assert line.startswith("slit.npy")
    assert [word for word in words if word not in line] == []


def test_bins_beside_windows_are_refused(tmp_path: Path, curve: str, capsys: Output) -> None:
    path = tmp_path / "slit.npy"
    path.write_bytes(save(np.vstack([X, np.eye(X.size)])))
    columns = (X - 0.01, X + 0.01, spectrum(X), np.full(X.size, 0.1))
    data = write_table(tmp_path / "bins.csv", "lo,hi,y,error", *columns)
    assert "bins as well" in refusal(capsys, data, curve, f"--windows={path}")
