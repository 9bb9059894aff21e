"""How theories stand on releases: the verdicts of done assessments.

Each function makes as many queries as it says, however many rows there are, and none loads a stored table,
a covariance, a result or a detail.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from django.db.models import Count, F, Max, OuterRef, QuerySet, Subquery

from core.measurements.models import Release
from core.theories.models import Curve
from fits.assessments.models import Assessment, Verdict
from fits.engine.scales import TABLE_DRAWS
from fits.reports import numbers

LEVEL = 0.95
LEVEL_KEY = "0.95"
SMALLEST_SCALE_P_VALUE = numbers.smallest_p_value(TABLE_DRAWS)


@dataclass(frozen=True)
class ReleaseSummary:
    """A published release without its table. `assessment` is the newest done one, if any."""

    pk: int
    measurement: int
    number: int
    published_at: datetime
    points: int
    note: str
    file_name: str
    assessment: int | None


@dataclass(frozen=True)
class Standing:
    """What an assessment says of one curve, and where it says so."""

    measurement: int
    measurement_name: str
    release: int
    release_number: int
    assessment: int
    theory: int
    theory_name: str
    curve: int
    version: int
    rank: int
    of: int
    distance: float
    p_value: float
    scale_p_value: float
    is_inside: bool
    draws: int

    @property
    def is_off(self) -> bool:
        """Whether the ball admits the curve at 95 % and the scale set rejects it."""
        return self.is_inside and self.scale_p_value <= 1.0 - LEVEL

    @property
    def word(self) -> str:
        """The verdict at 95 % in words."""
        if self.is_off:
            return "inside, but off"
        return "inside" if self.is_inside else "outside"

    @property
    def distance_written(self) -> str:
        return numbers.significant(self.distance)

    @property
    def p_value_written(self) -> str:
        return numbers.p_value(self.p_value, smallest=numbers.smallest_p_value(self.draws))

    @property
    def scale_p_value_written(self) -> str:
        return numbers.p_value(self.scale_p_value, smallest=SMALLEST_SCALE_P_VALUE)


@dataclass(frozen=True)
class NewestCurve:
    """The newest submitted version of a theory's curve for a measurement."""

    theory: int
    theory_name: str
    version: int


@dataclass(frozen=True)
class History:
    """A theory over the releases of a measurement, oldest first; None where it was not judged."""

    theory: int
    theory_name: str
    standings: tuple[Standing | None, ...]


def releases_of(measurements: Iterable[int]) -> dict[int, list[ReleaseSummary]]:
    """The published releases of each measurement, newest first. One query."""
    done = Assessment.objects.filter(release=OuterRef("pk"), status=Assessment.Status.DONE)
    newest = done.order_by(F("ended_at").desc(nulls_last=True), "-pk").values("pk")[:1]
    rows: Iterable[Mapping[str, Any]] = (
        Release.objects.filter(measurement__in=measurements, state=Release.State.PUBLISHED)
        .annotate(assessment=Subquery(newest))
        .order_by("measurement", "-number")
        .values("pk", "measurement", "number", "published_at", "points", "note", "file_name", "assessment")
    )
    found: dict[int, list[ReleaseSummary]] = {}
    for row in rows:
        found.setdefault(row["measurement"], []).append(ReleaseSummary(**row))
    return found


def standings_in(assessments: Iterable[int]) -> dict[int, list[Standing]]:
    """All standings of each assessment, by rank. One query."""
    found: dict[int, list[Standing]] = {}
    verdicts = Verdict.objects.filter(assessment__in=assessments).order_by("assessment", "rank")
    for standing in _standings(verdicts):
        found.setdefault(standing.assessment, []).append(standing)
    return found


def standings_of_theory(theory: int) -> list[Standing]:
    """Where a theory was judged: per release by the newest done assessment that judged it. One query."""
    verdicts = Verdict.objects.filter(
        curve__theory=theory, assessment__status=Assessment.Status.DONE
    ).order_by(
        "assessment__release__measurement__name",
        "-assessment__release__number",
        F("assessment__ended_at").desc(nulls_last=True),
        "-assessment",
        "-curve__version",
    )
    newest: dict[int, Standing] = {}
    for standing in _standings(verdicts):
        newest.setdefault(standing.release, standing)
    return list(newest.values())


def newest_curves(measurements: Iterable[int]) -> dict[tuple[int, int], NewestCurve]:
    """The newest submitted curve by theory and measurement. One query."""
    rows = (
        Curve.objects.filter(measurement__in=measurements, state=Curve.State.SUBMITTED)
        .order_by("theory__name")
        .values("theory", "theory__name", "measurement")
        .annotate(version=Max("version"))
    )
    return {
        (row["theory"], row["measurement"]): NewestCurve(
            theory=row["theory"], theory_name=row["theory__name"], version=row["version"]
        )
        for row in rows
    }


def by_theory(standings: Iterable[Standing]) -> dict[int, Standing]:
    """The standing of each theory; of several versions that were judged together, the newest counts."""
    found: dict[int, Standing] = {}
    for standing in standings:
        known = found.get(standing.theory)
        if known is None or standing.version > known.version:
            found[standing.theory] = standing
    return found


def histories(releases: Iterable[ReleaseSummary], standings: dict[int, list[Standing]]) -> list[History]:
    """Each judged theory over the releases, oldest first; ordered as on the newest release that judged it."""
    columns = [
        by_theory(standings.get(release.assessment or 0, []))
        for release in sorted(releases, key=lambda release: release.number)
    ]
    names = {key: standing.theory_name for column in columns for key, standing in column.items()}

    def place(theory: int) -> tuple[int, int]:
        judged = [
            (age, column[theory].rank) for age, column in enumerate(reversed(columns)) if theory in column
        ]
        return judged[0]

    return [
        History(theory, names[theory], tuple(column.get(theory) for column in columns))
        for theory in sorted(names, key=place)
    ]


def _standings(verdicts: QuerySet[Verdict]) -> list[Standing]:
    together = Verdict.objects.filter(assessment=OuterRef("assessment")).order_by().values("assessment")
    rows = verdicts.annotate(of=Subquery(together.annotate(count=Count("pk")).values("count"))).values(
        "assessment",
        "assessment__settings",
        "assessment__release",
        "assessment__release__number",
        "assessment__release__measurement",
        "assessment__release__measurement__name",
        "curve",
        "curve__version",
        "curve__theory",
        "curve__theory__name",
        "rank",
        "of",
        "distance",
        "p_value",
        "scale_p_value",
        "inside",
    )
    return [_standing(row) for row in rows]


def _standing(row: Mapping[str, Any]) -> Standing:
    return Standing(
        measurement=row["assessment__release__measurement"],
        measurement_name=row["assessment__release__measurement__name"],
        release=row["assessment__release"],
        release_number=row["assessment__release__number"],
        assessment=row["assessment"],
        theory=row["curve__theory"],
        theory_name=row["curve__theory__name"],
        curve=row["curve"],
        version=row["curve__version"],
        rank=row["rank"],
        of=row["of"],
        distance=row["distance"],
        p_value=row["p_value"],
        scale_p_value=row["scale_p_value"],
        # An assessment may have asked for other levels; its p-value answers for each.
        is_inside=row["inside"].get(LEVEL_KEY, row["p_value"] > 1.0 - LEVEL),
        draws=row["assessment__settings"].get("draws", 2000),
    )
