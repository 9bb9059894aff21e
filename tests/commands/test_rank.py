import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from django.core.management import call_command

from fits.engine import VERSION
from tests.commands.files import X, spectrum, write_curve, write_data

Output = pytest.CaptureFixture[str]


def ranked(capsys: Output, *arguments: str) -> dict[str, Any]:
    call_command("rank", *arguments, "--json=-")
    document: dict[str, Any] = json.loads(capsys.readouterr().out)
    return document


@pytest.fixture
def inputs(tmp_path: Path) -> list[str]:
    return [
        write_data(tmp_path),
        write_curve(tmp_path, "true"),
        write_curve(tmp_path, "lifted", offset=0.3),
    ]


def shape_of(value: Any) -> Any:
    """The names and types of a document, for comparing with what was agreed."""
    if isinstance(value, dict):
        return {key: shape_of(inner) for key, inner in value.items()}
    if isinstance(value, list):
        return [shape_of(value[0])] if value else []
    return type(value).__name__


def test_the_document_has_the_agreed_names(capsys: Output, inputs: list[str]) -> None:
    leftover = {"chi2": "float", "dof": "int", "p_value": "float"}
    by_level = {"0.9": "bool", "0.95": "bool"}
    expected = {
        "schema": "str",
        "engine": "str",
        "seed": "int",
        "draws": "int",
        "release": {
            "points": "int",
            "x_min": "float",
            "x_max": "float",
            "errors": "str",
            "sigma": "NoneType",
        },
        "fit": {
            "resolution": "int",
            "shrinkage": "str",
            "effective_parameters": "float",
            "risk": "float",
            "tau": "float",
            "x": ["float"],
            "y": ["float"],
        },
        "leftover": leftover,
        "radii": [{"level": "float", "published": "float", "calibrated": "float", "cautious": "float"}],
        "curves": [
            {
                "name": "str",
                "rank": "int",
                "order_settled": "bool",
                "distance": "float",
                "entry_level": {"published": "float", "calibrated": "float"},
                "p_value": "float",
                "p_value_error": "float",
                "leftover": leftover,
                "interpolation_error": "float",
                "scales": {
                    "p_value": "float",
                    "worst": {"functions": "int", "wider_than": "float", "p_value": "float"},
                },
                "inside": {
                    "published": by_level,
                    "calibrated": by_level,
                    "exact": by_level,
                    "scales": by_level,
                },
            }
        ],
        "notes": [],
    }
    document = ranked(capsys, *inputs, "--levels=0.9,0.95")
    assert shape_of(document) == expected
    assert (document["schema"], document["engine"]) == ("inradius/1", VERSION)


def test_the_nearer_curve_comes_first(capsys: Output, inputs: list[str]) -> None:
    document = ranked(capsys, *inputs)
    assert [(curve["rank"], curve["name"]) for curve in document["curves"]] == [(1, "true"), (2, "lifted")]
    assert [curve["inside"]["exact"]["0.95"] for curve in document["curves"]] == [True, False]


def test_the_same_command_writes_the_same_bytes(tmp_path: Path, inputs: list[str]) -> None:
    for name in ("first", "second"):
        call_command("rank", *inputs, f"--json={tmp_path / name}", stdout=open("/dev/null", "w"))  # noqa: SIM115, PTH123
    assert (tmp_path / "first").read_bytes() == (tmp_path / "second").read_bytes()


def test_another_seed_gives_other_draws(capsys: Output, inputs: list[str]) -> None:
    one, other = (ranked(capsys, *inputs, f"--seed={seed}") for seed in (1, 2))
    assert one["fit"] == other["fit"]
    assert one["radii"] != other["radii"]


def test_a_covariance_file_takes_the_place_of_the_error_column(
    tmp_path: Path, capsys: Output, inputs: list[str]
) -> None:
    np.save(tmp_path / "diagonal.npy", np.diag(np.full(X.size, 0.01)))
    given = ranked(capsys, *inputs)
    covariance = ranked(capsys, *inputs, f"--covariance={tmp_path / 'diagonal.npy'}")
    assert covariance["release"]["errors"] == "covariance"
    for one, other in zip(given["curves"], covariance["curves"], strict=True):
        assert one["distance"] == pytest.approx(other["distance"], rel=1e-9)


@pytest.mark.parametrize("option", ["--resolution=12", "--feature-width=0.5", "--full", "--shrinkage=nested"])
def test_each_choice_reaches_the_fit(capsys: Output, inputs: list[str], option: str) -> None:
    fit = ranked(capsys, *inputs, option)["fit"]
    expected = {
        "--resolution=12": ("resolution", 12),
        "--feature-width=0.5": ("resolution", 16),
        "--full": ("resolution", 40),
        "--shrinkage=nested": ("shrinkage", "nested"),
    }
    name, value = expected[option]
    assert fit[name] == value


def test_estimated_errors_tell_their_size(capsys: Output, inputs: list[str]) -> None:
    release = ranked(capsys, *inputs, "--errors=estimate")["release"]
    assert release["errors"] == "estimate"
    # The column of 0.1 is taken as relative: its size comes out near 1.
    assert release["sigma"] == pytest.approx(1.0, rel=0.5)


def test_counts_are_judged_on_their_transform(tmp_path: Path, capsys: Output) -> None:
    counts = np.random.default_rng(2).poisson(500 * spectrum(X))
    np.savetxt(tmp_path / "counts.csv", np.column_stack([X, counts]), header="x y", comments="")
    np.savetxt(tmp_path / "rate.csv", np.column_stack([X, 500 * spectrum(X)]), header="x y", comments="")
    arguments = [str(tmp_path / "counts.csv"), str(tmp_path / "rate.csv"), "--errors=counts"]
    document = ranked(capsys, *arguments)
    assert document["curves"][0]["inside"]["exact"]["0.99"]


def test_the_table_for_people_names_every_curve_and_level(capsys: Output, inputs: list[str]) -> None:
    call_command("rank", *inputs)
    text = capsys.readouterr().out
    for word in ("true", "lifted", "67 %", "90 %", "95 %", "99 %", "inside", "outside", "leftover χ²"):
        assert word in text


def test_the_page_stands_alone(tmp_path: Path, capsys: Output, inputs: list[str]) -> None:
    call_command("rank", *inputs, f"--page={tmp_path / 'page.html'}")
    page = (tmp_path / "page.html").read_text()
    assert "Of 2 theories" in page or "Of 2 curves" in page
    assert 'src="http' not in page
    assert 'href="/' not in page


def test_a_cautious_radius_changes_what_is_drawn_and_no_verdict(
    capsys: Output, inputs: list[str], tmp_path: Path
) -> None:
    page = tmp_path / "page.html"
    plain = ranked(capsys, *inputs)
    assert ranked(capsys, *inputs, "--cautious", f"--page={page}") == plain
    text = page.read_text(encoding="utf-8")
    assert "Rings are the cautious radii" in text
    assert "--cautious" in text
