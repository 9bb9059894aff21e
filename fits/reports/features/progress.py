"""How far a search for features is, and what it has found so far."""

from dataclasses import dataclass

from fits.assessments.features import features_of
from fits.assessments.models import FeatureSearch
from fits.reports import numbers
from fits.reports.feature_searches import windows_in_words
from fits.reports.features.count_words import count_sentence
from fits.reports.features.document import Features, Kind, Standing
from fits.reports.features.section import failures_of
from fits.reports.features.tables import location_words
from fits.reports.snapshot import DEFAULT_LEVEL


@dataclass(frozen=True)
class SearchProgress:
    """Parts done of all parts (none are known before the windows are), and sentences on what is known."""

    windows: str
    done: int
    parts: int
    is_planned: bool
    found: tuple[str, ...]
    failures: tuple[str, ...]


def progress_of(search: FeatureSearch | None) -> SearchProgress | None:
    """None where no search is under way."""
    features = features_of(search)
    if search is None or features is None:
        return None
    sought = Features(features)
    return SearchProgress(
        windows=windows_in_words(search),
        done=features["parts_done"],
        parts=features["parts"],
        is_planned=features["parts"] > 1,
        found=found_so_far(sought),
        failures=failures_of(sought),
    )


def found_so_far(features: Features) -> tuple[str, ...]:
    """At the level nearest to 95 %, as the full result opens with."""
    level = min(features.levels, key=lambda key: (abs(float(key) - DEFAULT_LEVEL), -float(key)))
    sentences = [count_sentence(features, level, kind) for kind in Kind if features.steps(kind)]
    if features.radius(level) == 0.0:
        # An empty ball says nothing of a place either.
        return tuple(sentences)
    for kind in Kind:
        for feature in features.found(kind):
            places = " or ".join(location_words(feature, level))
            at, window = numbers.level_words(level), feature.window
            sought = f"{numbers.significant(window.low)} to {numbers.significant(window.high)}"
            is_demanded = feature.absence(features.radius(level)) is Standing.RULED_OUT
            # Where curves of the ball have none, to speak of the peak would be bolder than the numbers.
            which = (
                f"the {kind} of the window {sought}"
                if is_demanded
                else (f"a {kind} of the window {sought}, which need not have one,")
            )
            sentences.append(f"At {at} {which} lies in {places or 'no place at all'}.")
    return tuple(sentences)
