"""What is new for somebody, for an e-mail: only what they may see at the moment at which it is written."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from datetime import datetime
from typing import TypeVar

from django.db.models import F, Model, Q, QuerySet
from django.db.models.functions import Coalesce
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.access import in_overview, seen_by
from core.people.models import Membership, User
from core.people.permissions import PERMITTED, Action
from core.theories.models import Curve
from fits.assessments.models import Assessment
from fits.reports.models import Report
from fits.talk.models import Comment
from fits.talk.outcomes import outcomes
from fits.talk.subject import about, address, subject_of, with_subject

# Of each kind so many are told, newest first; the others are counted.
MOST = 20
MOST_LETTERS = 240

Row = TypeVar("Row", bound=Model)


@dataclass(frozen=True)
class Window:
    """A stretch of time, of which the end belongs to it."""

    since: datetime
    until: datetime

    def of(self, moment: str) -> Q:
        """Rows whose moment lies in it."""
        return Q(**{f"{moment}__gt": self.since, f"{moment}__lte": self.until})


@dataclass(frozen=True)
class Item:
    """One thing that happened: in which collaboration, what, the path of its page, and words that go with it."""

    where: str
    what: str
    path: str
    words: str = ""


@dataclass(frozen=True)
class Part:
    """What happened of one kind, newest first; `more` is the number of those that are not told."""

    heading: str
    items: tuple[Item, ...]
    more: int = 0


@dataclass(frozen=True)
class Digest:
    """All of it, what is meant for the reader first."""

    parts: tuple[Part, ...]

    @property
    def count(self) -> int:
        """How many things happened."""
        return sum(len(part.items) + part.more for part in self.parts)

    @property
    def places(self) -> list[str]:
        """The collaborations in which they did."""
        return sorted({item.where for part in self.parts for item in part.items})


def digest_of(reader: User, window: Window) -> Digest:
    """What happened in that time in the reader's collaborations, but for what they did themselves."""
    said = _comments(reader, window)
    mentioning = reader.mentions.values("comment")
    others = said.filter(_where_takes_part(reader)).exclude(pk__in=mentioning)
    parts = (
        _part("You are mentioned", said.filter(pk__in=mentioning), "created_at", _said),
        _part("Comments where you take part", others, "created_at", _said),
        _part("Measurements opened", _opened(reader, window), "moment", _opening),
        _part("Releases published", _published(reader, window), "published_at", _release),
        _part("Releases withdrawn", _withdrawn(reader, window), "withdrawn_at", _release),
        _assessed(reader, window),
        _part("Reports", _reports(reader, window), "frozen_at", _report),
        _part("Who joined", _joined(reader, window), "joined_at", _joining),
    )
    return Digest(tuple(replace(part, items=_in_lines(part.items)) for part in parts if part.items))


def _in_lines(items: Iterable[Item]) -> tuple[Item, ...]:
    """Each name in one line: with a break in it, it could look like another part of the e-mail."""
    return tuple(
        replace(item, where=_joined_up(item.where), what=_joined_up(item.what), words=_joined_up(item.words))
        for item in items
    )


def _joined_up(words: str) -> str:
    return " ".join(words.split())


def _part(heading: str, rows: QuerySet[Row], moment: str, told: Callable[[Row], Item]) -> Part:
    newest, more = _newest(rows, moment)
    return Part(heading, tuple(told(row) for row in newest), more)


def _newest(rows: QuerySet[Row], moment: str) -> tuple[list[Row], int]:
    newest = list(rows.order_by(F(moment).desc(), "-pk")[:MOST])
    return newest, rows.count() - MOST if len(newest) == MOST else 0


def _comments(reader: User, window: Window) -> QuerySet[Comment]:
    rows = Comment.objects.filter(window.of("created_at"), removed_at=None).exclude(author=reader)
    return with_subject(seen_by(rows, reader))


