"""What templates/reports/result.html is filled with: one reading order for every page that shows a result."""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any, Protocol

from fits.assessments.document import level_key
from fits.engine.scales import TABLE_DRAWS
from fits.reports import numbers, verdict_words, words
from fits.reports.charts import ChartAddresses, chart_of
from fits.reports.features.section import features_section
from fits.reports.figures import BUILDERS, FEATURE_BUILDERS, figure_of
from fits.reports.figures.curves import CURVES_SHOWN
from fits.reports.figures.figure import Figure
from fits.reports.figures.palette import curve_colour
from fits.reports.figures.plotly import plotly_json
from fits.reports.known_coverage_words import known_coverage_table
from fits.reports.snapshot import Document, Snapshot

# More than this many characters of charts are fetched when the reader comes near them.
LARGEST_INLINE = 300_000
SMALLEST_SCALE_P_VALUE = numbers.smallest_p_value(TABLE_DRAWS)


class Addresses(ChartAddresses, Protocol):
    """Where the files of a result are fetched from."""

    def result_json(self) -> str:
        """The whole result."""

    def ranking_csv(self) -> str:
        """The ranking table."""

    def explained(self) -> str:
        """The page that explains words and notes; empty where it stands on the same page."""

    def features(self, name: str) -> str:
        """A file of the features: "features.json", "peaks.csv" or "plots.json"; empty where it cannot be fetched."""


@dataclass(frozen=True)
class LevelWords:
    """A level that can be chosen, and what is said at it."""

    key: str
    words: str
    finding: str
    is_chosen: bool


@dataclass(frozen=True)
class Mark:
    """Inside or outside at one level."""

    level: str
    is_inside: bool
    is_chosen: bool

    @property
    def word(self) -> str:
        """Inside or outside."""
        return verdict_words.sided(self.is_inside)


@dataclass(frozen=True)
class Explained:
    """What is said of a curve at one level."""

    level: str
    sentences: tuple[str, ...]
    is_chosen: bool


@dataclass(frozen=True)
class Row:
    """One curve in the ranking table."""

    rank: int
    name: str
    index: int
    colour: str
    is_on: bool
    proposed_by: str
    unsettled_with: str
    distance: str
    entry_level: str
    published_entry_level: str
    p_value: str
    scale_p_value: str
    worst_scale: str
    worst_p_value: str
    interpolation_error: str
    leftover: str
    marks: tuple[Mark, ...]
    explained: tuple[Explained, ...]


def result_page(
    snapshot: Snapshot, addresses: Addresses, *, level: str | None = None, curve: str | None = None
) -> dict[str, Any]:
    """The template context under the chosen level and curve."""
    level, curve = snapshot.level_or_default(level), snapshot.name_or_first(curve)
    figures = {name: figure_of(name, snapshot, level=level, curve=curve) for name in BUILDERS}
    drawn = {name: figure for name, figure in figures.items() if figure is not None}
    return _features(snapshot, addresses, level=level, curve=curve) | {
        "snapshot": snapshot,
        "result": snapshot.result,
        "origin": _origin(snapshot.context),
        "level": level,
        "chosen_curve": curve,
        "levels": [
            LevelWords(
                key,
                numbers.level_words(key),
                # A number stays with its unit at the end of a line.
                words.finding(snapshot, key).replace(" %", "\u00a0%"),
                key == level,
            )
            for key in snapshot.levels
        ],
        "rows": _rows(snapshot, level),
        "radii": _radii(snapshot, level),
        "charts": {name: chart_of(figure, addresses) for name, figure in drawn.items()},
        "plots": {name: plotly_json(figure) for name, figure in drawn.items()},
        "leftover_words": verdict_words.leftover(snapshot),
        "meaning": words.meaning(words.resolution_width(snapshot)),
        "caution": words.CAUTION,
        "trust": _trust(snapshot),
        "known_coverage": known_coverage_table(snapshot),
        "settings": _settings(snapshot),
        "result_json": addresses.result_json(),
        "ranking_csv": addresses.ranking_csv(),
        "explained": addresses.explained(),
        "nouns": words.nouns(snapshot),
        "heading": _heading(snapshot),
        "shown_words": words.shown_words(snapshot),
    }


