"""What is new since someone last looked."""

from collections.abc import Callable
from datetime import datetime

import pytest
from django.test import Client
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, Membership, Role, User
from core.theories.models import Curve
from fits.overviews.home import CollaborationNews
from fits.overviews.look import note_look
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]
Ago = Callable[[int], datetime]


@pytest.fixture
def look(signed_in: SignedIn) -> Callable[[User], list[CollaborationNews]]:
    """Opens the home page and returns what it shows."""

    def found(user: User) -> list[CollaborationNews]:
        answer = signed_in(user).get(reverse("overviews:home"))
        assert answer.status_code == 200
        shown: list[CollaborationNews] = answer.context["found"]
        return shown

    return found


Look = Callable[[User], list[CollaborationNews]]


def test_everything_is_new_to_someone_who_never_looked(look: Look, member: User, release: Release) -> None:
    [news] = look(member)
    assert [item.what for item in news.digest.new] == ["Release 1"]
    assert news.digest.earlier == ()


def test_what_was_seen_is_earlier_at_the_next_look(look: Look, member: User, release: Release) -> None:
    look(member)
    [news] = look(member)
    assert news.digest.new == ()
    assert [item.what for item in news.digest.earlier] == ["Release 1"]


def test_what_happens_after_a_look_is_new(
    look: Look, member: User, make: Maker, measurement: Measurement
) -> None:
    look(member)
    make.release(measurement, 2)
    [news] = look(member)
    assert [item.what for item in news.digest.new] == ["Release 2"]


def test_a_look_moves_the_moment_forward_only(member: User, ago: Ago) -> None:
    later, earlier = ago(1), ago(2)
    note_look(member, later)
    note_look(member, earlier)
    member.refresh_from_db()
    assert member.last_looked_at == later


def test_the_moment_of_the_last_look_is_shown(signed_in: SignedIn, member: User, release: Release) -> None:
    User.objects.filter(pk=member.pk).update(last_looked_at=datetime.fromisoformat("2026-03-04T05:06:00Z"))
    page = signed_in(User.objects.get(pk=member.pk)).get(reverse("overviews:home")).content.decode()
    assert "4 Mar 2026, 05:06" in page


def test_one_persons_look_leaves_the_others_news_alone(
    look: Look, lead: User, member: User, release: Release
) -> None:
    look(lead)
    [news] = look(member)
    assert len(news.digest.new) == 1


def test_releases_assessments_and_reports_stand_newest_first(
    look: Look, member: User, make: Maker, release: Release, curve: Curve, ago: Ago
) -> None:
    make.release(release.measurement, 2, published_at=ago(3))
    assessment = make.assessment(release, {curve: 0.4}, ended_at=ago(2))
    make.report(assessment, "What the survey says", frozen_at=ago(1))
    [news] = look(member)
    assert [item.what for item in news.digest.new] == [
        "Release 1",
        "Report: What the survey says",
        "Assessment of release 1",
        "Release 2",
    ]


def test_no_whole_address_stands_among_the_news(
    look: Look, lead: User, member: User, make: Maker, release: Release, curve: Curve, ago: Ago
) -> None:
    User.objects.filter(pk=lead.pk).update(name="")
    make.report(make.assessment(release, {curve: 0.4}), "What the survey says", frozen_at=ago(1))
    [news] = look(member)
    assert "by lead" in {item.detail for item in news.digest.new}


def test_an_assessment_names_who_is_inside_and_who_outside(
    look: Look, member: User, make: Maker, release: Release, curve: Curve, rival: Curve
) -> None:
    make.assessment(release, {curve: 0.4, rival: 0.001})
    [news] = look(member)
    groups = news.digest.new[0].groups
    assert [(group.standing.word, group.names) for group in groups] == [
        ("inside", ("Parabolic floor",)),
        ("outside", ("Flat floor",)),
    ]


