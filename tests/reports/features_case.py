"""Features to show: what the engine finds in invented data with three peaks, as the document that a report keeps."""

from typing import Any

import numpy as np
from threadpoolctl import threadpool_limits

from fits.assessments.detail import detail_document
from fits.assessments.document import SCHEMA, radii_document, result_document
from fits.assessments.features_document import (
    drawn_count_document,
    drawn_peak_document,
    drawn_spacing_document,
)
from fits.engine.assess import assess
from fits.engine.data import FloatArray, validated_curve, validated_data
from fits.engine.features.find import (
    FeatureCase,
    count_peaks,
    feature_case,
    find_peak,
    find_spacing,
    peaks_of_curve,
    sample_reach,
    windows_of,
)
from fits.engine.settings import Settings
from fits.reports.snapshot import Snapshot

NAMES = ("Parabolic floor", "Flat floor")
# The places of a parabolic floor, f_n ∝ sqrt(n (n + 1)), and evenly spaced ones with the same first.
PLACES = {"Parabolic floor": (0.80, 1.386, 1.960), "Flat floor": (0.80, 1.6, 2.4)}
CONTEXT: dict[str, Any] = {
    "collaboration": "Lake Merrow survey",
    "measurement": {
        "name": "Surface seiche power",
        "about": "Invented.",
        "axis": "linear",
        "x_label": "frequency (cycles per hour)",
        "y_label": "power (mm²)",
        "x_unit": "cycles per hour",
        "y_unit": "mm²",
    },
    "release": {"number": 3, "file_name": "merrow-3.csv", "file_sha256": "ab" * 32, "points": 80},
    "curves": [{"name": name, "theory": name, "version": 1, "file_name": "curve.csv"} for name in NAMES],
    "settings": {},
    "recompute": "python manage.py recompute 12",
}


def seiches(x: FloatArray, name: str) -> FloatArray:
    """Three lines, each fainter, on a falling background."""
    lines = (h / (1.0 + ((x - at) / 0.1) ** 2) for h, at in zip((6.0, 4.4, 3.2), PLACES[name], strict=True))
    return np.asarray(sum(lines) + 0.8 / x, dtype=np.float64)


# With more threads than one a small programme takes many times as long.
@threadpool_limits.wrap(limits=1)  # type: ignore[untyped-decorator]
def with_features(*, error: float = 0.3) -> Snapshot:
    """A result with features, as it is once every part is done."""
    x = np.linspace(0.4, 2.6, 80)
    noise = np.random.default_rng(5).normal(0.0, error, x.size)
    data = validated_data(x, seiches(x, NAMES[0]) + noise, errors=np.full(x.size, error))
    grid = np.linspace(0.35, 2.7, 300)
    curves = [validated_curve(name, grid, seiches(grid, name)) for name in NAMES]
    found = assess(data, curves, Settings(resolution=24, draws=400), rng=np.random.default_rng(1))
    features = features_document_of(feature_case(found))
    return Snapshot(result_document(found, seed=1), detail_document(found), CONTEXT, features)


def features_document_of(case: FeatureCase) -> dict[str, Any]:
    """All parts of a search in the fit's own windows."""
    peaks, dips = (
        [_part(case, window, sign) for window in windows_of(case, sign=sign)] for sign in (1.0, -1.0)
    )
    count = drawn_count_document(case, count_peaks(case))
    parts = len(peaks) + len(dips) + 5
    return {
        "schema": SCHEMA,
        "radii": radii_document(case.result),
        "peaks": peaks,
        "dips": dips,
        "count": count["at_most"],
        "count_thinning": count["thinning"],
        "dip_count": drawn_count_document(case, count_peaks(case, sign=-1.0))["at_most"],
        "spacing": drawn_spacing_document(case, find_spacing(case)),
        "harmonic": drawn_spacing_document(case, find_spacing(case, harmonic=True)),
        "windows_given": False,
        "theories": [_theory(case, name, peaks, dips) for name in NAMES],
        "complete": True,
        "parts_done": parts,
        "parts": parts,
        "failures": [],
    }


def _part(case: FeatureCase, window: Any, sign: float) -> dict[str, Any]:
    feature = find_peak(case, window, sign=sign)
    exact, rng = feature.height[2], np.random.default_rng(1)
    reach = sample_reach(case, window, exact, level=0.95, rng=rng, sign=sign)
    return drawn_peak_document(case, feature, reach)


def _theory(case: FeatureCase, name: str, peaks: list[Any], dips: list[Any]) -> dict[str, Any]:
    values = seiches(case.space.grid, name)
    own = {sign: peaks_of_curve(case, values, sign=sign).tolist() for sign in (1.0, -1.0)}
    return {
        "name": name,
        "peaks": [_placed(x, peaks) for x in own[1.0]],
        "dips": [_placed(x, dips) for x in own[-1.0]],
    }


def _placed(x: float, parts: list[Any]) -> dict[str, Any]:
    for part in parts:
        if part["window"][0] <= x <= part["window"][1]:
            inside = {
                level: any(low <= x <= high for low, high in stretches)
                for level, stretches in part["location"].items()
            }
            return {"x": x, "window": part["window"], "inside": inside}
    return {"x": x, "window": None, "inside": None}
