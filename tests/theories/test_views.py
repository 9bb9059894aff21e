"""Who sees and does what on the pages of theories and curves."""

from collections.abc import Callable

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.test import Client
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, User
from core.people.services import create_collaboration
from core.theories import services
from core.theories.models import Curve, Theory

SignedIn = Callable[[User], Client]
CURVE = "x,y\n" + "".join(f"{x},{x * x}\n" for x in range(1, 5))


@pytest.fixture
def draft(theory: Theory, measurement: Measurement, member: User) -> Curve:
    return services.draft_curve(
        user=member, theory=theory, measurement=measurement, content=CURVE.encode(), file_name="flat.csv"
    )


def file(text: str = CURVE) -> SimpleUploadedFile:
    return SimpleUploadedFile("flat.csv", text.encode())


def addresses(theory: Theory, curve: Curve) -> list[str]:
    return [
        reverse("theories:new_theory", args=[theory.collaboration_id]),
        reverse("theories:edit_theory", args=[theory.pk]),
        reverse("theories:new_curve", args=[theory.pk]),
        reverse("theories:curve", args=[curve.pk]),
        reverse("theories:download", args=[curve.pk]),
    ]


def test_the_pages_open_for_lead_and_member(
    theory: Theory, curve: Curve, lead: User, member: User, signed_in: SignedIn
) -> None:
    for user in (lead, member):
        client = signed_in(user)
        assert {client.get(address).status_code for address in addresses(theory, curve)} == {200}


def test_a_stranger_cannot_tell_that_they_exist(
    theory: Theory, curve: Curve, stranger: User, signed_in: SignedIn
) -> None:
    client = signed_in(stranger)
    assert {client.get(address).status_code for address in addresses(theory, curve)} == {404}


def test_someone_not_signed_in_is_sent_to_sign_in(theory: Theory, curve: Curve, client: Client) -> None:
    for address in addresses(theory, curve):
        answer = client.get(address)
        assert answer.status_code == 302
        assert answer["Location"].startswith(reverse("account_login"))


def test_a_member_changes_the_words_of_their_own_theory_only(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    of_lead = services.create_theory(user=lead, collaboration=collaboration, name="Flat floor")
    address = reverse("theories:edit_theory", args=[of_lead.pk])
    assert signed_in(member).post(address, {"name": "Mine now"}).status_code == 403
    signed_in(lead).post(address, {"name": "Level floor", "revision": 0})
    of_lead.refresh_from_db()
    assert of_lead.name == "Level floor"


def test_a_member_adds_a_theory(collaboration: Collaboration, member: User, signed_in: SignedIn) -> None:
    address = reverse("theories:new_theory", args=[collaboration.pk])
    answer = signed_in(member).post(address, {"name": "Flat floor", "reference": "Merian"})
    assert answer["Location"] == Theory.objects.get().get_absolute_url()


def test_a_member_uploads_looks_and_submits(
    release: Release, theory: Theory, member: User, signed_in: SignedIn
) -> None:
    client = signed_in(member)
    fields = {"measurement": release.measurement_id, "table": file(), "note": "Finer."}
    client.post(reverse("theories:new_curve", args=[theory.pk]), fields)
    draft = Curve.objects.get()
    page = client.get(draft.get_absolute_url()).content.decode()
    assert "Over the data of release 1" in page
    assert "missing stretch 0.5–1 and 4–4.5" in page
    client.post(reverse("theories:submit", args=[draft.pk]))
    assert Curve.objects.get().version == 1


def test_a_refused_curve_is_named_with_its_line_and_the_form_stays(
    theory: Theory, measurement: Measurement, member: User, signed_in: SignedIn
) -> None:
    fields = {"measurement": measurement.pk, "table": file(CURVE + "2,9\n"), "note": "What I wrote."}
    answer = signed_in(member).post(reverse("theories:new_curve", args=[theory.pk]), fields)
    page = answer.content.decode()
    assert answer.status_code == 400
    for words in ("flat.csv", "<dd>6</dd>", "stands twice", "What I wrote."):
        assert words in page
    assert not Curve.objects.exists()


def test_a_measurement_of_others_cannot_be_chosen(
    theory: Theory, stranger: User, member: User, signed_in: SignedIn
) -> None:
    other = create_collaboration(user=stranger, name="Wave tank")
    hidden = Measurement.objects.create(
        collaboration=other, name="Hidden height", x_name="x", y_name="y", created_by=stranger
    )
    client = signed_in(member)
    address = reverse("theories:new_curve", args=[theory.pk])
    assert "Hidden height" not in client.get(address).content.decode()
    assert client.post(address, {"measurement": hidden.pk, "table": file()}).status_code == 400


@pytest.mark.parametrize("name", ["curve", "download"])
def test_a_draft_is_there_for_who_uploaded_it_alone(
    name: str, draft: Curve, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    address = reverse(f"theories:{name}", args=[draft.pk])
    assert signed_in(member).get(address).status_code == 200
    assert signed_in(lead).get(address).status_code == 404
    assert signed_in(stranger).get(address).status_code == 404


@pytest.mark.parametrize("name", ["submit", "discard"])
def test_nobody_else_submits_or_discards_a_draft(
    name: str, draft: Curve, lead: User, stranger: User, signed_in: SignedIn
) -> None:
    address = reverse(f"theories:{name}", args=[draft.pk])
    assert signed_in(lead).post(address).status_code == 404
    assert signed_in(stranger).post(address).status_code == 404
    assert Curve.objects.get().state == Curve.State.DRAFT


def test_following_a_link_submits_nothing(draft: Curve, member: User, signed_in: SignedIn) -> None:
    assert signed_in(member).get(reverse("theories:submit", args=[draft.pk])).status_code == 405
