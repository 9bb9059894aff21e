"""Theories × measurements on the newest releases, with what the measurements say jointly.

The page holds hundreds of cells: nothing is looked up or reversed for each of them.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from django.http import QueryDict
from django.urls import reverse
from django.utils.safestring import SafeString

from core.measurements.models import Measurement
from core.people.access import in_overview
from core.people.models import Collaboration, User
from core.theories.models import Theory
from fits.engine.joint import Joint, joint_bound, joint_of, joint_p_value
from fits.overviews.comparison_choice import JOINT, NAME, Choice, choice_of
from fits.overviews.matrix_html import cell_html, joint_html, row_html
from fits.overviews.releases import ReleaseSummary, newest_releases
from fits.overviews.standings import Standing, by_theory, newest_curves, standings_in
from fits.reports import numbers


@dataclass(frozen=True)
class Column:
    """A measurement with its newest release. `standings`: by theory, of that release's assessment."""

    key: int
    name: str
    url: str
    release: ReleaseSummary
    assessment_url: str
    standings: Mapping[int, Standing]
    is_included: bool


@dataclass(frozen=True)
class MatrixCell:
    """A theory on a measurement. word: the verdict at the chosen level; without a standing, why there is none."""

    standing: Standing | None
    word: str
    url: str = ""  # of the assessment


@dataclass(frozen=True)
class MatrixRow:
    """A theory with its cells, one for each column; joint is None where it is judged nowhere."""

    key: int
    name: str
    url: str
    cells: tuple[MatrixCell, ...]
    joint: Joint | None
    p_value: str
    entry_level: str

    @property
    def judged(self) -> int:
        """m: on how many of the columns it is judged."""
        return self.joint.measurements if self.joint else 0

    @property
    def html(self) -> SafeString:
        """As it stands in the table."""
        joint = joint_html(self.joint, self.p_value, self.entry_level)
        cells = (cell_html(cell.standing, cell.word, cell.url) for cell in self.cells)
        return row_html(self.url, self.name, joint, cells)


@dataclass(frozen=True)
class Head:
    """The head of a column: its words, the query that sorts by it, and how it is sorted now, if it is."""

    words: str
    query: str
    sorted: str
    column: Column | None = None


@dataclass(frozen=True)
class Comparison:
    """all_columns: what can be included; columns: what is; rows: those kept, in order; of: before any were left out.

    bounds  (m, what a p-value has to exceed on each of m measurements), for each m that occurs
    """

    choice: Choice
    all_columns: tuple[Column, ...]
    columns: tuple[Column, ...]
    rows: tuple[MatrixRow, ...]
    of: int
    bounds: tuple[tuple[int, str], ...]

    @property
    def heads(self) -> tuple[Head, ...]:
        """Of the names, the joint verdict and each measurement."""
        columns = ((column.name, str(column.key), column) for column in self.columns)
        return tuple(
            Head(
                words=words,
                query=self.choice.sorted_by(sort).query,
                sorted=("descending" if self.choice.descending else "ascending")
                if sort == self.choice.sort
                else "",
                column=column,
            )
            for words, sort, column in (("Theory", NAME, None), ("Jointly", JOINT, None), *columns)
        )

    @property
    def inside(self) -> int:
        """How many of the rows are jointly inside."""
        return sum(row.joint is not None and row.joint.is_inside for row in self.rows)

    @property
    def outside(self) -> int:
        """How many of the rows are jointly outside."""
        return sum(row.joint is not None and not row.joint.is_inside for row in self.rows)

    @property
    def has_open(self) -> bool:
        """Whether the simulation leaves a joint verdict open."""
        return any(row.joint is not None and not row.joint.is_settled for row in self.rows)


def columns_of(collaboration: Collaboration, reader: User) -> tuple[Column, ...]:
    """The measurements with a release that the reader sees, and how the theories stand there. Three queries."""
    measurements = list(Measurement.objects.filter(collaboration=collaboration).only("name"))
    newest = newest_releases([measurement.pk for measurement in measurements], reader)
    found = standings_in([release.assessment for release in newest.values() if release.assessment])
    return tuple(
        Column(
            key=measurement.pk,
            name=measurement.name,
            url=measurement.get_absolute_url(),
            release=release,
            assessment_url=reverse("reports:assessment", args=[release.assessment])
            if release.assessment
            else "",
            standings=by_theory(found.get(release.assessment or 0, [])),
            is_included=True,
        )
        for measurement in measurements
        if (release := newest.get(measurement.pk))
    )


