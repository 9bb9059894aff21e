"""What happened in someone's collaborations, as far as they see it: releases published or withdrawn, sealed
measurements opened, assessments done, reports frozen, comments that mention them."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any, TypeVar

from django.db.models import F, Model, Q, QuerySet, Window
from django.db.models.functions import Coalesce, RowNumber
from django.urls import reverse
from django.utils import timezone

from core.measurements.models import Measurement, Release
from core.people.access import in_overview, seen_by
from core.people.models import User
from fits.assessments.models import Assessment
from fits.overviews.reports_seen import reports_seen
from fits.overviews.standings import Standing, standings_in
from fits.reports.models import Report
from fits.talk.models import Comment

# Of each kind so many a collaboration, newest first; what is older stands on the pages themselves.
MOST = 20
MOST_EARLIER = 5

Row = TypeVar("Row", bound=Model)


@dataclass(frozen=True)
class Group:
    """The names of those with one verdict, and a standing that shows it."""

    standing: Standing
    names: tuple[str, ...]


@dataclass(frozen=True)
class News:
    """Something that happened. `outcome` is the one line that an assessment comes to."""

    at: datetime
    what: str
    url: str
    where: str
    where_url: str
    detail: str
    outcome: tuple[Standing, ...] = ()

    @property
    def groups(self) -> list[Group]:
        """The outcome by verdict, those inside first."""
        found: list[Group] = []
        for word in ("inside", "inside, but off", "outside"):
            alike = [standing for standing in self.outcome if standing.word == word]
            if alike:
                found.append(Group(alike[0], tuple(_name(standing, self.outcome) for standing in alike)))
        return found


@dataclass(frozen=True)
class Digest:
    """The news of one collaboration, newest first: since the last look, and some of before it."""

    new: tuple[News, ...]
    earlier: tuple[News, ...]


def digests(reader: User, collaborations: Iterable[int], since: datetime | None) -> dict[int, Digest]:
    """The digest of each collaboration; everything is new to someone who never looked. Seven queries."""
    keys = list(collaborations)
    found: dict[int, list[News]] = {key: [] for key in keys}
    kinds = (_releases, _withdrawals, _openings, _assessments, _reports, _mentions)
    for kind in (found_of(reader, keys) for found_of in kinds):
        for collaboration, news in kind:
            found[collaboration].append(news)
    return {key: _digest(news, since) for key, news in found.items()}


def _digest(news: list[News], since: datetime | None) -> Digest:
    ordered = sorted(news, key=lambda item: item.at, reverse=True)
    new = tuple(item for item in ordered if since is None or item.at > since)
    return Digest(new=new, earlier=tuple(ordered[len(new) :][:MOST_EARLIER]))


def _releases(reader: User, collaborations: list[int]) -> list[tuple[int, News]]:
    path = "measurement__collaboration"
    published = Release.objects.filter(state=Release.State.PUBLISHED, **{f"{path}__in": collaborations})
    seen = in_overview(published, reader)
    rows = _newest(seen, path, "published_at", "number", "points", "measurement", "measurement__name")
    return [
        (
            row[path],
            News(
                at=row["published_at"],
                what=f"Release {row['number']}",
                url=reverse("measurements:release", args=[row["pk"]]),
                where=row["measurement__name"],
                where_url=reverse("overviews:measurement", args=[row["measurement"]]),
                detail=f"{row['points']} points",
            ),
        )
        for row in rows
    ]


def _withdrawals(reader: User, collaborations: list[int]) -> list[tuple[int, News]]:
    path = "measurement__collaboration"
    withdrawn = Release.objects.filter(state=Release.State.WITHDRAWN, **{f"{path}__in": collaborations})
    seen = in_overview(withdrawn, reader)
    rows = _newest(
        seen, path, "withdrawn_at", "number", "withdrawal_reason", "measurement", "measurement__name"
    )
    return [
        (
            row[path],
            News(
                at=row["withdrawn_at"],
                what=f"Release {row['number']} withdrawn",
                url=reverse("measurements:release", args=[row["pk"]]),
                where=row["measurement__name"],
                where_url=reverse("overviews:measurement", args=[row["measurement"]]),
                detail=row["withdrawal_reason"],
            ),
        )
        for row in rows
    ]


def _openings(reader: User, collaborations: list[int]) -> list[tuple[int, News]]:
    """Sealed measurements that opened: by a lead's word, or at their time, which needs nobody."""
    is_open = Q(opened_at__isnull=False) | Q(opens_at__lte=timezone.now())
    opened = Measurement.objects.filter(is_open, sealed_at__isnull=False, collaboration__in=collaborations)
    seen = in_overview(opened.annotate(opening=Coalesce("opened_at", "opens_at")), reader)
    return [
        (
            row["collaboration"],
            News(
                at=row["opening"],
                what=f"{row['name']} opened",
                url=reverse("overviews:measurement", args=[row["pk"]]),
                where="",
                where_url="",
                detail="it was sealed: its data and verdicts are shown now",
            ),
        )
        for row in _newest(seen, "collaboration", "opening", "name")
    ]


