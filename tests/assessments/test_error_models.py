"""Each way in which errors can be given, by the command and through the pages: the same numbers."""

import io
import json
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.core.management import call_command
from django.test import Client
from django.urls import reverse
from numpy.typing import NDArray

from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Theory
from core.theories.services import draft_curve, submit_curve
from fits.assessments.pipeline import compute
from fits.assessments.services import request_assessment
from fits.engine.counts import mean_stabilised
from tests.assessments.conftest import SETTINGS
from tests.conftest import npy, power

Array = NDArray[np.float64]
POINTS = 80
X = np.linspace(0.5, 4.5, POINTS)
GRID = np.linspace(0.4, 4.6, 300)
RNG = np.random.default_rng(11)
NOISE = RNG.normal(0.0, 1.0, POINTS)
ERROR = np.full(POINTS, 0.1)
HALF = (X[1] - X[0]) / 2.0
DISTANCE = np.abs(np.subtract.outer(np.arange(POINTS), np.arange(POINTS)))
WINDOWS = np.exp(-0.5 * ((X[:, None] - GRID[None, :]) / 0.05) ** 2)
WINDOWS /= WINDOWS.sum(axis=1, keepdims=True)


@dataclass(frozen=True, eq=False)
class Case:
    """Columns of the table, what is said of the errors by page and by command, files beside the table."""

    columns: Mapping[str, Array]
    word: str
    said: str = "column"
    options: tuple[str, ...] = ()
    percent: str = ""
    files: Mapping[str, bytes] = field(default_factory=dict)
    scale: float = 1.0

    @property
    def table(self) -> bytes:
        """The file."""
        rows = zip(*(column.tolist() for column in self.columns.values()), strict=True)
        lines = [",".join(self.columns), *(",".join(map(repr, row)) for row in rows)]
        return "\n".join(lines).encode()

    @property
    def curve(self) -> bytes:
        """The truth, on a grid of its own."""
        pairs = zip(GRID.tolist(), (self.scale * power(GRID)).tolist(), strict=True)
        return ("x,y\n" + "".join(f"{x!r},{y!r}\n" for x, y in pairs)).encode()


def text(matrix: Array) -> bytes:
    buffer = io.StringIO()
    np.savetxt(buffer, matrix)
    return buffer.getvalue().encode()


PLAIN = {"x": X, "y": power(X) + 0.1 * NOISE}
GIVEN = PLAIN | {"error": ERROR}
COUNTS = {"x": X, "y": RNG.poisson(50.0 * power(X)).astype(float)}
CASES = {
    "given": Case(GIVEN, "given"),
    "covariance": Case(PLAIN, "covariance", "covariance", files={"covariance": npy(0.01 * 0.4**DISTANCE)}),
    "covariance of unknown scale": Case(
        PLAIN, "estimate", "relative", ("--errors=estimate",), files={"covariance": npy(0.4**DISTANCE)}
    ),
    "one unknown size": Case(PLAIN, "estimate", "one-size", ("--errors=estimate",)),
    "relative": Case(
        PLAIN | {"y": power(X) + 0.05 * X * NOISE, "error": X}, "estimate", "relative", ("--errors=estimate",)
    ),
    "counts": Case(COUNTS, "counts", "counts", ("--errors=counts",), scale=50.0),
    "profile": Case(
        {"x": X, "y": power(X) + 0.03 * np.exp(0.5 * X) * NOISE}, "profile", "profile", ("--errors=profile",)
    ),
    "shared": Case(GIVEN | {"shared:baseline": 0.2 * ERROR}, "given"),
    "one unknown size beside a shared error": Case(
        PLAIN | {"shared:baseline": 0.2 * ERROR}, "estimate", "one-size", ("--errors=estimate",)
    ),
    "calibration": Case(GIVEN, "given", options=("--calibration=0.05",), percent="5"),
    "counts with a calibration": Case(
        COUNTS, "counts", "counts", ("--errors=counts", "--calibration=0.05"), "5", scale=50.0
    ),
    "bins": Case({"lo": X - HALF, "hi": X + HALF, "y": PLAIN["y"], "error": ERROR}, "given"),
    "windows": Case(
        GIVEN | {"y": WINDOWS @ power(GRID) + 0.1 * NOISE},
        "given",
        files={"windows": npy(np.vstack([GRID, WINDOWS]))},
    ),
    "windows as text": Case(
        GIVEN | {"y": WINDOWS @ power(GRID) + 0.1 * NOISE},
        "given",
        files={"windows": text(np.vstack([GRID, WINDOWS]))},
    ),
}


