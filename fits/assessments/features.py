"""What a search for features has found so far, as one document; a report freezes it beside result and detail."""

from collections.abc import Iterable, Mapping
from typing import Any

from fits.assessments.document import SCHEMA
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch

Kind = FeaturePart.Kind
Status = FeaturePart.Status


def newest_search(assessment: Assessment) -> FeatureSearch | None:
    """The one asked for last that was not cancelled; None where none was asked for."""
    return assessment.feature_searches.exclude(status=Status.CANCELLED).first()


def features_of(search: FeatureSearch | None) -> dict[str, Any] | None:
    """Everything that its parts have found; what is not found yet is empty or null. None without a search."""
    if search is None:
        return None
    parts = list(search.parts.order_by("order"))
    done = [part for part in parts if part.status == Status.DONE]
    only: dict[str, Any] = {part.kind: part.result for part in done}
    count, dip_count = (only.get(kind) or {} for kind in (Kind.COUNT, Kind.DIP_COUNT))
    result = search.assessment.result or {}
    return {
        "schema": SCHEMA,
        "radii": result.get("radii", []),
        "peaks": [part.result for part in done if part.kind == Kind.PEAK],
        "dips": [part.result for part in done if part.kind == Kind.DIP],
        "count": count.get("at_most", []),
        "count_thinning": count.get("thinning"),
        "dip_count": dip_count.get("at_most", []),
        "spacing": only.get(Kind.SPACING),
        "harmonic": only.get(Kind.HARMONIC),
        "windows_given": bool(search.windows),
        "theories": _theories(only.get(Kind.PLAN) or {}, parts, result),
        "complete": len(done) == len(parts),
        "parts_done": len(done),
        "parts": len(parts),
        "failures": [
            {"kind": part.kind, "window": part.window, "code": part.failure_code, "message": part.failure}
            for part in parts
            if part.status == Status.FAILED
        ],
    }


def _theories(
    plan: Mapping[str, Any], parts: Iterable[FeaturePart], result: Mapping[str, Any]
) -> list[dict[str, Any]]:
    """Each theory's own peaks and dips, in rank order, and whether the data allow one there."""
    rank = {curve["name"]: curve["rank"] for curve in result.get("curves", [])}
    theories = sorted(plan.get("theories", []), key=lambda theory: rank.get(theory["name"], 0))
    peaks = [part for part in parts if part.kind == Kind.PEAK]
    dips = [part for part in parts if part.kind == Kind.DIP]
    return [
        {
            "name": theory["name"],
            "peaks": [_placed(x, peaks) for x in theory["peaks"]],
            "dips": [_placed(x, dips) for x in theory["dips"]],
        }
        for theory in theories
    ]


def _placed(x: float, parts: Iterable[FeaturePart]) -> dict[str, Any]:
    """A theory's peak or dip: in which window, and inside the locations of which levels; null where not known yet."""
    for part in parts:
        assert part.window is not None
        if part.window[0] <= x <= part.window[1]:
            found = part.result if part.status == Status.DONE else None
            return {"x": x, "window": part.window, "inside": found and _inside(x, found["location"])}
    return {"x": x, "window": None, "inside": None}


def _inside(x: float, location: Mapping[str, Any]) -> dict[str, bool]:
    return {level: any(low <= x <= high for low, high in stretches) for level, stretches in location.items()}
