"""Starting, following and cancelling an assessment in the browser."""

from collections.abc import Callable

from django.test import Client
from django.urls import reverse

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.models import Assessment

SignedIn = Callable[[User], Client]
FORM = {
    "levels": "67, 90, 95, 99",
    "resolution_choice": "default",
    "shrinkage": "monotone",
    "radius": "calibrated",
    "draws": "500",
    "seed": "7",
}


def test_a_member_starts_an_assessment(
    signed_in: SignedIn, member: User, release: Release, curve: Curve
) -> None:
    client = signed_in(member)
    address = reverse("assessments:new", args=[release.pk])
    assert b"Parabolic floor" in client.get(address).content
    answer = client.post(address, FORM | {"curves": [curve.pk]})
    assessment = Assessment.objects.get()
    assert answer.url == assessment.get_absolute_url()  # type: ignore[attr-defined]
    assert assessment.requested_by == member
    assert list(assessment.curves.all()) == [curve]


def test_faults_of_the_form_are_shown(
    signed_in: SignedIn, member: User, release: Release, curve: Curve
) -> None:
    answer = signed_in(member).post(reverse("assessments:new", args=[release.pk]), FORM)
    assert answer.status_code == 200
    assert b"Choose at least one curve." in answer.content
    assert not Assessment.objects.exists()


def test_a_draft_release_is_not_assessed(signed_in: SignedIn, member: User, release: Release) -> None:
    Release.objects.update(state=Release.State.DRAFT, number=None)
    assert signed_in(member).get(reverse("assessments:new", args=[release.pk])).status_code == 404


def test_strangers_and_visitors_see_nothing(
    signed_in: SignedIn, stranger: User, queued: Assessment, client: Client
) -> None:
    for name, key in (("new", queued.release_id), ("progress", queued.pk)):
        address = reverse(f"assessments:{name}", args=[key])
        assert signed_in(stranger).get(address).status_code == 404
        assert client.get(address).status_code == 302
    cancel = reverse("assessments:cancel", args=[queued.pk])
    assert signed_in(stranger).post(cancel).status_code == 404
    assert client.post(cancel).status_code == 302


def test_progress_is_polled_until_it_has_ended(signed_in: SignedIn, lead: User, queued: Assessment) -> None:
    client = signed_in(lead)
    address = reverse("assessments:progress", args=[queued.pk])
    answer = client.get(address)
    assert b'hx-trigger="every 2s"' in answer.content
    assert "HX-Refresh" not in answer.headers
    Assessment.objects.update(status=Assessment.Status.DONE, stage=Assessment.Stage.ENDED)
    answer = client.get(address)
    assert b"hx-trigger" not in answer.content
    assert answer["HX-Refresh"] == "true"


def test_the_page_says_how_far_along_it_is(signed_in: SignedIn, member: User, queued: Assessment) -> None:
    Assessment.objects.update(
        status=Assessment.Status.RUNNING, stage=Assessment.Stage.CALIBRATING, progress=0.4
    )
    page = signed_in(member).get(queued.get_absolute_url()).content.decode()
    assert "Calibrating the radii" in page
    assert 'value="0.400"' in page


def test_a_member_cancels(signed_in: SignedIn, member: User, queued: Assessment) -> None:
    client = signed_in(member)
    answer = client.post(reverse("assessments:cancel", args=[queued.pk]), follow=True)
    assert b"It was cancelled" in answer.content
    assert b"Start again" in answer.content


def test_a_failure_shows_code_sentence_and_id(signed_in: SignedIn, member: User, queued: Assessment) -> None:
    Assessment.objects.update(
        status=Assessment.Status.FAILED,
        failure_code="covariance-not-positive",
        failure="The covariance is wrong.",
    )
    page = signed_in(member).get(queued.get_absolute_url()).content.decode()
    for said in ("covariance-not-positive", "The covariance is wrong.", f"assessment {queued.pk}"):
        assert said in page
