"""All desks in one table: what each student submitted and when, and the newest verdict of it."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime

from django.http import Http404

from core.measurements.models import Measurement
from core.people.access import seen_by
from core.people.models import Collaboration, Role, User
from core.theories.models import Curve
from fits.overviews.standings import Standing, standings_at_desks
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
class Submission:
    """A submitted curve, and what the newest assessment that judged it says; no verdict where none was computed or its
    measurement is sealed for the reader."""

    curve: Curve
    verdict: Standing | None


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
    verdicts = standings_at_desks(collaboration, reader)
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


def _cells(verdict: Standing | None) -> tuple[Cell, ...]:
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
