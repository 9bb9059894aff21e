"""How theories stand on releases: the verdicts of done assessments.

Each function makes as many queries as it says, however many rows there are, and none loads a stored table,
a covariance, a result or a detail.
"""

from collections import Counter
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from django.db.models import Count, F, Max, OuterRef, QuerySet, Subquery
from django.utils.safestring import SafeString

from core.people.access import in_overview, seen_by
from core.people.models import Collaboration, User
from core.theories.models import Curve
from fits.assessments.models import Assessment, Verdict
from fits.assessments.three_verdicts import LEVEL, OFF, is_inside_by, verdict_word
from fits.engine.ball import is_above
from fits.engine.joint import joint_of
from fits.engine.scales import TABLE_DRAWS
from fits.engine.settings import DEFAULT_DRAWS, RadiusKind
from fits.overviews.signs import sign_of
from fits.reports import numbers

SMALLEST_SCALE_P_VALUE = numbers.smallest_p_value(TABLE_DRAWS)


@dataclass(frozen=True)
class Standing:
    """What an assessment says of one curve, and where it says so. `radius` is that at 95 %, None where it is not
    known; it may be the cautious one, while the entry level is always that of the calibrated balls."""

    measurement: int
    measurement_name: str
    release: int
    release_number: int
    is_withdrawn: bool
    assessment: int
    ended_at: datetime | None
    theory: int
    theory_name: str
    curve: int
    version: int
    rank: int
    of: int
    distance: float
    radius: float | None
    is_cautious: bool
    entry_level: float
    p_value: float
    scale_p_value: float
    is_inside: bool
    draws: int

    @property
    def word(self) -> str:
        """The verdict at 95 % in words."""
        return self.word_at(LEVEL)

    @property
    def is_settled(self) -> bool:
        """Whether more draws could hardly turn the verdict of the exact p-value at 95 %."""
        return joint_of([self.p_value], [self.entry_level], [self.draws], level=LEVEL).is_settled

    @property
    def is_off(self) -> bool:
        """Whether the ball admits the curve at 95 % and the scale set rejects it."""
        return self.word == OFF

    @property
    def sign(self) -> SafeString:
        """The verdict at 95 % as shape and word."""
        return sign_of(self.word)

    def word_at(self, level: float) -> str:
        """The verdict at a level in words."""
        is_inside = self.is_inside if level == LEVEL else is_above(self.p_value, level)
        return verdict_word(is_inside=is_inside, scale_p_value=self.scale_p_value, level=level)

    @property
    def share_of_radius(self) -> float | None:
        """d/s_95; None without a radius, and where the ball is empty."""
        return self.distance / self.radius if self.radius else None

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


def standings_in(assessments: Iterable[int]) -> dict[int, list[Standing]]:
    """All standings of each assessment that the reader was found to see, by rank. One query."""
    verdicts = Verdict.objects.filter(assessment__in=assessments).order_by("assessment", "rank")
    rows = list(_fields_of(verdicts))
    judged = Counter(row["assessment"] for row in rows)
    found: dict[int, list[Standing]] = {}
    for row in rows:
        found.setdefault(row["assessment"], []).append(_standing(row, judged[row["assessment"]]))
    return found


def standings_of_theory(theory: int, reader: User) -> list[Standing]:
    """Where a theory was judged: per release by the newest done assessment that judged it. One query."""
    judged = Verdict.objects.filter(curve__theory=theory)
    newest: dict[int, Standing] = {}
    for standing in _newest_first(
        judged, reader, "assessment__release__measurement__name", "-assessment__release__number"
    ):
        newest.setdefault(standing.release, standing)
    return list(newest.values())


def standings_at_desks(collaboration: Collaboration, reader: User) -> dict[int, Standing]:
    """By curve of a desk, what the newest done assessment that judged it says of it. One query."""
    theirs = Verdict.objects.filter(
        curve__theory__collaboration=collaboration, curve__theory__desk__isnull=False
    )
    newest: dict[int, Standing] = {}
    for standing in _newest_first(theirs, reader):
        newest.setdefault(standing.curve, standing)
    return newest


def newest_curves(measurements: Iterable[int], reader: User) -> dict[tuple[int, int], NewestCurve]:
    """The newest submitted curve by theory and measurement. One query."""
    submitted = Curve.objects.filter(measurement__in=measurements, state=Curve.State.SUBMITTED)
    rows = (
        in_overview(submitted, reader)
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


def _newest_first(verdicts: QuerySet[Verdict], reader: User, *order: str) -> Iterator[Standing]:
    """Those that the reader sees, in this order and then by the newest assessment. One query."""
    together = Verdict.objects.filter(assessment=OuterRef("assessment")).order_by().values("assessment")
    seen = (
        seen_by(verdicts.filter(assessment__status=Assessment.Status.DONE), reader)
        .annotate(of=Subquery(together.annotate(count=Count("pk")).values("count")))
        .order_by(*order, F("assessment__ended_at").desc(nulls_last=True), "-assessment", "-curve__version")
    )
    return (_standing(row, row["of"]) for row in _fields_of(seen, "of"))


def _fields_of(verdicts: QuerySet[Verdict], *more: str) -> Iterable[Mapping[str, Any]]:
    rows: Iterable[Mapping[str, Any]] = verdicts.values(
        "assessment",
        "assessment__ended_at",
        "assessment__settings__draws",
        "assessment__settings__radius",
        "assessment__radius",
        "assessment__release",
        "assessment__release__number",
        "assessment__release__state",
        "assessment__release__measurement",
        "assessment__release__measurement__name",
        "curve",
        "curve__version",
        "curve__theory",
        "curve__theory__name",
        "rank",
        "distance",
        "entry_level",
        "p_value",
        "scale_p_value",
        "inside",
        *more,
    )
    return rows


def _standing(row: Mapping[str, Any], judged: int) -> Standing:
    return Standing(
        measurement=row["assessment__release__measurement"],
        measurement_name=row["assessment__release__measurement__name"],
        release=row["assessment__release"],
        release_number=row["assessment__release__number"],
        is_withdrawn=row["assessment__release__state"] == "withdrawn",
        assessment=row["assessment"],
        ended_at=row["assessment__ended_at"],
        theory=row["curve__theory"],
        theory_name=row["curve__theory__name"],
        curve=row["curve"],
        version=row["curve__version"],
        rank=row["rank"],
        of=judged,
        distance=row["distance"],
        radius=row["assessment__radius"],
        is_cautious=row["assessment__settings__radius"] == RadiusKind.CAUTIOUS,
        entry_level=row["entry_level"],
        p_value=row["p_value"],
        scale_p_value=row["scale_p_value"],
        is_inside=is_inside_by(row),
        draws=row["assessment__settings__draws"] or DEFAULT_DRAWS,
    )