def feature_plots(
    snapshot: Snapshot, *, level: str | None = None, curve: str | None = None
) -> dict[str, Any]:
    """The charts of features for the screen."""
    return {figure.name: plotly_json(figure) for figure in _feature_figures(snapshot, level, curve)}


def _feature_figures(snapshot: Snapshot, level: str | None, curve: str | None) -> list[Figure]:
    figures = (figure_of(name, snapshot, level=level, curve=curve) for name in FEATURE_BUILDERS)
    return [figure for figure in figures if figure is not None]


def _features(snapshot: Snapshot, addresses: Addresses, *, level: str, curve: str) -> dict[str, Any]:
    """Part "Features"; its charts are left out where they are large and can be fetched later."""
    section = features_section(snapshot, level)
    if section is None:
        return {"features": None}
    drawn = _feature_figures(snapshot, level, curve)
    plots = {figure.name: plotly_json(figure) for figure in drawn}
    address = addresses.features("plots.json")
    is_large = bool(address) and len(json.dumps(plots)) > LARGEST_INLINE
    return {
        "features": section,
        "feature_charts": {figure.name: chart_of(figure, addresses) for figure in drawn},
        "feature_plots": {} if is_large else plots,
        "feature_plots_address": address if is_large else "",
        "features_json": addresses.features("features.json"),
        "peaks_csv": addresses.features("peaks.csv"),
    }


def _origin(context: Document) -> dict[str, Any]:
    """The context with its moments in words."""
    release = dict(context.get("release") or {})
    release["published_when"] = _moment(release.get("published_at"))
    return {**context, "release": release, "ended_when": _moment(context.get("ended_at"))}


def _moment(iso: str | None) -> str:
    return f"{datetime.fromisoformat(iso).astimezone(UTC):%-d %B %Y, %H:%M} UTC" if iso else ""


def _heading(snapshot: Snapshot) -> str:
    name = snapshot.measurement.get("name")
    data = words.data_name(snapshot)
    # Without a release the measurement is called after the file.
    is_numbered = bool((snapshot.context.get("release") or {}).get("number"))
    return f"{name}, {data}" if name and is_numbered else data


def _rows(snapshot: Snapshot, level: str) -> list[Row]:
    unsettled = {
        pair["first"]: pair["second"] for pair in snapshot.detail["neighbours"] if not pair["settled"]
    }
    return [_row(snapshot, curve, i, level, unsettled) for i, curve in enumerate(snapshot.curves)]


def _row(snapshot: Snapshot, curve: Document, index: int, level: str, unsettled: Mapping[str, str]) -> Row:
    name, inside, scales = curve["name"], snapshot.inside(curve), curve["scales"]
    explained = [
        Explained(key, verdict_words.explanations(snapshot, curve, key), key == level)
        for key in snapshot.levels
    ]
    return Row(
        rank=curve["rank"],
        name=name,
        index=index,
        colour=curve_colour(index),
        is_on=index < CURVES_SHOWN,
        proposed_by=snapshot.origin(name).get("proposed_by") or "",
        unsettled_with=unsettled.get(name, ""),
        distance=numbers.significant(curve["distance"]),
        entry_level=numbers.entry_level(curve["entry_level"]["calibrated"], draws=snapshot.result["draws"]),
        published_entry_level=numbers.entry_level(curve["entry_level"]["published"]),
        p_value=numbers.p_value(
            curve["p_value"],
            curve["p_value_error"],
            smallest=numbers.smallest_p_value(snapshot.result["draws"]),
        ),
        scale_p_value=numbers.p_value(scales["p_value"], smallest=SMALLEST_SCALE_P_VALUE),
        worst_scale=_worst_scale(snapshot, curve),
        worst_p_value=numbers.p_value(scales["worst"]["p_value"]),
        interpolation_error=numbers.significant(curve["interpolation_error"], 2),
        leftover=_unjudged(snapshot, curve),
        marks=tuple(Mark(key, inside[key], key == level) for key in snapshot.levels),
        explained=tuple(part for part in explained if part.sentences),
    )


