"""What stands at a desk, and what is sealed, is told to nobody else by any overview."""

import re
from collections.abc import Callable
from datetime import timedelta

import pytest
from django.test import Client
from django.urls import reverse
from django.utils import timezone

from core.measurements.models import EarlyLook, Measurement, Release
from core.people.models import Collaboration, Role, User
from core.theories.models import Curve
from fits.overviews.comparison import columns_of
from fits.overviews.home import home_page
from fits.overviews.measurement import measurement_page
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]


def addresses(measurement: Measurement, theory: int, other: int) -> list[str]:
    """Every overview that lists rows."""
    collaboration = [measurement.collaboration_id]
    return [
        reverse("overviews:home"),
        reverse("overviews:collaboration", args=collaboration),
        reverse("overviews:comparison", args=collaboration),
        reverse("overviews:comparison_csv", args=collaboration),
        f"{reverse('overviews:separation', args=collaboration)}?first={theory}&second={other}",
        reverse("overviews:measurement", args=[measurement.pk]),
        reverse("overviews:pairs", args=[measurement.pk]),
        reverse("overviews:history_chart", args=[measurement.pk, "history", "csv"]),
    ]


@pytest.fixture
def desks(make: Maker, release: Release, curve: Curve, rival: Curve) -> dict[str, User]:
    """Two students with two theories each at their desks, judged; and the shared ones, judged later."""
    found = {}
    newer = make.release(release.measurement, 2)
    for name in ("Ann", "Ben"):
        student = found[name] = make.student(name)
        own = [
            make.curve(make.theory(f"{kind} of {name}", student), release.measurement, by=student)
            for kind in ("Bowl", "Trough")
        ]
        make.assessment(release, dict.fromkeys(own, 0.4), apart=[2.0])
        make.assessment(newer, dict.fromkeys(own, 0.4), apart=[2.0])
    shared = make.assessment(newer, {curve: 0.3, rival: 0.2}, apart=[2.0])
    make.report(shared, "What the survey says")
    return found


def seen(client: Client, measurement: Measurement, theory: int, other: int) -> str:
    return " ".join(client.get(address).content.decode() for address in addresses(measurement, theory, other))


def test_a_student_is_shown_their_own_desk_alone(
    signed_in: SignedIn, desks: dict[str, User], curve: Curve, rival: Curve
) -> None:
    pages = seen(signed_in(desks["Ann"]), curve.measurement, curve.theory_id, rival.theory_id)
    assert "Bowl of Ann" in pages
    for name in ("of Ben", "Parabolic floor", "Flat floor", "What the survey says"):
        assert name not in pages


@pytest.mark.parametrize("role", [Role.LEAD, Role.MEMBER, Role.OBSERVER])
def test_nobody_else_finds_a_desk_in_an_overview(
    signed_in: SignedIn, make: Maker, desks: dict[str, User], curve: Curve, role: Role
) -> None:
    reader = User.objects.create_user("reader@merrow.example")
    make.joined(reader, role)
    bowl, trough = desks["Ann"].desk_theories.order_by("name")
    pages = seen(signed_in(reader), curve.measurement, bowl.pk, trough.pk)
    assert "Parabolic floor" in pages
    assert "What the survey says" in pages
    assert " of Ann" not in pages
    assert " of Ben" not in pages


def test_the_newest_assessment_is_the_newest_of_ones_own_desk(
    desks: dict[str, User], measurement: Measurement
) -> None:
    page = measurement_page(measurement, desks["Ann"], with_drafts=False)
    assert [standing.theory_name for standing in page.standings] == ["Bowl of Ann", "Trough of Ann"]
    assert len(page.assessments) == 2


def test_a_lead_reads_a_students_theory_with_its_verdicts(
    signed_in: SignedIn, desks: dict[str, User], lead: User
) -> None:
    theory = desks["Ann"].desk_theories.first()
    assert theory is not None
    page = signed_in(lead).get(theory.get_absolute_url()).content.decode()
    assert "release 2</a>" in page


def calm(page: str) -> str:
    """A page without what differs between any two looks at it."""
    page = re.sub(r'name="csrfmiddlewaretoken" value="\w+"', "", page)
    return re.sub(r"<time .*?</time>", "", page)


def pages_of(client: Client, measurement: Measurement, theory: int, other: int) -> dict[str, tuple[int, str]]:
    answers = {
        address: client.get(address)
        for address in [
            *addresses(measurement, theory, other),
            reverse("overviews:theory", args=[theory]),
        ]
    }
    return {
        address: (answer.status_code, calm(answer.content.decode())) for address, answer in answers.items()
    }


