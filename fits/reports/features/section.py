"""What the part "Features" of a result is filled with."""

from collections.abc import Callable
from dataclasses import dataclass

from fits.reports.features.count_words import count_sentence, thinning_sentence
from fits.reports.features.document import Features, Kind
from fits.reports.features.sampling_words import sampling_sentence
from fits.reports.features.spacing_words import harmonic_sentence, spacing_sentence
from fits.reports.features.tables import FeatureRow, TheoryRow, feature_rows, theory_rows
from fits.reports.snapshot import Snapshot


@dataclass(frozen=True)
class Said:
    """A sentence at one level."""

    level: str
    sentence: str
    is_chosen: bool


@dataclass(frozen=True)
class Sought:
    """All that is said of peaks, or of dips."""

    count: tuple[Said, ...]
    rows: tuple[FeatureRow, ...]
    theories: tuple[TheoryRow, ...]


@dataclass(frozen=True)
class FeaturesSection:
    """The part "Features" under a chosen level."""

    peaks: Sought
    dips: Sought
    spacing: tuple[Said, ...]
    harmonic: tuple[Said, ...]
    sampling: str
    thinning: str
    failures: tuple[str, ...]
    windows: str


def features_section(snapshot: Snapshot, level: str) -> FeaturesSection | None:
    """None where no features were asked for."""
    features = Features.of(snapshot)
    if features is None:
        return None
    unit = snapshot.x_unit
    failed = {failure["kind"] for failure in features.part("failures") or []}
    is_even = "spacing" not in failed
    return FeaturesSection(
        peaks=_sought(snapshot, features, level, Kind.PEAK),
        dips=_sought(snapshot, features, level, Kind.DIP),
        spacing=_said(features, level, lambda key: spacing_sentence(features, key, unit)) if is_even else (),
        harmonic=_said(features, level, lambda key: harmonic_sentence(features, key, unit)),
        sampling=_unbroken(sampling_sentence(features)),
        thinning=_unbroken(thinning_sentence(features)),
        failures=failures_of(features),
        windows="given" if features.part("windows_given") else "the fit's own",
    )


def failures_of(features: Features) -> tuple[str, ...]:
    """What could not be computed, and why."""
    names = {
        "peak": "A peak",
        "dip": "A dip",
        "count": "The number of peaks",
        "dip_count": "The number of dips",
        "spacing": "Even spacing",
        "harmonic": "The harmonic series",
        "plan": "Features",
    }
    return tuple(
        f"{names.get(failure['kind'], failure['kind'])} could not be computed: {failure['message']}"
        for failure in features.part("failures") or []
    )


def _sought(snapshot: Snapshot, features: Features, level: str, kind: Kind) -> Sought:
    return Sought(
        count=_said(features, level, lambda key: count_sentence(features, key, kind)),
        rows=feature_rows(features, level, kind),
        theories=theory_rows(snapshot, features, level, kind),
    )


def _said(features: Features, level: str, sentence: Callable[[str], str]) -> tuple[Said, ...]:
    said = (Said(key, _unbroken(sentence(key)), key == level) for key in features.levels)
    return tuple(each for each in said if each.sentence)


def _unbroken(text: str) -> str:
    """A number stays with its unit at the end of a line."""
    return text.replace(" %", "\u00a0%")
