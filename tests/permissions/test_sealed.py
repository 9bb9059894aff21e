"""Before a measurement opens, nobody but leads who looked can tell from any answer what its data and verdicts are, nor
that there are any.

Two worlds differ in nothing but what is behind the seal: one has no release at all, the other has releases, verdicts,
talk and entries in the log. Every address is asked in both, as everybody who is not to know; the answers have to be
the same to the last byte. What is asked about a row behind the seal has to be answered as about no row.
"""

import re
import secrets
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from datetime import timedelta
from itertools import product

import pytest
from django.db import transaction
from django.http import HttpResponseBase, StreamingHttpResponse
from django.test import Client
from django.urls import reverse
from django.utils import timezone
from pytest_django import DjangoDbBlocker

from core.measurements import services
from core.people.permissions import RULES, Action
from fits.talk.digest import Digest, Window, digest_of
from tests.permissions.cases import KEYS
from tests.permissions.conftest import client_of
from tests.permissions.sealed_world import Hidden, hide, sealed_world
from tests.permissions.world import World

pytestmark = pytest.mark.django_db

IGNORANT = ("lead", "member", "student", "observer", "stranger")
KNOWING = "second_lead"
# Those of the ignorant who may send forms about it: the others are refused nearly all.
SENDERS = ("lead", "member")
# What does not turn on who reads it is read by one of them for all.
READER = "member"
FROZEN = ("reports:report", "reports:shared")
TOKEN = re.compile(rb'name="csrfmiddlewaretoken" value="\w+"')
NUMBER = re.compile(r"\d+")
MOMENTS = ("Date", "Expires", "Set-Cookie")

Question = tuple[str, str]  # method and address


@dataclass(frozen=True)
class Answer:
    """All of an answer that does not differ from one moment to the next."""

    status: int
    headers: tuple[tuple[str, str], ...]
    body: bytes


Answers = dict[Question, Answer]


@dataclass(frozen=True)
class Questions:
    """About what all may see, and about rows behind the seal."""

    open: list[Question]
    hidden: list[Question]


@dataclass(frozen=True)
class Worlds:
    """What everybody was answered, by who asked; of the ignorant in both worlds.

    nowhere  about a row that is in neither world
    opened   about the hidden rows, to whoever may see them
    digests  without and with data
    """

    without: dict[str, Answers]
    with_data: dict[str, Answers]
    hidden: dict[str, Answers]
    nowhere: dict[str, Answer]
    opened: dict[str, Answers]
    digests: dict[str, tuple[Digest, Digest]]


def ask(client: Client, question: Question) -> Answer:
    """What it answers; what it changes is taken back."""
    method, address = question
    with transaction.atomic():
        answer = client.get(address) if method == "GET" else client.post(address, {})
        body = body_of(answer)
        transaction.set_rollback(True)
    headers = sorted((name, words) for name, words in answer.items() if name not in MOMENTS)
    if method == "POST":
        # The key of what was just made counts all rows of the site.
        headers = [(name, NUMBER.sub("", words) if name == "Location" else words) for name, words in headers]
    return Answer(answer.status_code, tuple(headers), body)


def body_of(answer: HttpResponseBase) -> bytes:
    if isinstance(answer, StreamingHttpResponse):
        return b"".join(answer)
    return TOKEN.sub(b"", getattr(answer, "content", b""))


def ask_all(client: Client, questions: Iterable[Question]) -> Answers:
    return {question: ask(client, question) for question in questions}


def questions_of(here: World, public: World, hidden: Hidden, who: str) -> Questions:
    """Each address with each method."""
    asked: dict[Question, None] = {}
    behind: dict[Question, None] = {}
    for route, methods in RULES.items():
        sent = [method for method in methods if method == "GET" or who in SENDERS]
        key = KEYS[route](public, who)
        hidden_key = KEYS[route](hidden.world, who)
        if hidden_key != key:
            behind |= {(method, reverse(route, args=hidden_key)): None for method in sent}
        if who == "stranger" and any(isinstance(rule.asks, Action) for rule in methods.values()):
            continue  # not there for them in any world
        if who != READER and (hidden_key != key or route.startswith(FROZEN)):
            continue  # a row of another measurement, or of a report that never changes
        for named in {key, KEYS[route](here, who)}:
            asked |= {(method, reverse(route, args=named)): None for method in sent}
    for said in hidden.comments:
        behind["POST", reverse("talk:remove", args=[said.pk])] = None
    return Questions(list(asked), list(behind))


