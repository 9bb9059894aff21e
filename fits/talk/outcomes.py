"""What an assessment comes to in one line: the verdicts at 95 %, in the words of the pages."""

from collections.abc import Iterable, Mapping

from fits.assessments.models import Verdict
from fits.assessments.three_verdicts import INSIDE, OFF, OUTSIDE, is_inside_by, verdict_word

# Of each verdict so many theories are named; the others are counted.
MOST_NAMES = 6


def outcomes(assessments: Iterable[int]) -> dict[int, str]:
    """The line of each assessment; of those that the reader may see, which is for the caller to settle. One query."""
    rows = Verdict.objects.filter(assessment__in=list(assessments)).order_by("assessment", "rank")
    found: dict[int, dict[str, list[str]]] = {}
    for row in rows.values(
        "assessment", "p_value", "scale_p_value", "inside", "curve__theory__name", "curve__version"
    ):
        word = verdict_word(is_inside=is_inside_by(row), scale_p_value=row["scale_p_value"])
        alike = found.setdefault(row["assessment"], {}).setdefault(word, [])
        alike.append(f"{row['curve__theory__name']} (version {row['curve__version']})")
    return {key: _line(by_word) for key, by_word in found.items()}


def _line(by_word: Mapping[str, list[str]]) -> str:
    groups = [f"{word}: {_names(by_word[word])}" for word in (INSIDE, OFF, OUTSIDE) if word in by_word]
    return f"At 95 %: {'; '.join(groups)}"


def _names(names: list[str]) -> str:
    if len(names) <= MOST_NAMES:
        return ", ".join(names)
    return f"{', '.join(names[:MOST_NAMES])} and {len(names) - MOST_NAMES} more"