def _assessments(reader: User, collaborations: list[int]) -> list[tuple[int, News]]:
    path = "release__measurement__collaboration"
    done = Assessment.objects.filter(
        status=Assessment.Status.DONE,
        ended_at__isnull=False,
        release__state=Release.State.PUBLISHED,
        **{f"{path}__in": collaborations},
    )
    rows = _newest(
        in_overview(done, reader),
        path,
        "ended_at",
        "release__number",
        "release__measurement",
        "release__measurement__name",
    )
    outcomes = standings_in([row["pk"] for row in rows])
    return [
        (
            row[path],
            News(
                at=row["ended_at"],
                what=f"Assessment of release {row['release__number']}",
                url=reverse("reports:assessment", args=[row["pk"]]),
                where=row["release__measurement__name"],
                where_url=reverse("overviews:measurement", args=[row["release__measurement"]]),
                detail="",
                outcome=tuple(outcomes.get(row["pk"], [])),
            ),
        )
        for row in rows
    ]


def _reports(reader: User, collaborations: list[int]) -> list[tuple[int, News]]:
    frozen = reports_seen(reader, collaborations).filter(state=Report.State.FROZEN)
    rows = _newest(frozen, "collaboration", "frozen_at", "title", "author__name", "author__email")
    return [
        (
            row["collaboration"],
            News(
                at=row["frozen_at"],
                what=f"Report: {row['title']}",
                url=reverse("reports:report", args=[row["pk"]]),
                where="",
                where_url="",
                detail=f"by {_author(row)}",
            ),
        )
        for row in rows
    ]


def _mentions(reader: User, collaborations: list[int]) -> list[tuple[int, News]]:
    naming = Comment.objects.filter(mentions__user=reader, removed_at=None, collaboration__in=collaborations)
    rows = _newest(
        seen_by(naming.exclude(author=reader), reader),
        "collaboration",
        "created_at",
        "author__name",
        "author__email",
        "theory",
        "theory__name",
        "assessment",
        "measurement__name",
    )
    found = []
    for row in rows:
        route, key = ("overviews:theory", "theory") if row["theory"] else ("reports:assessment", "assessment")
        url = reverse(route, args=[row[key]])
        news = News(
            at=row["created_at"],
            what="You are mentioned",
            url=f"{url}#comment-{row['pk']}",
            where=row["theory__name"] or row["measurement__name"],
            where_url=url,
            detail=f"by {_author(row)}",
        )
        found.append((row["collaboration"], news))
    return found


def _newest(rows: QuerySet[Row], collaboration: str, moment: str, *fields: str) -> list[Mapping[str, Any]]:
    """These fields of the newest MOST rows of each collaboration."""
    newest_first = [F(moment).desc(), F("pk").desc()]
    place = Window(RowNumber(), partition_by=[F(collaboration)], order_by=newest_first)
    newest = rows.annotate(place=place).filter(place__lte=MOST)
    return list(newest.values("pk", collaboration, moment, *fields))


def _author(row: Mapping[str, Any]) -> str:
    """As everywhere: never a whole address."""
    return str(row["author__name"] or row["author__email"].partition("@")[0])


def _name(standing: Standing, together: tuple[Standing, ...]) -> str:
    """The theory's name, with the version where two curves of it were judged together."""
    same = sum(other.theory == standing.theory for other in together)
    return standing.theory_name if same == 1 else f"{standing.theory_name}, version {standing.version}"
