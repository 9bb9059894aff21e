"""Each note stands where it is due, and nowhere else."""

from collections.abc import Sequence
from typing import Any

import numpy as np
import pytest

from fits.assessments.notes import Note, NoteCode, notes_on
from fits.engine.assess import assess
from fits.engine.data import CurveTable, ErrorSource, FloatArray, validated_curve, validated_data
from fits.engine.settings import Settings

X = np.linspace(0.5, 4.5, 200)
GRID = np.linspace(0.4, 4.6, 1200)
ERROR = 0.1


def smooth(x: FloatArray) -> FloatArray:
    return np.asarray(1.0 + np.exp(-((x - 2.0) ** 2)))


def noise(seed: int = 1) -> FloatArray:
    return np.random.default_rng(seed).normal(0.0, ERROR, X.size)


def notes(
    y: FloatArray,
    *curves: CurveTable,
    settings: Settings | None = None,
    x: FloatArray = X,
    source: str = "given",
    **errors: Any,
) -> Sequence[Note]:
    data = validated_data(x, y, source=ErrorSource(source), **errors)
    judged = curves or (validated_curve("true", GRID, smooth(GRID)),)
    settings = settings or Settings(draws=200)
    return notes_on(assess(data, judged, settings, rng=np.random.default_rng(1)))


def codes(*arguments: Any, **errors: Any) -> list[NoteCode]:
    return [note.code for note in notes(*arguments, **errors)]


def message(found: Sequence[Note], code: NoteCode) -> str:
    return next(note.message for note in found if note.code is code)


def errors_of(size: float) -> FloatArray:
    return np.full(X.size, size)


def test_honest_data_raise_no_note() -> None:
    assert codes(smooth(X) + noise(3), errors=errors_of(ERROR)) == []


def test_a_leftover_too_large_has_two_readings() -> None:
    found = notes(smooth(X) + noise(), errors=errors_of(0.07))
    said = message(found, NoteCode.LEFTOVER_LARGE)
    assert "structure narrower than 0.2 in x" in said
    assert "understated" in said


def test_a_leftover_too_small_has_two_readings() -> None:
    said = message(notes(smooth(X) + noise(), errors=errors_of(0.14)), NoteCode.LEFTOVER_SMALL)
    assert "overstated" in said
    assert "correlated" in said


def test_with_full_resolution_nothing_is_left_over() -> None:
    settings = Settings(full=True, draws=200)
    assert NoteCode.NO_LEFTOVER in codes(smooth(X) + noise(), errors=errors_of(ERROR), settings=settings)


def test_a_radius_of_0_is_named_by_level() -> None:
    said = message(notes(smooth(X) + 0.05 * noise(), errors=errors_of(1.0)), NoteCode.RADIUS_ZERO)
    assert "67 %, 90 %, 95 %, 99 % is 0" in said
    assert "about 1 % of repeats" in said


def test_fewer_independent_functions_are_said() -> None:
    x = np.repeat(np.linspace(0.5, 4.5, 10), 20)
    y = smooth(x) + noise()
    assert codes(y, x=x, errors=errors_of(ERROR)).count(NoteCode.RESOLUTION_REDUCED) == 1


def test_more_functions_than_points_are_said() -> None:
    settings = Settings(resolution=500, draws=200)
    found = codes(smooth(X) + noise(), errors=errors_of(ERROR), settings=settings)
    assert NoteCode.RESOLUTION_REDUCED in found


def test_estimated_errors_are_said() -> None:
    assert codes(smooth(X) + noise(3), source="estimate") == [NoteCode.ERRORS_ESTIMATED]


def test_estimates_that_disagree_are_listed_with_the_reading_of_a_large_leftover() -> None:
    wave = 0.3 * np.cos(2.0 * np.pi * X / 0.12)
    said = message(notes(smooth(X) + noise() + wave, source="estimate"), NoteCode.ESTIMATES_DISAGREE)
    assert "more than 20 %" in said
    assert said.count("±") == 3
    assert "structure finer than the resolution" in said


def test_estimates_that_disagree_have_another_reading_where_the_leftover_is_small() -> None:
    x = np.linspace(0.5, 4.5, 60)
    steep = 20.0 * np.sin(2.0 * x) + 0.1 * np.random.default_rng(2).standard_normal(60)
    curve = validated_curve("true", GRID, 20.0 * np.sin(2.0 * GRID))
    said = message(notes(steep, curve, x=x, source="estimate"), NoteCode.ESTIMATES_DISAGREE)
    assert "changes much from one point to the next" in said


def test_an_estimated_profile_is_said() -> None:
    said = message(notes(smooth(X) + noise(), source="profile"), NoteCode.PROFILE_ESTIMATED)
    assert "degrees of freedom" in said


def test_transformed_counts_are_said() -> None:
    counts = np.random.default_rng(1).poisson(40.0 * smooth(X)).astype(float)
    curve = validated_curve("true", GRID, 40.0 * smooth(GRID))
    assert codes(counts, curve, source="counts") == [NoteCode.COUNTS_TRANSFORMED]


def test_a_shared_error_larger_than_those_of_the_points_is_named() -> None:
    found = notes(smooth(X) + noise(), errors=errors_of(ERROR), shared={"level": errors_of(0.3)})
    assert "The shared error level" in message(found, NoteCode.SHARED_LARGER)
    assert "0.3 against 0.1" in message(found, NoteCode.SHARED_LARGER)


def test_a_small_shared_error_is_not() -> None:
    found = codes(smooth(X) + noise(), errors=errors_of(ERROR), shared={"level": errors_of(0.05)})
    assert NoteCode.SHARED_LARGER not in found


def test_a_rough_calibration_is_named_as_well() -> None:
    found = notes(smooth(X) + noise(), errors=errors_of(ERROR), calibration=0.2)
    assert "The calibration, known to 20 %" in message(found, NoteCode.SHARED_LARGER)


def test_many_curves_with_fine_structure_share_one_note() -> None:
    wave = np.cos(2.0 * np.pi * GRID / 0.1)
    curves = [
        validated_curve(name, GRID, smooth(GRID) + size * wave) for name, size in (("A", 0.05), ("B", 0.2))
    ]
    found = notes(smooth(X) + noise(), *curves, errors=errors_of(ERROR))
    assert [note.code for note in found].count(NoteCode.CURVE_FINER) == 1
    assert "A, 0." in message(found, NoteCode.CURVE_FINER)
    assert "B, 1." in message(found, NoteCode.CURVE_FINER)


def test_coarse_grids_share_one_note() -> None:
    coarse = np.linspace(0.4, 4.6, 9)
    curves = [validated_curve(name, coarse, smooth(coarse)) for name in ("A", "B")]
    found = notes(smooth(X) + noise(), *curves, errors=errors_of(ERROR))
    assert [note.code for note in found].count(NoteCode.GRID_COARSE) == 1


@pytest.mark.parametrize("code", list(NoteCode))
def test_a_code_can_stand_in_an_address(code: NoteCode) -> None:
    assert code.value.replace("-", "").isalpha()
