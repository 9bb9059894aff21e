"""All desks in one table: what each student submitted and when, and the newest verdict of it."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from django.db.models import Count, F, OuterRef, Subquery
from django.http import Http404
from django.utils.safestring import SafeString

from core.measurements.models import Measurement
from core.people.access import seen_by
from core.people.models import Collaboration, Role, User
from core.theories.models import Curve
from fits.assessments.models import Assessment, Verdict
from fits.engine.ball import is_above
from fits.engine.settings import DEFAULT_DRAWS
from fits.overviews.signs import INSIDE, OFF, OUTSIDE, sign_of
from fits.overviews.standings import LEVEL, LEVEL_KEY
from fits.reports import numbers
from fits.reports.exports import csv_text
from fits.reports.figures.figure import Cell

COLUMNS = (
    "student",
    "theory",
    "measurement",
    "version",
    "submitted (UTC)",
    "submitted by",
    "SHA-256",
    "verdict at 95 %",
    "rank",
    "judged together",
    "p-value",
    "release",
    "assessment",
    "assessed (UTC)",
)


@dataclass(frozen=True)
class DeskVerdict:
    """What the newest assessment that judged a curve says of it."""

    assessment: int
    release_number: int
    is_withdrawn: bool
    ended_at: datetime | None
    rank: int
    of: int
    p_value: float
    scale_p_value: float
    is_inside: bool
    draws: int

    @property
    def word(self) -> str:
        """The verdict in words."""
        if not self.is_inside:
            return OUTSIDE
        return INSIDE if is_above(self.scale_p_value, LEVEL) else OFF

    @property
    def sign(self) -> SafeString:
        """The verdict as shape and word."""
        return sign_of(self.word)

    @property
    def p_value_written(self) -> str:
        return numbers.p_value(self.p_value, smallest=numbers.smallest_p_value(self.draws))


@dataclass(frozen=True)
class Submission:
    """A submitted curve; no verdict where none was computed or its measurement is sealed for the reader."""

    curve: Curve
    verdict: DeskVerdict | None


@dataclass(frozen=True)
class Desk:
    """A student and what they submitted, newest first."""

    student: User
    submissions: tuple[Submission, ...]


@dataclass(frozen=True)
class DesksPage:
    """The desks that were chosen; `students` and `measurements` are those to choose among."""

    desks: tuple[Desk, ...]
    students: tuple[User, ...]
    measurements: tuple[Measurement, ...]
    student: int | None
    measurement: int | None

    @property
    def submitted(self) -> int:
        """How many curves are listed."""
        return sum(len(desk.submissions) for desk in self.desks)

    @property
    def empty(self) -> int:
        """How many students are listed with nothing."""
        return sum(not desk.submissions for desk in self.desks)


def desks_page(collaboration: Collaboration, reader: User, chosen: Mapping[str, str]) -> DesksPage:
    """The page in four queries. `chosen` may hold the keys of a student and a measurement: 404 for unknown ones."""
    curves = (
        seen_by(Curve.objects.filter(theory__collaboration=collaboration), reader)
        .filter(theory__desk__isnull=False, state=Curve.State.SUBMITTED)
        .select_related("theory__desk", "measurement", "submitted_by")
        .defer("table")
        .order_by("-submitted_at", "-pk")
    )
    submitted: dict[User, list[Curve]] = {
        user: []
        for user in User.objects.filter(
            memberships__collaboration=collaboration, memberships__role=Role.STUDENT
        )
    }
    for curve in curves:
        # Also of who is a student no more: the desk stays theirs.
        submitted.setdefault(_desk(curve), []).append(curve)
    measurements = tuple(seen_by(Measurement.objects.filter(collaboration=collaboration), reader))
    students = sorted(submitted, key=lambda user: (str(user).casefold(), user.pk))
    student = _among([user.pk for user in students], chosen.get("student", ""))
    measurement = _among([row.pk for row in measurements], chosen.get("measurement", ""))
    verdicts = _newest_verdicts(collaboration, reader)
    desks = tuple(
        Desk(
            user,
            tuple(
                Submission(curve, verdicts.get(curve.pk))
                for curve in submitted[user]
                if measurement in {None, curve.measurement_id}
            ),
        )
        for user in students
        if student in {None, user.pk}
    )
    return DesksPage(desks, tuple(students), measurements, student, measurement)


def desks_csv(page: DesksPage) -> str:
    """One row a submitted curve, and one for each student without any."""
    return csv_text(COLUMNS, _rows(page))


def _rows(page: DesksPage) -> Iterator[tuple[Cell, ...]]:
    for desk in page.desks:
        if not desk.submissions:
            yield (str(desk.student), *[None] * (len(COLUMNS) - 1))
        for submission in desk.submissions:
            curve = submission.curve
            yield (
                str(desk.student),
                curve.theory.name,
                curve.measurement.name,
                curve.version,
                _written(curve.submitted_at),
                str(curve.submitted_by),
                curve.file_sha256,
                *_cells(submission.verdict),
            )


def _cells(verdict: DeskVerdict | None) -> tuple[Cell, ...]:
    if verdict is None:
        return (None,) * 7
    release = f"{verdict.release_number}{' (withdrawn)' if verdict.is_withdrawn else ''}"
    return (
        verdict.word,
        verdict.rank,
        verdict.of,
        verdict.p_value,
        release,
        verdict.assessment,
        _written(verdict.ended_at),
    )


def _written(moment: datetime | None) -> str:
    return moment.astimezone(UTC).isoformat(timespec="seconds").replace("+00:00", "Z") if moment else ""


def _desk(curve: Curve) -> User:
    assert curve.theory.desk is not None
    return curve.theory.desk


def _among(keys: list[int], text: str) -> int | None:
    """The key that this text chooses, None for all."""
    if not text:
        return None
    for key in keys:
        if str(key) == text:
            return key
    raise Http404


def _newest_verdicts(collaboration: Collaboration, reader: User) -> dict[int, DeskVerdict]:
    """By curve. One query."""
    together = Verdict.objects.filter(assessment=OuterRef("assessment")).order_by().values("assessment")
    judged = Verdict.objects.filter(
        curve__theory__collaboration=collaboration,
        curve__theory__desk__isnull=False,
        assessment__status=Assessment.Status.DONE,
    )
    rows = (
        seen_by(judged, reader)
        .annotate(of=Subquery(together.annotate(count=Count("pk")).values("count")))
        .order_by(F("assessment__ended_at").desc(nulls_last=True), "-assessment")
        .values(
            "curve",
            "assessment",
            "assessment__ended_at",
            "assessment__settings__draws",
            "assessment__release__number",
            "assessment__release__state",
            "rank",
            "of",
            "p_value",
            "scale_p_value",
            "inside",
        )
    )
    newest: dict[int, DeskVerdict] = {}
    for row in rows:
        if row["curve"] not in newest:
            newest[row["curve"]] = _verdict(row)
    return newest


def _verdict(row: Mapping[str, Any]) -> DeskVerdict:
    return DeskVerdict(
        assessment=row["assessment"],
        release_number=row["assessment__release__number"],
        is_withdrawn=row["assessment__release__state"] == "withdrawn",
        ended_at=row["assessment__ended_at"],
        rank=row["rank"],
        of=row["of"],
        p_value=row["p_value"],
        scale_p_value=row["scale_p_value"],
        # An assessment may have asked for other levels; its p-value answers for each.
        is_inside=row["inside"].get(LEVEL_KEY, is_above(row["p_value"], LEVEL)),
        draws=row["assessment__settings__draws"] or DEFAULT_DRAWS,
    )
