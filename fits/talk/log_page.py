"""What the page of the log shows, and the log as a table."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from django.db.models import QuerySet

from core.measurements.export import cell
from core.people.access import seen_by
from core.people.log import Deed
from core.people.models import Collaboration, LogEntry, User

AT_A_TIME = 100
COLUMNS = ("time (UTC)", "who", "what", "about", "detail", "address")
NOBODY = "Inradius"  # what happened because its time had come, or because something else happened


@dataclass(frozen=True)
class LogLine:
    """An entry in words."""

    at: datetime
    who: str
    what: str
    about: str
    url: str
    detail: str


@dataclass(frozen=True)
class Place:
    """A place in the log, newest first: after the first `taken` of the entries of this moment.

    No keys: they count what is hidden as well.
    """

    at: datetime
    taken: int

    def __str__(self) -> str:
        return f"{self.at.astimezone(UTC):%Y-%m-%dT%H:%M:%S.%f}_{self.taken}"

    @staticmethod
    def read(text: str) -> "Place | None":
        """The place that such a text names; None where it names none."""
        moment, _, taken = text.partition("_")
        try:
            place = Place(datetime.fromisoformat(moment).replace(tzinfo=UTC), int(taken))
        except (ValueError, OverflowError):
            return None
        return place if 0 <= place.taken <= 10**6 else None


@dataclass(frozen=True)
class LogPage:
    """Some lines, newest first, and the place of those that follow."""

    lines: tuple[LogLine, ...]
    older: Place | None


def entries_of(collaboration: Collaboration, reader: User) -> QuerySet[LogEntry]:
    """The entries that the reader may see, newest first."""
    return seen_by(LogEntry.objects.filter(collaboration=collaboration), reader).select_related("who")


def people_in(entries: QuerySet[LogEntry]) -> QuerySet[User]:
    """Who did what these entries tell; nobody whose deeds are all hidden."""
    return User.objects.filter(pk__in=entries.order_by().values("who")).order_by("name", "email")


def log_page(entries: QuerySet[LogEntry], place: Place | None) -> LogPage:
    """So many entries from a place on. One query."""
    start = 0
    if place is not None:
        entries, start = entries.filter(at__lte=place.at), place.taken
    found = list(entries[start : start + AT_A_TIME + 1])
    shown = found[:AT_A_TIME]
    older = None
    if len(found) > AT_A_TIME:
        last = shown[-1].at
        taken = sum(entry.at == last for entry in shown)
        # All that is shown is of the moment at which the page began.
        if place is not None and last == place.at:
            taken += place.taken
        older = Place(last, taken)
    return LogPage(tuple(line_of(entry) for entry in shown), older)


def line_of(entry: LogEntry) -> LogLine:
    """An entry in words; the deed in those of `Deed`, as far as it still knows it."""
    name = entry.deed.upper()
    return LogLine(
        at=entry.at,
        who=str(entry.who) if entry.who else NOBODY,
        what=Deed[name].value if name in Deed.__members__ else entry.deed.replace("_", " "),
        about=entry.about,
        url=entry.url,
        detail=in_words(entry.detail),
    )


def in_words(detail: Mapping[str, Any]) -> str:
    """The detail of an entry: "label: the class of May; role: member"."""
    # In an order of its own: not every database keeps that in which it was written.
    return "; ".join(f"{name.replace('_', ' ')}: {_value(value)}" for name, value in sorted(detail.items()))


def csv_lines(entries: QuerySet[LogEntry], site: str) -> Iterator[str]:
    """The log as CSV, safe to open in a spreadsheet; addresses begin with that of the site."""
    yield _row(*COLUMNS)
    for entry in entries.iterator(chunk_size=1000):
        line = line_of(entry)
        at = line.at.astimezone(UTC).isoformat(timespec="seconds").replace("+00:00", "Z")
        address = f"{site}{line.url}" if line.url else ""
        yield _row(at, line.who, line.what, line.about, line.detail, address)


def _row(*words: str) -> str:
    return ",".join(cell(word) for word in words) + "\r\n"


def _value(value: Any) -> str:
    if isinstance(value, Mapping):
        return in_words(value)
    if isinstance(value, list):
        return ", ".join(_value(item) for item in value)
    if value is None or value == "":
        return "–"
    if isinstance(value, bool):
        return "yes" if value else "no"
    return str(value)
