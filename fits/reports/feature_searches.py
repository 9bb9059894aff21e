"""Which of an assessment's searches for features is shown, and which is under way."""

from dataclasses import dataclass
from typing import Any

from fits.assessments.features import features_of
from fits.assessments.models import Assessment, FeatureSearch
from fits.reports import numbers
from fits.reports.words import listing


@dataclass(frozen=True)
class SearchLine:
    """A search that has ended, in the list of them."""

    pk: int
    windows: str
    is_shown: bool


@dataclass(frozen=True)
class Searches:
    """ended: newest first, without those that were cancelled; shown: one of them; running: one that has not ended."""

    ended: tuple[FeatureSearch, ...]
    shown: FeatureSearch | None
    running: FeatureSearch | None

    @property
    def features(self) -> dict[str, Any] | None:
        """What the one that is shown has found."""
        return features_of(self.shown)

    @property
    def lines(self) -> tuple[SearchLine, ...]:
        """The list of those that can be shown."""
        return tuple(
            SearchLine(search.pk, windows_in_words(search), search == self.shown) for search in self.ended
        )


def searches_of(assessment: Assessment, asked: str | None = None) -> Searches:
    """The search that was asked for by its key if it is there, else the newest that has ended."""
    cancelled = FeatureSearch.Status.CANCELLED
    found = list(assessment.feature_searches.exclude(status=cancelled))
    ended = tuple(search for search in found if search.has_ended)
    chosen = next((search for search in ended if str(search.pk) == asked), None)
    return Searches(
        ended=ended,
        shown=chosen or (ended[0] if ended else None),
        running=next((search for search in found if not search.has_ended), None),
    )


def windows_in_words(search: FeatureSearch) -> str:
    """ "the fit's own windows", or "0.4 to 1.1 and 1.2 to 1.7"."""
    if not search.windows:
        return "the fit’s own windows"
    words = [f"{numbers.significant(low)} to {numbers.significant(high)}" for low, high in search.windows]
    return listing(words) if len(words) <= 3 else f"{len(words)} windows from {words[0]} on"
