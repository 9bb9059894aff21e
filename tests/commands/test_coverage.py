"""The command that simulates how often the sets hold the truth, and the table of this version."""

import io
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from django.core.management import call_command

from fits.engine import VERSION
from fits.management.progress_bar import ProgressBar

Output = pytest.CaptureFixture[str]
FEW = ("--repeats", "5", "--draws", "100", "--points", "50", "--processes", "1")


def simulated(capsys: Output, *arguments: str) -> dict[str, Any]:
    call_command("coverage", *arguments, "--json=-")
    document: dict[str, Any] = json.loads(capsys.readouterr().out)
    return document


def test_the_document_has_shares_and_errors_for_each_set_and_level(capsys: Output) -> None:
    found = simulated(capsys, *FEW, "--errors", "estimated")
    assert found["schema"] == "inradius-coverage/1"
    assert (found["engine"], found["seed"], found["repeats"], found["draws"]) == (VERSION, 1, 5, 100)
    assert found["levels"] == [0.67, 0.9, 0.95, 0.99]
    assert [(cell["truth"], cell["resolved"]) for cell in found["cells"]] == [
        ("three peaks", True),
        ("step", True),
        ("chirp", True),
        ("low ripple", True),
        ("zero", True),
        ("one narrow peak", True),
        ("step", False),
        ("one narrow peak", False),
    ]
    sets = ["published", "calibrated", "cautious", "exact", "scales"]
    for cell in found["cells"]:
        assert list(cell["held"]) == list(cell["held_error"]) == sets
        for name in sets:
            for share, error in zip(cell["held"][name], cell["held_error"][name], strict=True):
                assert error == pytest.approx((share * (1 - share) / 5) ** 0.5, abs=1e-4)
    rejected = found["cells"][0]["rejected"]
    assert len(rejected) == 8
    assert list(rejected["offset"]) == sets
    assert all("rejected" not in cell for cell in found["cells"][1:])


def test_the_numbers_do_not_hang_on_how_many_processes_share_the_work(capsys: Output) -> None:
    chosen = ("--errors", "known", "--truth", "zero", "step")
    alone = simulated(capsys, *FEW, *chosen)
    assert simulated(capsys, *FEW[:-1], "2", *chosen) == alone


def test_a_setting_has_the_same_numbers_alone_and_among_others_and_others_with_another_seed(
    capsys: Output,
) -> None:
    among = simulated(capsys, *FEW, "--errors", "known")["cells"]
    alone = simulated(capsys, *FEW, "--errors", "known", "--truth", "chirp")["cells"]
    assert alone == [cell for cell in among if cell["truth"] == "chirp"]
    other = simulated(capsys, *FEW, "--errors", "known", "--truth", "chirp", "--seed", "2")["cells"]
    assert other != alone


def test_people_get_a_table_for_each_level_and_one_of_rejections(capsys: Output, tmp_path: Path) -> None:
    written = tmp_path / "coverage.json"
    call_command("coverage", *FEW, "--errors", "known", f"--json={written}")
    said = capsys.readouterr()
    for words in (
        "67 % sets",
        "99 % sets",
        "simulation error",
        "rejected a wrong curve",
        "extra narrow peak",
    ):
        assert words in said.out
    assert said.err == ""
    assert len(json.loads(written.read_text())["cells"]) == 6
    # A line for each setting, so that two versions can be compared.
    assert len(written.read_text().splitlines()) == 8


@pytest.mark.parametrize("option", ["--repeats=0", "--processes=0", "--seed=-1", "--draws=5", "--truth=cube"])
def test_what_cannot_be_is_refused_in_one_line(option: str, capsys: Output) -> None:
    with pytest.raises(SystemExit) as end:
        call_command("coverage", option)
    assert end.value.code == 2
    assert len(capsys.readouterr().err.strip().splitlines()) == 1


class Terminal(io.StringIO):
    """A stream that says it is a terminal."""

    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize(("stream", "is_shown"), [(Terminal, True), (io.StringIO, False)])
def test_a_progress_bar_is_for_terminals_only(stream: Callable[[], io.StringIO], is_shown: bool) -> None:
    out = stream()
    bar = ProgressBar(out, total=2, of="settings")
    bar.advance()
    bar.close()
    assert ("1 of 2 settings" in out.getvalue()) is is_shown
    assert bool(out.getvalue()) is is_shown


def test_breaking_off_ends_in_one_line_and_writes_nothing(
    capsys: Output, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def break_off(*args: object, **options: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("fits.management.in_parallel.threadpool_limits", break_off)
    with pytest.raises(SystemExit) as end:
        call_command("coverage", *FEW, f"--json={tmp_path / 'coverage.json'}")
    assert end.value.code == 130
    assert len(capsys.readouterr().err.strip().splitlines()) == 1
    assert not list(tmp_path.iterdir())