def test_two_curves_of_one_theory_are_told_apart_by_version(
    look: Look, member: User, make: Maker, release: Release, curve: Curve
) -> None:
    second = make.curve(curve.theory, curve.measurement, 2)
    make.assessment(release, {second: 0.4, curve: 0.001})
    [news] = look(member)
    groups = news.digest.new[0].groups
    assert [group.names for group in groups] == [
        ("Parabolic floor, version 2",),
        ("Parabolic floor, version 1",),
    ]


@pytest.mark.parametrize("status", ["queued", "running", "failed", "cancelled"])
def test_an_assessment_that_is_not_done_is_no_news(
    look: Look, member: User, make: Maker, release: Release, status: str
) -> None:
    make.assessment(release, {}, status=status)
    [news] = look(member)
    assert [item.what for item in news.digest.new] == ["Release 1"]


def test_a_draft_is_no_news(look: Look, lead: User, make: Maker, measurement: Measurement) -> None:
    make.release(measurement, None)
    [news] = look(lead)
    assert [item.what for item in news.digest.new] == ["Release 1"]


def test_nothing_of_other_collaborations_is_shown(
    look: Look, stranger: User, lead: User, release: Release
) -> None:
    other = Collaboration.objects.create(name="Wave tank class")
    Membership.objects.create(user=stranger, collaboration=other, role=Role.LEAD)
    [news] = look(stranger)
    assert news.collaboration == other
    assert news.digest.new == ()


def test_the_collaboration_with_the_newest_news_comes_first(
    look: Look, member: User, make: Maker, release: Release, ago: Ago
) -> None:
    other = Collaboration.objects.create(name="A wave tank class")
    Membership.objects.create(user=member, collaboration=other)
    assert [news.collaboration.name for news in look(member)] == ["Lake Merrow survey", "A wave tank class"]
    make.release(make.measurement(other), 1, published_at=release.published_at and ago(-1))
    assert [news.collaboration.name for news in look(member)] == ["A wave tank class", "Lake Merrow survey"]


def test_only_the_newest_twenty_of_a_kind_are_listed(
    look: Look, member: User, make: Maker, measurement: Measurement
) -> None:
    for number in range(2, 25):
        make.release(measurement, number)
    [news] = look(member)
    assert [item.what for item in news.digest.new] == [f"Release {number}" for number in range(24, 4, -1)]


def test_someone_without_a_collaboration_is_told_what_to_do(signed_in: SignedIn, stranger: User) -> None:
    page = signed_in(stranger).get(reverse("overviews:home")).content.decode()
    assert reverse("people:new_collaboration") in page
    assert stranger.email in page


def test_a_lead_is_led_from_step_to_step(
    look: Look, lead: User, make: Maker, release: Release, curve: Curve
) -> None:
    class_ = Collaboration.objects.create(name="Wave tank class")
    Membership.objects.create(user=lead, collaboration=class_, role=Role.LEAD)

    def next_url() -> str:
        step = {news.collaboration: news.next_step for news in look(lead)}[class_]
        return step.url if step else ""

    assert next_url() == reverse("measurements:new_measurement", args=[class_.pk])
    tank = make.measurement(class_)
    assert next_url() == reverse("measurements:upload", args=[tank.pk])
    first = make.release(tank, 1)
    assert next_url() == reverse("theories:new_theory", args=[class_.pk])
    theory = class_.theories.create(name="One resonance", submitted_by=lead)
    assert next_url() == reverse("theories:new_curve", args=[theory.pk])
    line = make.curve(theory, tank)
    assert next_url() == reverse("assessments:new", args=[first.pk])
    make.assessment(first, {line: 0.5})
    assert next_url() == ""


def test_a_member_is_not_sent_where_only_leads_may_go(
    look: Look, member: User, collaboration: Collaboration
) -> None:
    [news] = look(member)
    assert news.next_step is not None
    assert news.next_step.url == ""


def test_a_name_with_tags_is_shown_as_plain_words(
    signed_in: SignedIn, member: User, release: Release
) -> None:
    Collaboration.objects.update(name="<b>Merrow</b>")
    page = signed_in(member).get(reverse("overviews:home")).content.decode()
    assert "&lt;b&gt;Merrow" in page
    assert "<b>Merrow" not in page