def _where_takes_part(reader: User) -> Q:
    """On what the reader brought, asked for, has a curve in or spoke about."""
    spoken = Comment.objects.filter(author=reader)
    curves = Curve.objects.filter(submitted_by=reader, state=Curve.State.SUBMITTED)
    judged = Assessment.curves.through._default_manager.filter(curve__in=curves.values("pk"))
    return (
        Q(theory__submitted_by=reader)
        | Q(theory__in=curves.values("theory"))
        | Q(theory__in=spoken.filter(theory__isnull=False).values("theory"))
        | Q(assessment__requested_by=reader)
        | Q(assessment__in=judged.values("assessment"))
        | Q(assessment__in=spoken.filter(assessment__isnull=False).values("assessment"))
    )


def _said(comment: Comment) -> Item:
    subject = about(subject_of(comment))
    return Item(
        where=str(comment.collaboration),
        what=f"{comment.author} on {subject}",
        path=address(comment),
        words=_beginning(comment.words),
    )


def _opened(reader: User, window: Window) -> QuerySet[Measurement]:
    # One that opens at its time is open before anybody has noted it.
    rows = Measurement.objects.annotate(moment=Coalesce("opened_at", "opens_at")).filter(window.of("moment"))
    return in_overview(rows.exclude(opened_by=reader).select_related("collaboration"), reader)


def _opening(measurement: Measurement) -> Item:
    what = f"{measurement}: its data and the verdicts on them are shown now"
    return Item(str(measurement.collaboration), what, measurement.get_absolute_url())


def _published(reader: User, window: Window) -> QuerySet[Release]:
    rows = _releases(reader, window.of("published_at"))
    return rows.filter(state=Release.State.PUBLISHED).exclude(created_by=reader)


def _withdrawn(reader: User, window: Window) -> QuerySet[Release]:
    return _releases(reader, window.of("withdrawn_at")).exclude(withdrawn_by=reader)


def _releases(reader: User, told: Q) -> QuerySet[Release]:
    rows = in_overview(Release.objects.filter(told), reader)
    return rows.select_related("measurement__collaboration").only(
        "number", "points", "withdrawal_reason", "measurement__name", "measurement__collaboration__name"
    )


def _release(release: Release) -> Item:
    return Item(
        where=str(release.measurement.collaboration),
        what=f"{release.measurement}, {release}, {release.points} points",
        path=release.get_absolute_url(),
        words=_beginning(release.withdrawal_reason),
    )


def _assessed(reader: User, window: Window) -> Part:
    done = Assessment.objects.filter(
        window.of("ended_at"),
        status=Assessment.Status.DONE,
        release__state=Release.State.PUBLISHED,
    )
    rows = in_overview(done, reader).select_related("release__measurement__collaboration")
    few = rows.only(
        "release__number", "release__measurement__name", "release__measurement__collaboration__name"
    )
    newest, more = _newest(few, "ended_at")
    found = outcomes(assessment.pk for assessment in newest)
    items = tuple(
        Item(
            where=str(assessment.release.measurement.collaboration),
            what=about(assessment),
            path=assessment.get_absolute_url(),
            words=found.get(assessment.pk, ""),
        )
        for assessment in newest
    )
    return Part("Assessments done", items, more)


def _reports(reader: User, window: Window) -> QuerySet[Report]:
    readers = Membership.objects.filter(user=reader, role__in=PERMITTED[Action.READ_REPORTS])
    frozen = Report.objects.filter(window.of("frozen_at"), state=Report.State.FROZEN)
    rows = in_overview(frozen.filter(collaboration__in=readers.values("collaboration")), reader)
    return rows.exclude(author=reader).select_related("collaboration", "author").defer("words", "words_html")


def _report(report: Report) -> Item:
    what = f"“{report.title}” by {report.author}"
    return Item(str(report.collaboration), what, report.get_absolute_url())


def _joined(reader: User, window: Window) -> QuerySet[Membership]:
    rows = Membership.objects.filter(window.of("joined_at")).exclude(user=reader)
    return in_overview(rows.select_related("collaboration", "user"), reader)


def _joining(membership: Membership) -> Item:
    what = f"{membership.user}, {membership.get_role_display()}"
    path = reverse("people:people", args=[membership.collaboration_id])
    return Item(str(membership.collaboration), what, path)


def _beginning(words: str) -> str:
    """Only its beginning."""
    line = _joined_up(words)
    return line if len(line) <= MOST_LETTERS else f"{line[:MOST_LETTERS].rstrip()} …"
