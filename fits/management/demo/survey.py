"""The survey of Lake Merrow: three releases drawn from the parabolic floor, and the four theories' curves."""

import io
from collections.abc import Callable, Iterable
from dataclasses import dataclass

import numpy as np

from fits.management.demo.lake import (
    FloatArray,
    Gauge,
    flat_floor,
    joined_basins,
    parabolic_floor,
    spectrum,
    triangular_floor,
)

FREQUENCIES = (0.4, 3.0)  # cycles per hour
NEIGHBOUR_CORRELATION = 0.4
CURVE_GRID = np.linspace(0.35, 3.05, 541)


@dataclass(frozen=True)
class TheoryInWords:
    """A theory as its group hands it in."""

    name: str
    proposed_by: str
    description: str
    reference: str


@dataclass(frozen=True)
class File:
    """A file as somebody would upload it."""

    name: str
    content: bytes


@dataclass(frozen=True)
class ReleaseFiles:
    """One release: the table, its covariance and a note."""

    note: str
    table: File
    covariance: File | None = None


@dataclass(frozen=True)
class SurveyStage:
    """How well the lake was known: points, and the error at 1 cycle per hour in mm²."""

    note: str
    points: int
    error: float
    seed: int


STAGES = (
    SurveyStage("One gauge, one summer (invented).", 120, 2.8, 1),
    SurveyStage("Four gauges, two summers (invented).", 160, 1.5, 2),
    SurveyStage("Twelve gauges, six summers (invented).", 240, 0.5, 3),
)

# The current in the narrows, measured once; and a winter of which nobody has seen the data yet.
CURRENT = SurveyStage("One current meter, one autumn (invented).", 140, 1.7, 6)
WINTER = SurveyStage("Sixteen gauges under the ice (invented).", 200, 0.8, 7)

Floor = Callable[[float], FloatArray]

FLOORS: tuple[tuple[Floor, TheoryInWords], ...] = (
    (
        flat_floor,
        TheoryInWords(
            "Flat floor",
            "Group A (made up)",
            "A basin of one depth: Merian's formula, seiches evenly spaced.",
            "J. R. Merian, 1828: f = n √(g h) / (2 L)",
        ),
    ),
    (
        parabolic_floor,
        TheoryInWords(
            "Parabolic floor",
            "Group B (made up)",
            "A floor that rises to both ends as a parabola: overtones go as √(n (n + 1)).",
            "G. Chrystal, 1905: f = √(n (n + 1) g h0) / (π L)",
        ),
    ),
    (
        triangular_floor,
        TheoryInWords(
            "Triangular floor",
            "Group C (made up)",
            "Two equal slopes that meet in the middle: overtones at the zeros of Bessel functions.",
            "Shallow-water waves on a slope, written out for this demo",
        ),
    ),
    (
        joined_basins,
        TheoryInWords(
            "Two joined basins",
            "Group D (made up)",
            "A deep and a shallow flat basin: level and flow agree where they meet.",
            "Shallow-water waves in two channels, written out for this demo",
        ),
    ),
)


def survey_release(stage: SurveyStage, number: int) -> ReleaseFiles:
    """A release of the surface's power, with errors that are correlated between neighbours."""
    x = np.linspace(*FREQUENCIES, stage.points)
    errors = stage.error * (0.5 + 0.5 * x)
    lag = np.abs(np.subtract.outer(np.arange(x.size), np.arange(x.size)))
    covariance = np.outer(errors, errors) * NEIGHBOUR_CORRELATION**lag
    noise = np.linalg.cholesky(covariance) @ _drawn(stage)
    table = text_table(
        "Lake Merrow, an invented lake: surface seiche power (mm²) against frequency (cycles per hour)",
        x=x,
        y=spectrum(x, parabolic_floor) + noise,
    )
    return ReleaseFiles(
        stage.note,
        File(f"merrow-release-{number}.csv", table),
        File(f"merrow-release-{number}-covariance.npy", npy(covariance)),
    )


def plain_release(stage: SurveyStage, name: str, gauge: Gauge, quantity: str) -> ReleaseFiles:
    """A release with an error for each point."""
    x = np.linspace(*FREQUENCIES, stage.points)
    errors = stage.error * (0.5 + 0.5 * x)
    table = text_table(
        f"Lake Merrow, an invented lake: {quantity} against frequency (cycles per hour)",
        x=x,
        y=spectrum(x, parabolic_floor, gauge) + errors * _drawn(stage),
        error=errors,
    )
    return ReleaseFiles(stage.note, File(f"{name}.csv", table))


def _drawn(stage: SurveyStage) -> FloatArray:
    """Noise that is drawn once, by its seed: the same bytes each time."""
    return np.random.default_rng(stage.seed).standard_normal(stage.points)


def floor_curve(floor: Floor, name: str) -> File:
    """A theory's curve on a grid of its own."""
    content = text_table(name, x=CURVE_GRID, y=spectrum(CURVE_GRID, floor))
    return File(f"{name.lower().replace(' ', '-')}.csv", content)


def table_of_curves(name: str, floors: Iterable[tuple[Floor, str]], gauge: Gauge) -> File:
    """Curves of several theories as one table, a column each."""
    columns = {theory: spectrum(CURVE_GRID, floor, gauge) for floor, theory in floors}
    return File(f"{name}.csv", text_table("Curves of several theories", x=CURVE_GRID, **columns))


def text_table(comment: str, **columns: FloatArray) -> bytes:
    """Columns as comma-separated text."""
    lines = [f"# {comment}", ",".join(columns)]
    lines += [",".join(f"{value:.6g}" for value in row) for row in zip(*columns.values(), strict=True)]
    return ("\n".join(lines) + "\n").encode()


def npy(array: FloatArray) -> bytes:
    """An array as a .npy file."""
    buffer = io.BytesIO()
    np.save(buffer, array, allow_pickle=False)
    return buffer.getvalue()