def comparison_of(collaboration: Collaboration, reader: User, asked: QueryDict) -> Comparison:
    """Gather the matrix, as this reader sees it, in five queries."""
    columns = columns_of(collaboration, reader)
    choice = choice_of(asked, [column.key for column in columns])
    included = tuple(
        column for column in columns if not choice.measurements or column.key in choice.measurements
    )
    submitted = newest_curves([column.key for column in included], reader).keys()
    theories = in_overview(Theory.objects.filter(collaboration=collaboration), reader).values_list(
        "pk", "name"
    )
    address = _address_of_theories()
    rows = [
        _row(key, name, address.replace("/0/", f"/{key}/"), included, submitted, choice)
        for key, name in theories
    ]
    kept = [row for row in rows if _is_kept(row, choice, len(included))]
    return Comparison(
        choice=choice,
        all_columns=columns,
        columns=included,
        rows=tuple(_ordered(kept, choice, included)),
        of=len(rows),
        bounds=tuple(
            (count, numbers.significant(joint_bound(choice.level_number, count)))
            for count in sorted({row.judged for row in rows if row.judged})
        ),
    )


def _address_of_theories() -> str:
    # Found once: finding each takes longer than everything else of its row.
    return reverse("overviews:theory", args=[0])


def _row(
    key: int,
    name: str,
    url: str,
    columns: Sequence[Column],
    submitted: Iterable[tuple[int, int]],
    choice: Choice,
) -> MatrixRow:
    cells = tuple(_cell(key, column, submitted, choice.level_number) for column in columns)
    judged = [cell.standing for cell in cells if cell.standing is not None]
    if not judged:
        return MatrixRow(key, name, url, cells, None, "", "")
    joint = joint_of(
        [standing.p_value for standing in judged],
        [standing.entry_level for standing in judged],
        [standing.draws for standing in judged],
        level=choice.level_number,
    )
    draws = min(standing.draws for standing in judged)
    least = joint_p_value([numbers.smallest_p_value(draws)] * len(judged))
    return MatrixRow(
        key,
        name,
        url,
        cells,
        joint,
        p_value=numbers.p_value(joint.p_value, smallest=least),
        entry_level=numbers.entry_level(joint.entry_level, draws=draws),
    )


def _cell(theory: int, column: Column, submitted: Iterable[tuple[int, int]], level: float) -> MatrixCell:
    standing = column.standings.get(theory)
    if standing is None:
        return MatrixCell(None, "not judged" if (theory, column.key) in submitted else "no curve")
    return MatrixCell(standing, standing.word_at(level), column.assessment_url)


def _is_kept(row: MatrixRow, choice: Choice, columns: int) -> bool:
    if choice.text.casefold() not in row.name.casefold():
        return False
    match choice.verdict:
        case "inside":
            return row.joint is not None and row.joint.is_inside
        case "outside":
            return row.joint is not None and not row.joint.is_inside
        case "partly":
            return row.judged < columns
    return True


def _ordered(rows: list[MatrixRow], choice: Choice, columns: Sequence[Column]) -> list[MatrixRow]:
    """In the chosen order; those that are not judged there stand last either way."""
    rows = sorted(rows, key=lambda row: (row.name.casefold(), row.key))
    if choice.sort == NAME:
        return rows[::-1] if choice.descending else rows
    place = next((index for index, column in enumerate(columns) if str(column.key) == choice.sort), None)

    def value(row: MatrixRow) -> float | None:
        if choice.sort == JOINT or place is None:
            return -row.joint.p_value if row.joint else None
        standing = row.cells[place].standing
        return standing.rank if standing else None

    known = [(found, row) for row in rows if (found := value(row)) is not None]
    known.sort(key=lambda pair: pair[0], reverse=choice.descending)
    return [row for _, row in known] + [row for row in rows if value(row) is None]
