"""The log: who reads which entries, in what order and by which choice, and that every deed is told."""

import csv
import io
from datetime import UTC, datetime, timedelta

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse
from django.utils import timezone

from core.people.log import Deed, record
from core.people.models import Collaboration, LogEntry, User
from fits.assessments.models import Assessment
from fits.talk.log_page import AT_A_TIME, Place, in_words
from tests.talk.conftest import SignedIn

NOON = datetime(2026, 5, 3, 12, 0, tzinfo=UTC)


def write(
    collaboration: Collaboration, about: str, *, at: datetime = NOON, who: User | None = None, **more: object
) -> None:
    """An entry of this moment."""
    deed = more.pop("deed", Deed.ADDED_MEASUREMENT)
    entry = LogEntry(
        collaboration=collaboration, deed=Deed(str(deed)).name.lower(), about=about, at=at, who=who, **more
    )
    entry.save()


def many(collaboration: Collaboration, moments: list[datetime]) -> None:
    """An entry of each moment, about its place among them."""
    LogEntry.objects.bulk_create(
        LogEntry(collaboration=collaboration, deed="added_measurement", about=str(number), at=at)
        for number, at in enumerate(moments)
    )


def log_of(collaboration: Collaboration, query: str = "") -> str:
    return reverse("talk:log", args=[collaboration.pk]) + query


def abouts(client: Client, address: str) -> list[str]:
    """What the lines of the page are about, in its order."""
    answer = client.get(address)
    assert answer.status_code == 200
    return [line.about for line in answer.context["page"].lines]


def table(client: Client, collaboration: Collaboration, query: str = "") -> list[list[str]]:
    answer = client.get(reverse("talk:log_csv", args=[collaboration.pk]) + query)
    return list(csv.reader(io.StringIO(answer.getvalue().decode())))


@pytest.fixture
def told(collaboration: Collaboration, member: User, student: User, sealed: Assessment) -> None:
    """Something that all may read, something of a desk, and something sealed."""
    record(Deed.ADDED_THEORY, who=member, collaboration=collaboration, about="open")
    record(Deed.ADDED_THEORY, who=student, collaboration=collaboration, about="desk", desk=student)
    hidden = sealed.release.measurement
    record(Deed.PUBLISHED, who=None, collaboration=collaboration, about="sealed", hidden_with=hidden)


# ---- Who reads what ----


def test_a_lead_who_looked_reads_all_of_it(
    signed_in: SignedIn, collaboration: Collaboration, told: None, lead: User
) -> None:
    assert abouts(signed_in(lead), log_of(collaboration)) == ["sealed", "desk", "open"]


def test_a_lead_who_did_not_look_reads_nothing_of_what_is_sealed(
    signed_in: SignedIn, collaboration: Collaboration, told: None, second_lead: User
) -> None:
    client = signed_in(second_lead)
    assert abouts(client, log_of(collaboration)) == ["desk", "open"]
    assert [row[3] for row in table(client, collaboration)] == ["about", "desk", "open"]
    assert abouts(client, log_of(collaboration, "?text=sealed")) == []


def test_a_member_and_an_observer_read_what_is_shared(
    signed_in: SignedIn, collaboration: Collaboration, told: None, member: User, observer: User
) -> None:
    for user in (member, observer):
        assert abouts(signed_in(user), log_of(collaboration)) == ["open"]
        assert [row[3] for row in table(signed_in(user), collaboration)] == ["about", "open"]


def test_a_student_does_not_read_the_log_and_a_stranger_does_not_find_it(
    signed_in: SignedIn, collaboration: Collaboration, told: None, student: User, stranger: User
) -> None:
    for route in ("talk:log", "talk:log_csv"):
        address = reverse(route, args=[collaboration.pk])
        assert signed_in(student).get(address).status_code == 403
        assert signed_in(stranger).get(address).status_code == 404


