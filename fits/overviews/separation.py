"""Which measurement tells two theories apart best."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from core.people.access import in_overview
from core.people.models import Collaboration, User
from core.theories.models import Theory
from fits.assessments.models import Assessment
from fits.overviews.comparison import Column, columns_of
from fits.overviews.pairs import why_no_distances
from fits.overviews.standings import Standing
from fits.reports import numbers


@dataclass(frozen=True)
class Apart:
    """A measurement that judged both. distance: between their curves there; radius: of its 95 % ball."""

    column: Column
    first: Standing
    second: Standing
    distance: float
    radius: float

    @property
    def ratio(self) -> float:
        """d/(2 s_95): above 1 the ball cannot hold both."""
        return self.distance / (2.0 * self.radius)

    @property
    def cannot_both(self) -> bool:
        """Whether the 95 % ball cannot hold both."""
        return self.ratio > 1.0

    @property
    def distance_written(self) -> str:
        return numbers.significant(self.distance)

    @property
    def radius_written(self) -> str:
        return numbers.significant(self.radius)

    @property
    def width_written(self) -> str:
        """2 s_95."""
        return numbers.significant(2.0 * self.radius)

    @property
    def ratio_written(self) -> str:
        return numbers.significant(self.ratio)


@dataclass(frozen=True)
class SeparationPage:
    """theories: what can be chosen; rows: best first; unknown: where the pair was not judged or not kept, and why."""

    theories: tuple[tuple[int, str], ...]
    first: tuple[int, str] | None
    second: tuple[int, str] | None
    rows: tuple[Apart, ...]
    unknown: tuple[tuple[Column, str], ...]

    @property
    def is_chosen(self) -> bool:
        """Whether two different theories are chosen."""
        return self.first is not None and self.second is not None and self.first != self.second

    @property
    def best(self) -> Apart | None:
        """The measurement that separates them best."""
        return self.rows[0] if self.rows else None


def separation_page(collaboration: Collaboration, reader: User, first: str, second: str) -> SeparationPage:
    """Gather the page, as this reader sees it, in five queries."""
    theories = tuple(
        in_overview(Theory.objects.filter(collaboration=collaboration), reader).values_list("pk", "name")
    )
    known = {str(key): (key, name) for key, name in theories}
    one, other = known.get(first), known.get(second)
    if one is None or other is None or one == other:
        return SeparationPage(theories, one, other, (), ())
    columns = columns_of(collaboration, reader)
    kept = _kept(column.release.assessment for column in columns if column.release.assessment)
    rows, unknown = [], []
    for column in columns:
        found = _apart(column, one[0], other[0], kept.get(column.release.assessment or 0, {}))
        if isinstance(found, Apart):
            rows.append(found)
        else:
            unknown.append((column, found))
    rows.sort(key=lambda row: -row.ratio)
    return SeparationPage(theories, one, other, tuple(rows), tuple(unknown))


def _kept(assessments: Iterable[int]) -> dict[int, Mapping[str, Any]]:
    rows = Assessment.objects.filter(pk__in=list(assessments)).values("pk", "radius", "separations")
    return {row["pk"]: row for row in rows}


def _apart(column: Column, first: int, second: int, kept: Mapping[str, Any]) -> Apart | str:
    """How far apart they are there, or why that is not known."""
    one, other = column.standings.get(first), column.standings.get(second)
    if one is None or other is None:
        return "did not judge both"
    separations, radius = kept.get("separations"), kept.get("radius")
    if separations is None:
        return why_no_distances(one.of)
    if radius is None:
        return "has no radius at 95\N{NO-BREAK SPACE}%: that level was not asked for"
    if not radius:
        return "has an empty 95\N{NO-BREAK SPACE}% ball, which holds nothing: the errors should be checked"
    place = {key: index for index, key in enumerate(separations["curves"])}
    low, high = sorted((place[one.curve], place[other.curve]))
    return Apart(column, one, other, separations["distances"][_pair(low, high, len(place))], radius)


def _pair(low: int, high: int, count: int) -> int:
    """Where a pair stands in (0, 1), (0, 2) … (1, 2) …"""
    return low * count - low * (low + 1) // 2 + high - low - 1
