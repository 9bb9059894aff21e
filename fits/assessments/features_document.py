"""Features as plain JSON: the document that `features --json` writes, and what pages draw beside it."""

import math
from collections.abc import Mapping, Sequence
from typing import Any

from fits.assessments.document import SCHEMA, level_key, radii_document
from fits.engine.features.count import PeakCount
from fits.engine.features.find import SAMPLES, FeatureCase, PeakFeature, Range, SampleReach
from fits.engine.features.intervals import intervals_below
from fits.engine.features.peak import HeightMap
from fits.engine.features.spacing import SpacingProfile

PEAK_KEYS = ("window", "profile", "location", "height", "no_peak")
COUNT_KEYS = ("at_most", "price_lower", "price_upper", "demanded_level")
SPACING_KEYS = ("spacing", "price", "interval")


def features_document(
    case: FeatureCase,
    peaks: Sequence[PeakFeature],
    count: PeakCount,
    spacing: SpacingProfile | None,
) -> dict[str, Any]:
    """Everything that the contract of the command names; numbers that are not known are null."""
    return {
        "schema": SCHEMA,
        "radii": radii_document(case.result),
        "peaks": [peak_document(case, peak) for peak in peaks],
        "count": count_document(case, count),
        "spacing": None if spacing is None else spacing_document(case, spacing),
    }


def contract_of(features: Mapping[str, Any]) -> dict[str, Any]:
    """Of all that is known of a search's features, what the contract of the command names."""
    spacing = features["spacing"]
    return {
        "schema": features["schema"],
        "radii": features["radii"],
        "peaks": [{key: peak[key] for key in PEAK_KEYS} for peak in features["peaks"]],
        "count": [{key: entry[key] for key in COUNT_KEYS} for entry in features["count"]],
        "spacing": None if spacing is None else {key: spacing[key] for key in SPACING_KEYS},
    }


def peak_document(case: FeatureCase, peak: PeakFeature) -> dict[str, Any]:
    """One window."""
    keys = [level_key(level) for level in case.levels]
    return {
        "window": _range(peak.window),
        "profile": {"x": peak.profile.x.tolist(), "price": known(peak.profile.price)},
        "location": {
            key: [_range(stretch) for stretch in stretches]
            for key, stretches in zip(keys, peak.location, strict=True)
        },
        "height": {key: _range(height) for key, height in zip(keys, peak.height, strict=True)},
        "no_peak": {"price": _number(peak.no_peak), "entry_level": _entry_level(case, peak.no_peak)},
    }


def count_document(case: FeatureCase, count: PeakCount) -> list[dict[str, Any]]:
    """at_most 0, 1, 2, …; demanded_level: up to which level more peaks than that are demanded."""
    return [
        {
            "at_most": entry.peaks,
            "price_lower": entry.lower,
            "price_upper": _number(entry.upper),
            "demanded_level": case.result.ball.calibrated_entry_level(entry.lower),
        }
        for entry in count.at_most
    ]


def spacing_document(case: FeatureCase, spacing: SpacingProfile) -> dict[str, Any]:
    """Price of even spacing for each spacing, and the spacings that each level allows (none: rejected)."""
    return {
        "spacing": spacing.spacing.tolist(),
        "price": known(spacing.price),
        "interval": {
            level_key(level): [
                list(interval) for interval in intervals_below(spacing.spacing, spacing.price, radius)
            ]
            for level, radius in zip(case.levels, case.radii, strict=True)
        },
    }


def drawn_peak_document(case: FeatureCase, peak: PeakFeature, reach: SampleReach) -> dict[str, Any]:
    """One window with the map of location and height, and what samples reach of its exact range."""
    return peak_document(case, peak) | {
        "map": None if peak.map is None else _map(peak.map),
        "samples": {
            "level": reach.level,
            "exact": _range(reach.exact),
            "sampled": _range(reach.sampled),
            "share": _number(reach.share),
            "count": SAMPLES,
            "tops": reach.tops.tolist(),
        },
    }


def drawn_count_document(case: FeatureCase, count: PeakCount) -> dict[str, Any]:
    """The count with its witnesses."""
    x = case.space.grid.tolist()
    return {
        "at_most": [
            entry | {"witness": None if bounds.witness is None else {"x": x, "y": bounds.witness.tolist()}}
            for entry, bounds in zip(count_document(case, count), count.at_most, strict=True)
        ],
        "thinning": count.thinning,
    }


def drawn_spacing_document(case: FeatureCase, spacing: SpacingProfile | None) -> dict[str, Any] | None:
    """The profile with the place of the first peak at each spacing; None for fewer than three peaks."""
    if spacing is None:
        return None
    return spacing_document(case, spacing) | {"first": spacing.first.tolist()}


def _map(prices: HeightMap) -> dict[str, Any]:
    return {
        "x": prices.x.tolist(),
        "height": prices.height.tolist(),
        "price": [known(row) for row in prices.price],
        "exact_below": prices.exact_below,
    }


def known(values: Any) -> list[float | None]:
    """Numbers, with null for what is impossible or unsolved."""
    return [_number(float(value)) for value in values]


def _entry_level(case: FeatureCase, price: float) -> float | None:
    return None if math.isnan(price) else case.result.ball.calibrated_entry_level(price)


def _number(value: float) -> float | None:
    return value if math.isfinite(value) else None


def _range(stretch: Range) -> list[float | None]:
    return [_number(stretch.low), _number(stretch.high)]