@pytest.fixture(scope="module")
def worlds(shared_world: World, django_db_blocker: DjangoDbBlocker) -> Iterator[Worlds]:
    with pytest.MonkeyPatch.context() as patch, django_db_blocker.unblock(), transaction.atomic():
        now = timezone.now()
        patch.setattr(timezone, "now", lambda: now)
        patch.setattr(secrets, "randbelow", lambda bound: 1)
        yield both(shared_world)
        transaction.set_rollback(True)


def both(here: World) -> Worlds:
    """Ask in the one, then in the other."""
    public = sealed_world(here)
    clients = {who: client_of(here, who) for who in (*IGNORANT, KNOWING)}
    window = Window(timezone.now() - timedelta(days=1), timezone.now())

    def digests() -> dict[str, Digest]:
        return {who: digest_of(here.people[who], window) for who in clients}

    # What the cases make where it is not there yet has to be there in both worlds.
    for route, who, world in product(RULES, clients, (here, public)):
        KEYS[route](world, who)
    with transaction.atomic():
        hidden = hide(public)
        asked = {who: questions_of(here, public, hidden, who) for who in clients}
        with_data = {who: ask_all(clients[who], asked[who].open) for who in IGNORANT}
        behind = {who: ask_all(clients[who], asked[who].hidden) for who in IGNORANT}
        told = digests()
        opened = {KNOWING: _looked_through(clients[KNOWING], asked[KNOWING])}
        services.open_measurement(user=here.people["lead"], measurement=public.measurement)
        opened |= {who: _looked_through(clients[who], asked[who]) for who in ("member", "student")}
        transaction.set_rollback(True)
    without, told_without = {who: ask_all(clients[who], asked[who].open) for who in IGNORANT}, digests()
    nowhere = ("GET", reverse("measurements:release", args=[2**40]))
    return Worlds(
        without=without,
        with_data=with_data,
        hidden=behind,
        nowhere={who: ask(clients[who], nowhere) for who in IGNORANT},
        opened=opened,
        digests={who: (told_without[who], told[who]) for who in clients},
    )


def _looked_through(client: Client, questions: Questions) -> Answers:
    return ask_all(client, (question for question in questions.hidden if question[0] == "GET"))


def difference(one: Answer, other: Answer) -> str:
    """The first place at which two answers differ, for whoever has to find the leak."""
    pairs = enumerate(zip(one.body, other.body, strict=False))
    at = next((i for i, (a, b) in pairs if a != b), min(len(one.body), len(other.body)))
    around = slice(max(at - 60, 0), at + 60)
    return f"{one.status} {one.body[around]!r} against {other.status} {other.body[around]!r}"


@pytest.mark.parametrize("who", IGNORANT)
def test_no_answer_tells_that_there_is_anything_behind_a_seal(worlds: Worlds, who: str) -> None:
    without, with_data = worlds.without[who], worlds.with_data[who]
    assert len(without) > (60 if who in SENDERS else 3)
    leaks = {
        question: difference(answer, with_data[question])
        for question, answer in without.items()
        if answer != with_data[question]
    }
    assert leaks == {}


@pytest.mark.parametrize("who", IGNORANT)
def test_a_row_behind_a_seal_is_answered_as_one_that_is_not_there(worlds: Worlds, who: str) -> None:
    nowhere = worlds.nowhere[who]
    assert nowhere.status == 404
    assert len(worlds.hidden[who]) > 10
    leaks = {
        question: difference(nowhere, answer)
        for question, answer in worlds.hidden[who].items()
        if answer != nowhere
    }
    assert leaks == {}


@pytest.mark.parametrize("who", IGNORANT)
def test_no_digest_tells_of_what_is_behind_a_seal(worlds: Worlds, who: str) -> None:
    without, with_data = worlds.digests[who]
    assert without == with_data


def test_a_lead_who_looked_is_told_of_it_in_the_digest(worlds: Worlds) -> None:
    without, with_data = worlds.digests[KNOWING]
    assert without != with_data


@pytest.mark.parametrize("who", [KNOWING, "member", "student"])
def test_whoever_looked_and_everybody_once_it_is_open_is_shown_it(worlds: Worlds, who: str) -> None:
    missing = {address for (_, address), answer in worlds.opened[who].items() if answer.status == 404}
    # No features are found here: their files are not there for anybody.
    assert {address.rsplit("/", 1)[-1] for address in missing} <= {"features.json"}
    assert sum(answer.status == 200 for answer in worlds.opened[who].values()) > 8
