"""What an assessment comes to in one line: the verdicts at 95 %, in the words of the pages."""

from collections.abc import Iterable, Mapping
from typing import Any

from fits.assessments.models import Verdict

LEVEL = 0.95
LEVEL_KEY = "0.95"
WORDS = ("inside", "inside, but off", "outside")
# Of each verdict so many theories are named; the others are counted.
MOST_NAMES = 6


def outcomes(assessments: Iterable[int]) -> dict[int, str]:
    """The line of each assessment; of those that the reader may see, which is for the caller to settle. One query."""
    rows = Verdict.objects.filter(assessment__in=list(assessments)).order_by("assessment", "rank")
    found: dict[int, dict[str, list[str]]] = {}
    for row in rows.values(
        "assessment", "p_value", "scale_p_value", "inside", "curve__theory__name", "curve__version"
    ):
        alike = found.setdefault(row["assessment"], {}).setdefault(word_of(row), [])
        alike.append(f"{row['curve__theory__name']} (version {row['curve__version']})")
    return {key: _line(by_word) for key, by_word in found.items()}


def word_of(verdict: Mapping[str, Any]) -> str:
    """The verdict at 95 %. "Inside, but off": the ball admits the curve and the scale set rejects it."""
    # An assessment may have asked for other levels; its p-value answers for each.
    if not verdict["inside"].get(LEVEL_KEY, verdict["p_value"] > 1.0 - LEVEL):
        return "outside"
    return "inside, but off" if verdict["scale_p_value"] <= 1.0 - LEVEL else "inside"


def _line(by_word: Mapping[str, list[str]]) -> str:
    groups = [f"{word}: {_names(by_word[word])}" for word in WORDS if word in by_word]
    return f"At 95 %: {'; '.join(groups)}"


def _names(names: list[str]) -> str:
    if len(names) <= MOST_NAMES:
        return ", ".join(names)
    return f"{', '.join(names[:MOST_NAMES])} and {len(names) - MOST_NAMES} more"