def test_the_choice_of_people_names_nobody_whose_deeds_are_hidden(
    signed_in: SignedIn, collaboration: Collaboration, told: None, member: User, lead: User
) -> None:
    def offered(user: User) -> set[str]:
        field = signed_in(user).get(log_of(collaboration)).context["form"].fields["who"]
        return {str(person) for person in field.queryset}

    assert offered(member) == {"Mo Member"}
    assert offered(lead) == {"Mo Member", "Stu Student"}


def test_nothing_of_another_collaboration_is_read(
    signed_in: SignedIn, collaboration: Collaboration, member: User
) -> None:
    write(Collaboration.objects.create(name="Another lake"), "elsewhere")
    assert abouts(signed_in(member), log_of(collaboration)) == []


# ---- Choosing ----


@pytest.fixture
def history(collaboration: Collaboration, member: User, lead: User) -> None:
    write(collaboration, "first", at=NOON, who=lead)
    write(collaboration, "second", at=NOON + timedelta(days=1), who=member)
    write(collaboration, "third", at=NOON + timedelta(days=2), who=member, deed=Deed.JOINED)


@pytest.mark.parametrize(
    ("query", "found"),
    [
        ("", ["third", "second", "first"]),
        ("?what=joined", ["third"]),
        ("?since=2026-05-04", ["third", "second"]),
        ("?until=2026-05-04", ["second", "first"]),
        ("?since=2026-05-04&until=2026-05-04", ["second"]),
        ("?text=SEC", ["second"]),
        ("?text=%25", []),
        ("?what=joined&text=first", []),
    ],
)
def test_entries_are_chosen_by_what_when_and_about(
    signed_in: SignedIn,
    collaboration: Collaboration,
    member: User,
    history: None,
    query: str,
    found: list[str],
) -> None:
    assert abouts(signed_in(member), log_of(collaboration, query)) == found
    assert [row[3] for row in table(signed_in(member), collaboration, query)[1:]] == found


def test_entries_are_chosen_by_who(
    signed_in: SignedIn, collaboration: Collaboration, member: User, lead: User, history: None
) -> None:
    assert abouts(signed_in(member), log_of(collaboration, f"?who={lead.pk}")) == ["first"]


@pytest.mark.parametrize(
    "query", ["?since=soon", "?who=0", "?what=nothing", "?since=2026-05-04&until=2026-05-03"]
)
def test_a_choice_that_cannot_be_read_is_said_and_never_taken_for_all(
    signed_in: SignedIn, collaboration: Collaboration, member: User, history: None, query: str
) -> None:
    client = signed_in(member)
    page = client.get(log_of(collaboration, query))
    assert "This could not be taken" in page.content.decode()
    assert page.context["page"].lines == ()
    assert client.get(reverse("talk:log_csv", args=[collaboration.pk]) + query).status_code == 400


# ---- Pages ----


def test_pages_hold_each_entry_once_also_those_of_one_moment(
    signed_in: SignedIn, collaboration: Collaboration, member: User
) -> None:
    count = 2 * AT_A_TIME + 50
    # All but a few at the same moment: neither lost nor told twice where a page ends among them.
    many(collaboration, [NOON if number > 20 else NOON - timedelta(hours=1) for number in range(count)])
    client, query, found = signed_in(member), "?text=", list[str]()
    sizes = []
    while query:
        page = client.get(log_of(collaboration, query)).context["page"]
        sizes.append(len(page.lines))
        found += [line.about for line in page.lines]
        query = f"?before={page.older}" if page.older else ""
    assert sizes == [AT_A_TIME, AT_A_TIME, 50]
    assert found == [str(number) for number in reversed(range(count))]


