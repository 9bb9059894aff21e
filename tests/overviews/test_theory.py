"""Where a theory predicts what, and how it fares."""

from collections.abc import Callable
from datetime import datetime

from django.test import Client
from django.urls import reverse

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve, Theory
from fits.overviews.standings import standings_of_theory
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]
Ago = Callable[[int], datetime]


def test_a_theory_says_who_proposed_it_and_where(signed_in: SignedIn, member: User, theory: Theory) -> None:
    page = signed_in(member).get(theory.get_absolute_url()).content.decode()
    assert "Group B (made up)" in page
    assert "Chrystal 1905" in page
    assert reverse("theories:new_curve", args=[theory.pk]) in page


def test_curves_stand_newest_version_first(
    signed_in: SignedIn, member: User, make: Maker, curve: Curve
) -> None:
    second = make.curve(curve.theory, curve.measurement, 2)
    page = signed_in(member).get(curve.theory.get_absolute_url()).content.decode()
    assert page.index(second.get_absolute_url()) < page.index(curve.get_absolute_url())
    assert "Mo Member" in page


def test_a_theory_fares_by_release_newest_first(make: Maker, release: Release, curve: Curve) -> None:
    make.assessment(release, {curve: 0.4})
    make.assessment(make.release(release.measurement, 2), {curve: 0.01})
    found = standings_of_theory(curve.theory_id, make.lead)
    assert [(row.release_number, row.word) for row in found] == [(2, "outside"), (1, "inside")]


def test_the_newest_assessment_that_judged_it_counts(
    make: Maker, release: Release, curve: Curve, rival: Curve, ago: Ago
) -> None:
    make.assessment(release, {curve: 0.4}, ended_at=ago(3))
    newer = make.assessment(release, {rival: 0.5, curve: 0.01}, ended_at=ago(2))
    make.assessment(release, {rival: 0.5}, ended_at=ago(1))
    [standing] = standings_of_theory(curve.theory_id, make.lead)
    assert (standing.assessment, standing.rank, standing.of) == (newer.pk, 2, 2)


def test_a_theory_without_verdicts_says_so(signed_in: SignedIn, member: User, theory: Theory) -> None:
    page = signed_in(member).get(theory.get_absolute_url()).content.decode()
    assert "Not judged yet." in page
    assert "No curve is submitted yet." in page
