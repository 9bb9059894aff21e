"""What `coverage` found: as JSON, one setting a line, and as tables for people."""

import json
from collections.abc import Sequence
from typing import Any

import numpy as np

from fits.engine import VERSION
from fits.engine.coverage.cells import Cell
from fits.engine.coverage.curves import STATED_FOR_POINTS, WRONG_IN_WORDS, WrongCurve
from fits.engine.coverage.repeats import CellCoverage, ConfidenceSet, simulation_error
from fits.engine.settings import Settings
from fits.management.text_table import aligned

SCHEMA = "inradius-coverage/1"
SHORTFALL_IN_ERRORS = 3.0
REJECTION_LEVEL = 0.95

NOTES = (
    "The truth is what the J functions hold of a curve: that is what is judged. In settings marked unresolved the data "
    "have finer structure as well, which an estimate of the errors takes for error: the sets come out too large, "
    "not too small. They stand below the others and count in no average.",
    f"Wrong curves are wrong about the three peaks. Sizes, for {STATED_FOR_POINTS} points; they go with 1/√n, so that "
    "the misfit is about 12 in χ² at every n: "
    + "; ".join(f"{kind.value}: {words}" for kind, words in WRONG_IN_WORDS.items())
    + ".",
    "Default resolution, monotone shrinkage, errors of 1. Estimated: σ from the leftover. Correlated: 0.5 to the power "
    "of the distance in points, known.",
)


def coverage_document(found: Sequence[CellCoverage], *, seed: int, settings: Settings) -> dict[str, Any]:
    """Shares and their simulation errors; lists run over the levels."""
    return {
        "schema": SCHEMA,
        "engine": VERSION,
        "seed": seed,
        "repeats": found[0].repeats,
        "draws": settings.draws,
        "levels": list(settings.levels),
        "notes": list(NOTES),
        "cells": [_cell(cell) for cell in found],
    }


def coverage_json(document: dict[str, Any]) -> str:
    """The document with a line for each setting, so that versions of it can be compared."""
    head = json.dumps({key: value for key, value in document.items() if key != "cells"}, ensure_ascii=False)
    lines = ",\n".join(
        json.dumps(cell, ensure_ascii=False, separators=(",", ":")) for cell in document["cells"]
    )
    return f'{head[:-1]}, "cells": [\n{lines}\n]}}\n'


def _cell(found: CellCoverage) -> dict[str, Any]:
    cell = found.cell
    document: dict[str, Any] = {
        "errors": cell.errors.value,
        "points": cell.points,
        "truth": cell.truth.value,
        "resolved": cell.resolved,
        "held": {kind.value: _rounded(row) for kind, row in zip(ConfidenceSet, found.shares, strict=True)},
        "held_error": {
            kind.value: _errors(row, found.repeats)
            for kind, row in zip(ConfidenceSet, found.shares, strict=True)
        },
    }
    if cell.has_wrong_curves:
        document["rejected"] = {
            wrong.value: {kind.value: _rounded(row) for kind, row in zip(ConfidenceSet, rows, strict=True)}
            for wrong, rows in zip(WrongCurve, found.rejections, strict=True)
        }
    return document


def _rounded(shares: Any) -> list[float]:
    return [round(float(share), 4) for share in shares]


def _errors(shares: Any, repeats: int) -> list[float]:
    return [round(simulation_error(float(share), repeats), 4) for share in shares]


def coverage_tables(found: Sequence[CellCoverage], *, settings: Settings) -> str:
    """The same for people at a terminal."""
    parts = [_held(found, place, level) for place, level in enumerate(settings.levels)]
    if summary := _summary(found, settings.levels):
        parts.append(summary)
    if rejected := _rejected(found, settings.levels):
        parts.append(rejected)
    return "\n\n".join([*parts, *NOTES])


def _held(found: Sequence[CellCoverage], place: int, level: float) -> str:
    repeats = found[0].repeats
    error = simulation_error(level, repeats)
    rows = [["errors", "n", "truth", *ConfidenceSet]]
    for cell in found:
        shares = [float(share) for share in cell.shares[:, place]]
        rows.append([*_setting(cell.cell), *(_share(share, level, error) for share in shares)])
    title = (
        f"{100 * level:g} % sets: in how many of 100 repeats they held the truth "
        f"({repeats} repeats, simulation error {100 * error:.1f}; ! = short of {100 * level:g} by more than three)"
    )
    return "\n".join([title, *aligned(rows)])


def _share(share: float, level: float, error: float) -> str:
    return f"{100 * share:.1f}{'!' if share < level - SHORTFALL_IN_ERRORS * error else ''}"


def _setting(cell: Cell) -> list[str]:
    return [
        cell.errors.value,
        str(cell.points),
        cell.truth.value if cell.resolved else f"{cell.truth.value}, unresolved",
    ]


def _summary(found: Sequence[CellCoverage], levels: Sequence[float]) -> str:
    resolved = np.array([cell.shares for cell in found if cell.cell.resolved])
    if len(resolved) < 2:
        return ""
    rows = [["set", *(f"{100 * level:g} %" for level in levels)]]
    for kind, shares in zip(ConfidenceSet, resolved.transpose(1, 0, 2), strict=True):
        spread = zip(shares.mean(axis=0), shares.min(axis=0), shares.max(axis=0), strict=True)
        rows.append([kind.value, *(f"{100 * m:.1f} ({100 * a:.1f} to {100 * b:.1f})" for m, a, b in spread)])
    return "\n".join([f"Over {len(resolved)} settings: average (least to most)", *aligned(rows)])


def _rejected(found: Sequence[CellCoverage], levels: Sequence[float]) -> str:
    place = min(range(len(levels)), key=lambda number: abs(levels[number] - REJECTION_LEVEL))
    rows = [["errors", "n", "wrong curve", *ConfidenceSet]]
    for cell in found:
        for wrong, shares in zip(WrongCurve, cell.rejections, strict=False):
            rows.append(
                [*_setting(cell.cell)[:2], wrong.value, *(f"{100 * share:.1f}" for share in shares[:, place])]
            )
    if len(rows) == 1:
        return ""
    most = 50.0 / found[0].repeats ** 0.5
    title = (
        f"In how many of 100 repeats the {100 * levels[place]:g} % sets rejected a wrong curve "
        f"(three peaks; simulation error at most {most:.1f})"
    )
    return "\n".join([title, *aligned(rows)])
