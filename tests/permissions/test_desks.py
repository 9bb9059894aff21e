"""Nobody but its student and the leads can tell from any answer what stands at a desk, nor that there is anything.

Two worlds differ in what one student brings alone. Every address is asked in both, as everybody else who is no lead;
the answers have to be the same to the last byte, and so have the e-mails of what is new.
"""

import re
import secrets
from collections.abc import Iterator
from dataclasses import dataclass, replace
from datetime import timedelta
from itertools import product

import pytest
from django.db import transaction
from django.test import Client
from django.urls import reverse
from django.utils import timezone
from pytest_django import DjangoDbBlocker

from core.people.models import User
from core.people.permissions import RULES
from core.theories import services
from core.theories.batch_rules import seen_now
from core.theories.models import Batch, BatchItem, Curve
from fits.assessments.services import request_assessment, request_features
from fits.talk.digest import Digest, Window, digest_of
from fits.talk.services import comment
from tests.browser.survey import SETTINGS, computed, curve_of
from tests.permissions.cases import KEYS
from tests.permissions.conftest import client_of
from tests.permissions.test_sealed import Answers, ask_all, difference
from tests.permissions.world import World, rows_at

pytestmark = pytest.mark.django_db

OTHERS = ("member", "other_student", "observer", "stranger")
# Who sends forms, too: the others are refused nearly all.
SENDER = "other_student"
KNOWING = ("student", "lead")
# These show a single result or report, whose row either is there for the reader or is not.
OF_ONE = re.compile(r"reports:(shared|report|print|preview|assessment_)")
# Enough to see that it is shown to those who may see it.
PAGES = re.compile(r"overviews:(home|collaboration|measurement|desks)$|talk:log$")


@dataclass(frozen=True)
class Worlds:
    """What everybody was answered and told by e-mail, by who asked: without what the student brings, and with it."""

    without: dict[str, Answers]
    with_it: dict[str, Answers]
    digests: dict[str, tuple[Digest, Digest]]


def bring(here: World, student: User) -> None:
    """A theory, versions of its curve, drafts, a batch, verdicts, features and talk, at this student's desk."""
    theory = services.create_theory(user=student, collaboration=here.collaboration, name="Secret floor")
    services.edit_theory(
        by=student, theory=theory, seen=0, name="My floor", proposed_by="", description="", reference=""
    )
    draft = curve_of(theory, here.measurement, student, stretch=1.0, version=None)
    curve = services.submit_curve(curve_of(theory, here.measurement, student, stretch=1.0, version=None))
    batch = Batch.objects.create(
        collaboration=here.collaboration, measurement=here.measurement, desk=student, uploaded_by=student
    )
    # Also under a name that a shared theory has.
    for order, name in enumerate((here.rows[None].theory.name, "Another of mine")):
        _item(batch, order, name, draft)
    services.submit_batch(batch, seen=seen_now(batch))
    for seed in (1, 2):
        made = request_assessment(
            user=student, release=here.release, curves=[curve], settings=SETTINGS, seed=seed
        )
    done = computed(made)
    request_features(user=student, assessment=done)
    lead = here.people["lead"]
    for by, on in ((student, theory), (lead, done)):
        comment(by=by, on=on, words="@Member of Merrow @Other_Student of Merrow: calm, and inside.")


def _item(batch: Batch, order: int, name: str, like: Curve) -> None:
    values = {key: getattr(like, key) for key in ("table", "points", "x_min", "x_max")}
    BatchItem.objects.create(batch=batch, order=order, name=name, source=name, **values)


@pytest.fixture(scope="module")
def worlds(shared_world: World, django_db_blocker: DjangoDbBlocker) -> Iterator[Worlds]:
    with pytest.MonkeyPatch.context() as patch, django_db_blocker.unblock(), transaction.atomic():
        now = timezone.now()
        patch.setattr(timezone, "now", lambda: now)
        patch.setattr(secrets, "randbelow", lambda bound: 1)
        neighbour = shared_world.people["other_student"]
        rows = shared_world.rows | {
            "other_student": rows_at(shared_world.release, neighbour, neighbour, "ef")
        }
        yield both(replace(shared_world, rows=rows))
        transaction.set_rollback(True)


def both(here: World) -> Worlds:
    """Ask in the one, then in the other."""
    clients = {who: client_of(here, who) for who in (*OTHERS, *KNOWING)}
    window = Window(timezone.now() - timedelta(days=1), timezone.now())
    # What the cases make where it is not there yet has to be there in both worlds.
    for route, who in product(RULES, clients):
        KEYS[route](here, who)

    def asked() -> dict[str, Answers]:
        return {who: _answers(here, who, client) for who, client in clients.items()}

    def digests() -> dict[str, Digest]:
        return {who: digest_of(here.people[who], window) for who in clients}

    without, told_without = asked(), digests()
    with transaction.atomic():
        bring(here, here.people["student"])
        with_it, told = asked(), digests()
        transaction.set_rollback(True)
    return Worlds(without, with_it, {who: (told_without[who], told[who]) for who in clients})


def _answers(here: World, who: str, client: Client) -> Answers:
    return ask_all(
        client,
        (
            (method, reverse(route, args=KEYS[route](here, who)))
            for route, methods in RULES.items()
            if (PAGES.match(route) if who in KNOWING else not OF_ONE.match(route))
            for method in methods
            if method == "GET" or who == SENDER
        ),
    )


@pytest.mark.parametrize("who", OTHERS)
def test_no_answer_tells_that_a_student_has_brought_anything(worlds: Worlds, who: str) -> None:
    without, with_it = worlds.without[who], worlds.with_it[who]
    assert len(without) > 40
    leaks = {
        question: difference(answer, with_it[question])
        for question, answer in without.items()
        if answer != with_it[question]
    }
    assert leaks == {}


@pytest.mark.parametrize("who", OTHERS)
def test_no_digest_tells_of_it(worlds: Worlds, who: str) -> None:
    without, with_it = worlds.digests[who]
    assert without == with_it


@pytest.mark.parametrize("who", KNOWING)
def test_its_student_and_the_leads_are_shown_it(worlds: Worlds, who: str) -> None:
    changed = [
        answer for question, answer in worlds.without[who].items() if answer != worlds.with_it[who][question]
    ]
    assert len(changed) >= 2
