"""The tables of peaks and dips: where, how high, demanded up to which level, and what the theories say there."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from fits.reports import numbers
from fits.reports.exports import csv_text
from fits.reports.features.document import Feature, Features, Kind, Standing
from fits.reports.features.own import OwnPeaks, own_peaks
from fits.reports.figures.figure import Cell
from fits.reports.snapshot import Snapshot

UNSOLVED = "could not be solved"
# An empty ball: whatever is said of all of its curves is true and says nothing.
EMPTY = "radius 0"


@dataclass(frozen=True)
class AtLevel:
    """One feature at one level. `demanded`: whether every curve of the ball has it, None where that is not known."""

    key: str
    level: str
    location: tuple[str, ...]
    height: str
    demanded: bool | None
    demanded_words: str
    is_chosen: bool


@dataclass(frozen=True)
class FeatureRow:
    """One feature."""

    name: str
    window: str
    demanded_up_to: str
    levels: tuple[AtLevel, ...]
    remark: str


@dataclass(frozen=True)
class Side:
    """Inside or outside at one level."""

    level: str
    is_inside: bool
    is_chosen: bool


@dataclass(frozen=True)
class OwnPlace:
    """Where a theory has its highest peak of a window, at each level whether that is inside (empty: not known), and
    where its lesser ones are. `x` is empty where it has none."""

    x: str
    sides: tuple[Side, ...]
    lesser: str


@dataclass(frozen=True)
class TheoryRow:
    """The peaks of one theory: those in the window of each feature, and those elsewhere."""

    name: str
    cells: tuple[OwnPlace, ...]
    elsewhere: str


def feature_rows(features: Features, level: str, kind: Kind) -> tuple[FeatureRow, ...]:
    """One for each peak or dip."""
    return tuple(_row(features, feature, level) for feature in features.found(kind))


def theory_rows(snapshot: Snapshot, features: Features, level: str, kind: Kind) -> tuple[TheoryRow, ...]:
    """One for each curve that was judged."""
    return tuple(
        TheoryRow(
            name=theory.name,
            cells=tuple(_own_place(theory, feature.number, level) for feature in features.found(kind)),
            elsewhere=_listed(theory.elsewhere),
        )
        for theory in own_peaks(snapshot, features, kind)
    )


def peaks_csv(features: Features) -> str:
    """Peaks and dips with all digits: one row for each level and stretch of location."""
    columns = (
        "feature",
        "number",
        "window_low",
        "window_high",
        "level",
        "location_low",
        "location_high",
        "height_low",
        "height_high",
        "without_it",
        "price_without_it",
        "demanded_up_to_level",
    )
    return csv_text(columns, [row for kind in Kind for row in _csv_rows(features, kind)])


def location_words(feature: Feature, level: str) -> tuple[str, ...]:
    """The stretches in which it can be, all with the digits of the widest."""
    parts = feature.location(level)
    widest = max((part.high - part.low for part in parts), default=0.0)
    return tuple(numbers.interval(part.low, part.high, span=widest) for part in parts)


def unsolved_in(feature: Feature, level: str) -> int:
    """How many places have no price because the programme was not solved. Such places are never ruled out, so that
    they lie in the location intervals; where no curve has the feature, none does and the place is ruled out."""
    stretches = feature.location(level)
    return sum(price is None and any(part.holds(x) for part in stretches) for x, price in feature.profile)


def _row(features: Features, feature: Feature, level: str) -> FeatureRow:
    demanded = feature.demanded_up_to
    return FeatureRow(
        name=feature.name.capitalize(),
        window=f"{numbers.significant(feature.window.low)} to {numbers.significant(feature.window.high)}",
        demanded_up_to=UNSOLVED if demanded is None else numbers.entry_level(demanded).replace(" ", "\u00a0"),
        levels=tuple(_at(features, feature, key, key == level) for key in features.levels),
        remark=_remark(feature, unsolved_in(feature, features.levels[0])),
    )


def _remark(feature: Feature, unsolved: int) -> str:
    remarks = []
    if unsolved:
        places, them = ("one place", "it") if unsolved == 1 else (f"{unsolved} places", "them")
        remarks.append(f"At {places} the programme {UNSOLVED}, which does not rule {them} out.")
    blank = sum(price is None for row in (feature.map or {}).get("price", []) for price in row)
    if blank:
        remarks.append(f"{blank} points of its map have no price: its outline is broken there.")
    return " ".join(remarks)


def _at(features: Features, feature: Feature, key: str, is_chosen: bool) -> AtLevel:
    if features.radius(key) == 0.0:
        return AtLevel(key, numbers.level_words(key), (EMPTY,), EMPTY, None, EMPTY, is_chosen)
    height = feature.height(key)
    standing = feature.absence(features.radius(key))
    demanded = {Standing.RULED_OUT: True, Standing.POSSIBLE: False, Standing.UNDECIDED: None}[standing]
    words = {True: "yes", False: "no", None: UNSOLVED}
    return AtLevel(
        key=key,
        level=numbers.level_words(key),
        location=location_words(feature, key) or ("nowhere",),
        height=UNSOLVED if height is None else numbers.interval(height.low, height.high),
        demanded=demanded,
        demanded_words=words[demanded],
        is_chosen=is_chosen,
    )


def _own_place(theory: OwnPeaks, number: int, level: str) -> OwnPlace:
    judged = theory.judged.get(number)
    if judged is None:
        return OwnPlace("", (), "")
    sides = tuple(Side(key, inside, key == level) for key, inside in judged.inside.items())
    return OwnPlace(numbers.significant(judged.x, 4), sides, _listed(theory.lesser[number]))


def _listed(places: Sequence[float]) -> str:
    return ", ".join(numbers.significant(x, 4) for x in places)


def _csv_rows(features: Features, kind: Kind) -> Iterable[tuple[Cell, ...]]:
    for feature in features.found(kind):
        absent = feature.found["no_peak"]
        for key in features.levels:
            height = feature.height(key)
            standing = UNSOLVED if feature.demanded_up_to is None else feature.absence(features.radius(key))
            if features.radius(key) == 0.0:
                height, standing = None, EMPTY
            for part in feature.location(key) or (None,):
                yield (
                    str(kind),
                    feature.number,
                    feature.window.low,
                    feature.window.high,
                    float(key),
                    part.low if part else None,
                    part.high if part else None,
                    height.low if height else None,
                    height.high if height else None,
                    str(standing),
                    absent["price"],
                    absent["entry_level"],
                )