def test_an_older_page_stays_what_it_is_while_the_log_grows(
    signed_in: SignedIn, collaboration: Collaboration, member: User
) -> None:
    many(collaboration, [NOON + timedelta(minutes=number) for number in range(AT_A_TIME + 2)])
    client = signed_in(member)
    older = f"?before={client.get(log_of(collaboration)).context['page'].older}"
    assert abouts(client, log_of(collaboration, older)) == ["1", "0"]
    write(collaboration, "new", at=NOON + timedelta(days=1))
    assert abouts(client, log_of(collaboration, older)) == ["1", "0"]


def test_the_place_of_a_page_counts_nothing_that_is_hidden(
    signed_in: SignedIn, collaboration: Collaboration, member: User, sealed: Assessment
) -> None:
    def place() -> Place | None:
        older = signed_in(member).get(log_of(collaboration)).context["page"].older
        assert older is None or isinstance(older, Place)
        return older

    many(collaboration, [NOON] * AT_A_TIME)
    hidden = sealed.release.measurement
    for _ in range(5):
        write(collaboration, "sealed", hidden_with=hidden)
    assert place() is None
    write(collaboration, "one more")
    assert place() == Place(NOON, AT_A_TIME)


@pytest.mark.parametrize(
    "text", ["", "soon", "2026-05-03T12:00:00.000000_x", "2026-05-03_-1", "12_99999999999"]
)
def test_a_place_that_cannot_be_read_is_the_beginning(
    signed_in: SignedIn, collaboration: Collaboration, member: User, text: str
) -> None:
    assert Place.read(text) is None
    assert signed_in(member).get(log_of(collaboration, f"?before={text}")).status_code == 200


def test_the_page_asks_no_more_for_many_entries(
    signed_in: SignedIn, collaboration: Collaboration, member: User, lead: User
) -> None:
    client = signed_in(member)

    def asked() -> int:
        with CaptureQueriesContext(connection) as captured:
            client.get(log_of(collaboration))
        return len(captured)

    write(collaboration, "one", who=lead)
    few = asked()
    for number in range(10):
        write(collaboration, str(number), who=(lead, member)[number % 2])
    assert asked() == few


# ---- Words and tables ----


def test_the_page_says_who_did_what_to_what(
    signed_in: SignedIn, collaboration: Collaboration, member: User
) -> None:
    record(
        Deed.CHANGED_ROLE,
        who=member,
        collaboration=collaboration,
        about="<Obi>",
        url="/somewhere/",
        detail={"role_before": "member", "role": "observer"},
    )
    record(Deed.OPENED, who=None, collaboration=collaboration, about="Gauge 3")
    page = signed_in(member).get(log_of(collaboration)).content.decode()
    assert '<strong>Mo Member</strong> changed a role: <a href="/somewhere/">&lt;Obi&gt;</a>' in page
    assert "role: observer; role before: member" in page
    assert "<strong>Inradius</strong> opened a measurement: Gauge 3" in page


def test_the_table_is_safe_to_open_and_gives_times_in_utc(
    signed_in: SignedIn, collaboration: Collaboration, lead: User
) -> None:
    write(collaboration, '=HYPERLINK("http://x")', who=lead, url="/measurements/3/", detail={"a": "+1"})
    titles, row = table(signed_in(lead), collaboration)
    assert titles == ["time (UTC)", "who", "what", "about", "detail", "address"]
    assert row == [
        "2026-05-03T12:00:00Z",
        "Lin Lead",
        "added a measurement",
        '\'=HYPERLINK("http://x")',
        "a: +1",
        "http://testserver/measurements/3/",
    ]


def test_details_are_put_in_words() -> None:
    detail = {"left_out": ["A", "B"], "note": "", "many": True, "seal": {"opens_at": None, "points": 40}}
    assert in_words(detail) == "left out: A, B; many: yes; note: –; seal: opens at: –; points: 40"


def test_an_entry_is_of_the_moment_at_which_it_is_written(collaboration: Collaboration) -> None:
    before = timezone.now()
    entry = record(Deed.STARTED, who=None, collaboration=collaboration, about="it")
    assert before <= entry.at <= timezone.now()
