"""The own peaks and dips of a theory, set against the windows in which the data's were sought."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from fits.reports.features.document import Feature, Features, Kind
from fits.reports.snapshot import Document, Snapshot


@dataclass(frozen=True)
class Judged:
    """The highest peak (lowest dip) of a theory in a window, which is what the intervals speak of.

    inside  level → whether it is inside the location interval; empty where that is not known
    """

    feature: Feature
    x: float
    y: float
    inside: Mapping[str, bool]


@dataclass(frozen=True)
class OwnPeaks:
    """All of one theory: `judged` by the number of their feature; `lesser` ones of the same windows, of which the
    intervals say nothing; those `elsewhere`."""

    name: str
    judged: Mapping[int, Judged]
    lesser: Mapping[int, tuple[float, ...]]
    elsewhere: tuple[float, ...]


def own_peaks(snapshot: Snapshot, features: Features, kind: Kind) -> tuple[OwnPeaks, ...]:
    """Of every curve that was judged, in rank order."""
    key = "peaks" if kind is Kind.PEAK else "dips"
    known = set(snapshot.names)
    return tuple(
        _own(snapshot, theory["name"], theory[key], features.found(kind))
        for theory in features.part("theories") or []
        if theory["name"] in known
    )


def _own(snapshot: Snapshot, name: str, places: Sequence[Document], found: Sequence[Feature]) -> OwnPeaks:
    line = snapshot.drawing(name)["on_grid"]
    judged: dict[int, Judged] = {}
    lesser: dict[int, tuple[float, ...]] = {}
    placed: list[Any] = []
    for feature in found:
        own = [place for place in places if _is_in(place, feature)]
        placed += own
        if not own:
            continue
        x = [float(place["x"]) for place in own]
        y = np.interp(x, line["x"], line["y"])
        best = int(np.argmax(y) if feature.kind is Kind.PEAK else np.argmin(y))
        judged[feature.number] = Judged(feature, x[best], float(y[best]), own[best]["inside"] or {})
        lesser[feature.number] = tuple(place for index, place in enumerate(x) if index != best)
    elsewhere = tuple(float(place["x"]) for place in places if place not in placed)
    return OwnPeaks(name, judged, lesser, elsewhere)


def _is_in(place: Document, feature: Feature) -> bool:
    """Each place was looked up in one window, also where windows overlap."""
    return place["window"] is not None and list(place["window"]) == list(feature.found["window"])