def by_command(case: Case, folder: Path, capsys: pytest.CaptureFixture[str]) -> dict[str, Any]:
    """What `rank` finds, seed 1."""
    paths = {name: folder / f"{name}.dat" for name in ("data", "truth", *case.files)}
    for name, content in {"data": case.table, "truth": case.curve, **case.files}.items():
        paths[name].write_bytes(content)
    beside = [f"--{name}={paths[name]}" for name in case.files]
    call_command("rank", str(paths["data"]), str(paths["truth"]), *beside, *case.options, "--json=-")
    found: dict[str, Any] = json.loads(capsys.readouterr().out)
    return found


def by_page(case: Case, client: Client, measurement: Measurement) -> Release:
    """The release that the pages make of it."""
    files = {"table": case.table, **case.files}
    answer = client.post(
        reverse("measurements:upload", args=[measurement.pk]),
        {
            "errors_from": case.said,
            "scale_percent": case.percent,
            **{name: SimpleUploadedFile(f"{name}.dat", content) for name, content in files.items()},
        },
    )
    assert answer.status_code == 302, answer.content.decode()
    draft = Release.objects.select_related("measurement").get()
    assert client.get(draft.get_absolute_url()).status_code == 200
    assert client.post(reverse("measurements:publish", args=[draft.pk])).status_code == 302
    draft.refresh_from_db()
    assert draft.state == Release.State.PUBLISHED
    return draft


@pytest.mark.parametrize("name", CASES)
def test_command_and_page_find_the_same(
    name: str,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    measurement: Measurement,
    theory: Theory,
    lead: User,
    signed_in: Callable[[User], Client],
) -> None:
    case = CASES[name]
    release = by_page(case, signed_in(lead), measurement)
    theory.name = "truth"
    theory.save()
    draft = draft_curve(
        user=lead, theory=theory, measurement=measurement, content=case.curve, file_name="truth.dat"
    )
    curve = submit_curve(draft)
    assessment = request_assessment(user=lead, release=release, curves=[curve], settings=SETTINGS, seed=1)
    outcome = compute(assessment, lambda stage, fraction: None)
    found = by_command(case, tmp_path, capsys)
    assert json.loads(json.dumps(outcome.result)) == found
    assert found["release"]["errors"] == case.word
    assert found["curves"][0]["inside"]["exact"]["0.99"]
    assert outcome.detail["data"]["scale"] == ("stabilised counts" if case.word == "counts" else "given")
    assert bool(outcome.detail["error_sizes"]) is (found["release"]["sigma"] is not None)


def test_curves_are_drawn_on_the_scale_of_stabilised_counts(
    measurement: Measurement, theory: Theory, lead: User, signed_in: Callable[[User], Client]
) -> None:
    case = CASES["counts"]
    release = by_page(case, signed_in(lead), measurement)
    draft = draft_curve(
        user=lead, theory=theory, measurement=measurement, content=case.curve, file_name="truth.dat"
    )
    curve = submit_curve(draft)
    assessment = request_assessment(user=lead, release=release, curves=[curve], settings=SETTINGS, seed=1)
    detail = compute(assessment, lambda stage, fraction: None).detail
    drawn = detail["curves"][0]["on_grid"]
    expected = mean_stabilised(50.0 * power(np.array(drawn["x"])))
    assert drawn["y"] == pytest.approx(expected, rel=1e-4)
    assert detail["data"]["y"] == pytest.approx(2.0 * np.sqrt(COUNTS["y"] + 0.375))
    assert detail["data"]["error"] == pytest.approx(np.ones(POINTS))


@pytest.mark.parametrize("change", ["error_source", "calibration", "windows_sha256"])
def test_what_is_said_of_the_errors_is_part_of_the_fingerprint(
    change: str, release: Release, curve: Any, lead: User
) -> None:
    first = request_assessment(user=lead, release=release, curves=[curve], settings=SETTINGS, seed=1)
    setattr(release, change, {"error_source": "estimate", "calibration": 0.1}.get(change, "other"))
    second = request_assessment(user=lead, release=release, curves=[curve], settings=SETTINGS, seed=1)
    assert first.fingerprint != second.fingerprint
