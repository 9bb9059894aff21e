"""How often the sets of this engine hold the truth, for the number of points and the errors nearest to an assessment's.

The numbers are kept in known_coverage.json, which `manage.py coverage --json` writes.
"""

import json
import math
from dataclasses import asdict, dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

TABLE = Path(__file__).with_suffix(".json")

# The error models of an assessment, and the kind of errors that the table has for them.
_KINDS = {
    "given": "known",
    "counts": "known",
    "covariance": "correlated",
    "estimate": "estimated",
    "profile": "estimated",
}


@dataclass(frozen=True)
class HeldShares:
    """How often one set held the truth, level by level: on average over the true curves, and for the worst of them."""

    name: str
    average: tuple[float, ...]
    worst: tuple[float, ...]
    worst_truth: tuple[str, ...]


@dataclass(frozen=True)
class KnownCoverage:
    """What was found by simulation nearest to an assessment."""

    engine: str
    repeats: int
    draws: int
    points: int
    errors: str
    truths: int
    levels: tuple[float, ...]
    sets: tuple[HeldShares, ...]

    def document(self) -> dict[str, Any]:
        """As plain JSON."""
        found: dict[str, Any] = json.loads(json.dumps(asdict(self)))
        return found


def nearest(points: int, error_model: str) -> KnownCoverage:
    """Of the settings that were simulated, those with these errors and the nearest n, on a logarithmic scale."""
    table = known_coverage_table()
    kind = _KINDS[error_model]
    alike = [cell for cell in table["cells"] if cell["resolved"] and cell["errors"] == kind]
    tried = min({cell["points"] for cell in alike}, key=lambda n: abs(math.log(n / points)))
    cells = [cell for cell in alike if cell["points"] == tried]
    return KnownCoverage(
        engine=table["engine"],
        repeats=table["repeats"],
        draws=table["draws"],
        points=tried,
        errors=kind,
        truths=len(cells),
        levels=tuple(table["levels"]),
        sets=tuple(_held(name, cells) for name in cells[0]["held"]),
    )


def _held(name: str, cells: list[dict[str, Any]]) -> HeldShares:
    by_level = list(zip(*(cell["held"][name] for cell in cells), strict=True))
    worst = [min(range(len(cells)), key=shares.__getitem__) for shares in by_level]
    return HeldShares(
        name,
        average=tuple(round(sum(shares) / len(shares), 4) for shares in by_level),
        worst=tuple(min(shares) for shares in by_level),
        worst_truth=tuple(cells[place]["truth"] for place in worst),
    )


@lru_cache(maxsize=1)
def known_coverage_table() -> dict[str, Any]:
    """The stored table."""
    table: dict[str, Any] = json.loads(TABLE.read_text(encoding="utf-8"))
    return table
