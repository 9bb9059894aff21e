"""How the theories stand, on the page of a collaboration."""

from collections.abc import Callable
from datetime import datetime

import pytest
from django.test import Client

from core.measurements.models import Release
from core.people.models import Collaboration, User
from core.theories.models import Curve
from fits.overviews.collaboration import Cell, collaboration_page
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]
Ago = Callable[[int], datetime]


@pytest.fixture
def cell(collaboration: Collaboration, lead: User) -> Callable[[str], Cell]:
    """The cell of a theory on the first measurement."""

    def found(theory: str) -> Cell:
        rows = {row.theory.name: row for row in collaboration_page(collaboration, lead).theories}
        return rows[theory].cells[0]

    return found


Find = Callable[[str], Cell]


def test_a_theory_stands_by_rank_and_verdict(
    cell: Find, make: Maker, release: Release, curve: Curve, rival: Curve
) -> None:
    make.assessment(release, {curve: 0.4, rival: 0.01})
    best, second = cell("Parabolic floor").standing, cell("Flat floor").standing
    assert best is not None
    assert second is not None
    assert (best.rank, best.of, best.word) == (1, 2, "inside")
    assert (second.rank, second.of, second.word) == (2, 2, "outside")


def test_a_curve_that_the_scale_set_rejects_is_inside_but_off(
    cell: Find, make: Maker, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: 0.4}, scale_p_value=0.05)
    standing = cell("Parabolic floor").standing
    assert standing is not None
    assert standing.word == "inside, but off"


def test_the_newest_done_assessment_of_the_newest_release_counts(
    cell: Find, make: Maker, release: Release, curve: Curve, ago: Ago
) -> None:
    second = make.release(release.measurement, 2)
    newest = make.assessment(second, {curve: 0.2}, ended_at=ago(2))
    make.assessment(second, {curve: 0.3}, ended_at=ago(3))
    make.assessment(second, {}, status="failed")
    make.assessment(release, {curve: 0.4})
    standing = cell("Parabolic floor").standing
    assert standing is not None
    assert standing.assessment == newest.pk


def test_who_tries_one_curve_takes_nobody_elses_verdict_off_the_page(
    cell: Find, make: Maker, release: Release, curve: Curve, rival: Curve, ago: Ago
) -> None:
    both = make.assessment(release, {curve: 0.4, rival: 0.02}, ended_at=ago(2))
    make.assessment(release, {rival: 0.03}, ended_at=ago(1))
    found = [cell(name).standing for name in ("Parabolic floor", "Flat floor")]
    assert [standing.assessment for standing in found if standing] == [both.pk, both.pk]


def test_a_new_release_leaves_theories_unjudged(
    cell: Find, make: Maker, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: 0.4})
    make.release(release.measurement, 2)
    found = cell("Parabolic floor")
    assert found.standing is None
    assert found.newest is not None


def test_a_theory_without_a_curve_has_none(cell: Find, make: Maker) -> None:
    make.theory("Triangular floor")
    assert cell("Triangular floor") == Cell(standing=None, newest=None)


def test_of_two_versions_judged_together_the_newer_counts(
    cell: Find, make: Maker, release: Release, curve: Curve
) -> None:
    second = make.curve(curve.theory, curve.measurement, 2)
    make.assessment(release, {curve: 0.4, second: 0.01})
    standing = cell("Parabolic floor").standing
    assert standing is not None
    assert (standing.version, standing.word) == (2, "outside")


def test_a_version_newer_than_the_judged_one_is_named(
    cell: Find, make: Maker, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: 0.4})
    make.curve(curve.theory, curve.measurement, 2)
    unjudged = cell("Parabolic floor").unjudged
    assert unjudged is not None
    assert unjudged.version == 2


def test_the_p_value_answers_where_the_level_was_not_asked_for(
    cell: Find, make: Maker, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: 0.03}).verdicts.update(inside={"0.99": True})
    standing = cell("Parabolic floor").standing
    assert standing is not None
    assert standing.word == "outside"


def test_the_page_links_verdicts_to_their_assessment_and_names_who_is_here(
    signed_in: SignedIn,
    member: User,
    collaboration: Collaboration,
    make: Maker,
    release: Release,
    curve: Curve,
) -> None:
    assessment = make.assessment(release, {curve: 0.4})
    report = make.report(assessment, "What the survey says")
    page = signed_in(member).get(collaboration.get_absolute_url()).content.decode()
    assert assessment.get_absolute_url() in page
    assert report.get_absolute_url() in page
    assert "rank 1 of 1" in page
    assert "Group B (made up)" in page
    assert "Lin Lead" in page
    assert "Mo Member" in page


def test_curves_are_counted_without_drafts(
    collaboration: Collaboration, lead: User, make: Maker, curve: Curve
) -> None:
    make.curve(curve.theory, curve.measurement, 2)
    make.curve(curve.theory, curve.measurement, None)
    assert collaboration_page(collaboration, lead).theories[0].curves == 2


def test_an_empty_collaboration_shows_its_page(
    signed_in: SignedIn, lead: User, collaboration: Collaboration
) -> None:
    answer = signed_in(lead).get(collaboration.get_absolute_url())
    assert "None yet." in answer.content.decode()
