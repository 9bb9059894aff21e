"""Curves of a measurement that cannot both be inside: farther apart than its 95 % ball is wide."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from core.measurements.models import Measurement
from core.people.models import User
from fits.assessments.models import Assessment
from fits.engine.separation import MOST_CURVES
from fits.overviews.releases import ReleaseSummary, newest_releases
from fits.overviews.standings import Standing, standings_in
from fits.reports import numbers

MOST_SHOWN = 50


@dataclass(frozen=True)
class Pair:
    """Two curves, the nearer to the fit first, and how far apart they are."""

    first: Standing
    second: Standing
    distance: float
    radius: float

    @property
    def distance_written(self) -> str:
        return numbers.significant(self.distance)

    @property
    def ratio_written(self) -> str:
        """d/(2 s_95)."""
        return numbers.significant(self.distance / (2.0 * self.radius))


@dataclass(frozen=True)
class PairsPage:
    """apart: how many of all pairs cannot both be inside; matching: how many of these hold the chosen theory;
    shown: the largest of those. no_distances: why the assessment kept none, empty where it did."""

    release: ReleaseSummary | None
    radius: float | None
    no_distances: str
    standings: tuple[Standing, ...]
    pairs: int
    apart: int
    matching: int
    shown: tuple[Pair, ...]
    theory: int | None

    @property
    def width_written(self) -> str:
        """2 s_95."""
        return numbers.significant(2.0 * self.radius) if self.radius else ""

    @property
    def theories(self) -> list[tuple[int, str]]:
        """What can be chosen: those that were judged, by name."""
        names = {standing.theory: standing.theory_name for standing in self.standings}
        return sorted(names.items(), key=lambda item: item[1].casefold())


def pairs_page(measurement: Measurement, reader: User, theory: str = "") -> PairsPage:
    """The pairs by the assessment of the newest release that this reader sees. Three queries."""
    release = newest_releases([measurement.pk], reader).get(measurement.pk)
    key = release.assessment if release and release.assessment else 0
    standings = standings_in([key]).get(key, [])
    kept_of = Assessment.objects.filter(pk=key).values_list("radius", "separations")
    radius, kept = kept_of.first() or (None, None)
    chosen = next((one.theory for one in standings if str(one.theory) == theory), None)
    count = len(standings)
    found = _apart(kept, radius, standings) if kept and radius else []
    matching = [pair for pair in found if chosen is None or chosen in (pair.first.theory, pair.second.theory)]
    return PairsPage(
        release=release,
        radius=radius,
        no_distances="" if kept is not None else why_no_distances(count),
        standings=tuple(standings),
        pairs=count * (count - 1) // 2,
        apart=len(found),
        matching=len(matching),
        shown=tuple(matching[:MOST_SHOWN]),
        theory=chosen,
    )


def why_no_distances(judged: int) -> str:
    """Of an assessment that kept no distances between so many curves: why, and what helps."""
    if judged > MOST_CURVES:
        return f"judged {judged} curves, and distances are kept of at most {MOST_CURVES}: assess fewer to see pairs"
    return "is an older one and kept no distances between curves: assess again to see pairs"


def _apart(kept: Mapping[str, Any], radius: float, standings: list[Standing]) -> list[Pair]:
    """The pairs farther apart than 2 s, largest distance first."""
    known = {standing.curve: standing for standing in standings}
    curves = [known[key] for key in kept["curves"]]
    distances = np.asarray(kept["distances"])
    first, second = np.triu_indices(len(curves), 1)
    far = np.flatnonzero(distances > 2.0 * radius)
    found = []
    for place in far[np.argsort(-distances[far], kind="stable")]:
        nearer, farther = sorted((curves[first[place]], curves[second[place]]), key=lambda one: one.rank)
        found.append(Pair(nearer, farther, float(distances[place]), radius))
    return found