@pytest.mark.parametrize("role", Role)
def test_data_and_verdicts_of_a_sealed_measurement_change_no_page(
    signed_in: SignedIn, make: Maker, collaboration: Collaboration, role: Role
) -> None:
    reader = User.objects.create_user("reader@merrow.example")
    make.joined(reader, role)
    desk = reader if role is Role.STUDENT else None
    sealed = make.sealed()
    curves = [make.curve(make.theory(name, desk), sealed, by=reader) for name in ("Bowl", "Trough")]
    client = signed_in(reader)
    theories = [curve.theory_id for curve in curves]
    client.get(reverse("overviews:home"))
    before = pages_of(client, sealed, *theories)
    for number in (1, 2):
        release = make.release(sealed, number)
        make.assessment(release, {curves[0]: 0.4, curves[1]: 0.001}, apart=[2.0])
    make.assessment(release, {}, status="running")
    make.withdrawn(release)
    make.release(sealed, None)
    assert pages_of(client, sealed, *theories) == before


@pytest.mark.parametrize("role", Role)
def test_a_draft_report_is_for_leads_alone_and_no_news(
    signed_in: SignedIn, make: Maker, release: Release, curve: Curve, role: Role
) -> None:
    reader = User.objects.create_user("reader@merrow.example")
    make.joined(reader, role)
    make.draft_report(make.assessment(release, {curve: 0.4}), "Half a thought")
    client = signed_in(reader)
    page = client.get(release.measurement.collaboration.get_absolute_url()).content.decode()
    assert ("Half a thought" in page) == (role is Role.LEAD)
    assert "Half a thought" not in client.get("/").content.decode()


def test_a_lead_who_looked_sees_data_and_verdicts(
    signed_in: SignedIn, make: Maker, lead: User, collaboration: Collaboration, curve: Curve
) -> None:
    sealed = make.sealed()
    make.assessment(make.release(sealed, 1), {make.curve(curve.theory, sealed): 0.4})
    assert sealed.pk not in [column.key for column in columns_of(collaboration, lead)]
    EarlyLook.objects.create(measurement=sealed, user=lead)
    assert sealed.pk in [column.key for column in columns_of(collaboration, lead)]
    assert "1 of 1 curve stays inside" in signed_in(lead).get(sealed.get_absolute_url()).content.decode()


def test_an_opening_is_news_and_shows_everything(
    signed_in: SignedIn, make: Maker, member: User, curve: Curve
) -> None:
    sealed = make.sealed()
    make.assessment(make.release(sealed, 1), {make.curve(curve.theory, sealed): 0.4})
    [news] = home_page(member, None)
    assert not [item for item in news.digest.new if sealed.name in (item.where, item.what)]
    # By its time: no job has to run.
    opening = timezone.now() - timedelta(minutes=1)
    Measurement.objects.filter(pk=sealed.pk).update(opens_at=opening)
    [news] = home_page(member, None)
    whats = {item.what: item.at for item in news.digest.new}
    assert whats[f"{sealed.name} opened"] == opening
    assert "Assessment of release 1" in whats
    assert "1 of 1 curve stays inside" in signed_in(member).get(sealed.get_absolute_url()).content.decode()


def test_a_sealed_measurement_is_listed_as_sealed(
    signed_in: SignedIn, make: Maker, member: User, collaboration: Collaboration
) -> None:
    make.sealed()
    page = signed_in(member).get(collaboration.get_absolute_url()).content.decode()
    assert '<span class="state">sealed</span>' in page
    assert "none published yet" not in page


def test_a_withdrawal_is_news_with_its_reason(
    make: Maker, member: User, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: 0.4})
    make.withdrawn(release, "The clock ran slow")
    [news] = home_page(member, None)
    assert [(item.what, item.detail) for item in news.digest.new] == [
        ("Release 1 withdrawn", "The clock ran slow")
    ]


def test_whoever_has_only_a_sealed_measurement_is_led_to_its_curves(
    make: Maker, lead: User, member: User, collaboration: Collaboration, measurement: Measurement
) -> None:
    Release.objects.all().delete()
    Measurement.objects.update(sealed_at=timezone.now())
    make.line.theory.curves.all().delete()
    [news] = home_page(lead, None)
    assert news.next_step is not None
    assert news.next_step.missing == "No curve is submitted yet."
