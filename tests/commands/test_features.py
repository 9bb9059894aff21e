import json
from pathlib import Path

import pytest
from django.core.management import call_command

from tests.commands.files import write_data

Output = pytest.CaptureFixture[str]


def test_the_document_has_the_agreed_names(tmp_path: Path, capsys: Output) -> None:
    call_command("features", write_data(tmp_path), "--windows=0.8:2.2,2.3:3.7", "--json=-")
    document = json.loads(capsys.readouterr().out)
    assert list(document) == ["schema", "radii", "peaks", "count", "spacing"]
    assert document["schema"] == "inradius/1"
    for peak in document["peaks"]:
        assert list(peak) == ["window", "profile", "location", "height", "no_peak"]
        assert list(peak["profile"]) == ["x", "price"]
        assert list(peak["location"]) == list(peak["height"]) == ["0.67", "0.9", "0.95", "0.99"]
        assert list(peak["no_peak"]) == ["price", "entry_level"]
    assert list(document["count"][0]) == ["at_most", "price_lower", "price_upper", "demanded_level"]
    assert [entry["at_most"] for entry in document["count"]] == list(range(len(document["count"])))


def test_the_words_for_people_bound_what_the_draws_cannot_tell(tmp_path: Path, capsys: Output) -> None:
    call_command("features", write_data(tmp_path), "--windows=0.8:2.2")
    text = capsys.readouterr().out
    assert "more than 0 peaks: demanded up to > 99.9 %" in text
    assert "peak between 0.8" in text
    assert "100.00 %" not in text


@pytest.mark.parametrize(
    ("windows", "word"),
    [
        ("2:1", "reversed"),
        ("1:9", "outside the data"),
        ("1:1.001", "grid points"),
        ("one:two", "not two numbers"),
        (",".join(["1:2"] * 51), "more than 50"),
    ],
)
def test_bad_windows_are_refused_in_one_line(tmp_path: Path, capsys: Output, windows: str, word: str) -> None:
    with pytest.raises(SystemExit) as end:
        call_command("features", write_data(tmp_path), f"--windows={windows}")
    assert end.value.code == 2
    lines = capsys.readouterr().err.strip().splitlines()
    assert len(lines) == 1
    assert word in lines[0]