def _worst_scale(snapshot: Snapshot, curve: Document) -> str:
    worst = curve["scales"]["worst"]
    width = numbers.width(worst["wider_than"], log=snapshot.on_log_axis)
    return "overall level" if worst["functions"] == 1 else width


def _unjudged(snapshot: Snapshot, curve: Document) -> str:
    """Structure of a curve finer than the resolution, in error bars (root-mean-square)."""
    if curve["leftover"] is None:
        return "none: everything was judged"
    square = curve["leftover"]["chi2"] / snapshot.result["release"]["points"]
    return numbers.significant(float(square) ** 0.5, 2)


def _radii(snapshot: Snapshot, level: str) -> list[dict[str, Any]]:
    return [
        {"key": level_key(radius["level"]), "words": numbers.level_words(level_key(radius["level"]))}
        | {kind: numbers.significant(radius[kind]) for kind in ("published", "calibrated", "cautious")}
        | {"is_chosen": level_key(radius["level"]) == level}
        for radius in snapshot.result["radii"]
    ]


ERRORS = {
    "given": "given with the data",
    "covariance": "given as a covariance",
    "estimate": "their size estimated from the data",
    "counts": "those of counts",
    "profile": "changing along x, estimated from the data",
}


def _errors(snapshot: Snapshot) -> list[tuple[str, str]]:
    """Where they come from, every estimate of their size, and how well the scale of the data is known."""
    source = snapshot.result["release"]["errors"]
    calibration = (snapshot.context.get("release") or {}).get("calibration")
    facts = [("errors", ERRORS.get(source, source))]
    facts += [
        (
            f"error size from {size['source']}",
            f"{numbers.significant(size['sigma'])} ± {numbers.significant(size['standard_error'], 2)}",
        )
        for size in snapshot.detail.get("error_sizes", ())
    ]
    if calibration:
        facts.append(("scale of the data", f"known to {100.0 * calibration:g} %"))
    return facts


def _trust(snapshot: Snapshot) -> list[tuple[str, str]]:
    fit, release = snapshot.result["fit"], snapshot.result["release"]
    draws = snapshot.result["draws"]
    return [
        ("points", f"{release['points']}"),
        *_errors(snapshot),
        (
            "resolution",
            f"{fit['resolution']} functions: features wider than {words.resolution_width(snapshot)}",
        ),
        ("effective parameters", numbers.significant(fit["effective_parameters"])),
        ("estimated risk R", numbers.significant(fit["risk"])),
        ("its uncertainty τ", numbers.significant(fit["tau"])),
        (
            "simulation error",
            f"{draws} draws: at most ± {numbers.significant(0.5 / draws**0.5, 2)} on a p-value or entry level",
        ),
    ]


def _settings(snapshot: Snapshot) -> list[tuple[str, str]]:
    chosen = snapshot.context.get("settings") or {}
    if chosen.get("resolution"):
        resolution = f"{chosen['resolution']} functions, as asked"
    elif chosen.get("feature_width"):
        resolution = f"from the narrowest feature, {numbers.significant(chosen['feature_width'])}"
    elif chosen.get("full"):
        resolution = "full: as many functions as points"
    else:
        resolution = "default for the number of points"
    levels = ", ".join(numbers.level_words(key) for key in snapshot.levels)
    return [
        ("levels", levels),
        ("resolution", resolution),
        ("shrinkage", snapshot.result["fit"]["shrinkage"]),
        ("radius drawn", snapshot.radius_kind),
        ("draws", str(snapshot.result["draws"])),
        ("seed", str(snapshot.result["seed"])),
        ("engine", str(snapshot.result["engine"])),
    ]
