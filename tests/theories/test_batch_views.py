"""Who sees and does what on the pages of many curves at once."""

import re
from collections.abc import Callable

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse
from django.utils import timezone

from core.measurements.models import EarlyLook, Measurement, Release
from core.people.models import Collaboration, User
from core.theories import services
from core.theories.models import Batch, Curve, Theory
from tests.theories.batches import submit

pytestmark = pytest.mark.usefixtures("read_in_this_process")
SignedIn = Callable[[User], Client]
TABLE = "x,Flat floor,Deep floor,Odd floor\n" + "".join(f"{x},{x},{x * x},\n" for x in range(1, 6))


def page_of(client: Client, batch: Batch) -> str:
    return client.get(batch.get_absolute_url()).content.decode()


def carried(page: str) -> str:
    """What the form says that its reader saw."""
    found = re.search(r'name="seen" value="([^"]*)"', page)
    assert found
    return found[1]


def uploaded(measurement: Measurement, user: User, table: str = TABLE) -> Batch:
    return services.draft_batch(
        user=user, measurement=measurement, content=table.encode(), file_name="many.csv"
    )


@pytest.fixture
def batch(measurement: Measurement, member: User) -> Batch:
    return uploaded(measurement, member)


def addresses(batch: Batch) -> dict[str, str]:
    return {name: reverse(f"theories:{name}", args=[batch.pk]) for name in ("submit_batch", "discard_batch")}


def test_a_member_uploads_looks_and_submits(release: Release, member: User, signed_in: SignedIn) -> None:
    client = signed_in(member)
    fields = {"table": SimpleUploadedFile("many.csv", TABLE.encode()), "note": "One run."}
    client.post(reverse("theories:new_batch", args=[release.measurement_id]), fields)
    batch = Batch.objects.get()
    page = page_of(client, batch)
    for words in (
        "Submit the 2 accepted",
        "a new theory",
        "Line 2, column 4 (Odd floor)",
        "Over the data of release 1",
    ):
        assert words in page
    answer = client.post(addresses(batch)["submit_batch"], {"seen": carried(page)}, follow=True)
    page = answer.content.decode()
    assert "2 curves are submitted." in page
    for curve in Curve.objects.all():
        assert curve.get_absolute_url() in page
    assert "Submit the" not in page


def test_it_says_whose_theory_gets_a_new_version(
    curve: Curve, measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    batch = uploaded(measurement, lead, f"x,{curve.theory.name}\n1,1\n2,2\n")
    page = page_of(signed_in(lead), batch)
    assert "version 2 of" in page
    assert "a theory of Mo Member" in page


def test_what_became_otherwise_since_the_page_was_opened_is_refused_and_another_look_settles_it(
    measurement: Measurement, collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    flat, deep = (
        services.create_theory(user=lead, collaboration=collaboration, name=name)
        for name in ("Flat floor", "Deep floor")
    )
    table = "x,Flat floor,Deep floor,Odd floor,Wide floor\n1,1,2,3,4\n2,2,3,4,5\n"
    client, batch = signed_in(member), uploaded(measurement, member, table)
    seen = carried(page_of(client, batch))
    Theory.objects.filter(pk=flat.pk).update(name="Level floor")
    Theory.objects.filter(pk=deep.pk).update(name="Odd floor")
    services.create_theory(user=lead, collaboration=collaboration, name="Deep floor")
    page = client.post(addresses(batch)["submit_batch"], {"seen": seen}, follow=True).content.decode()
    assert "1 curve is submitted." in page
    assert "3 curves could no more be accepted" in page
    assert dict(batch.items.values_list("name", "refusal_code")) == {
        "Flat floor": "theory-gone",
        "Deep floor": "theory-appeared",
        "Odd floor": "theory-appeared",
        "Wide floor": "",
    }
    again = uploaded(measurement, member, table)
    client.post(addresses(again)["submit_batch"], {"seen": carried(page_of(client, again))})
    assert set(Curve.objects.values_list("theory__name", "version")) == {
        ("Wide floor", 1),
        ("Flat floor", 1),
        ("Deep floor", 1),
        ("Odd floor", 1),
    }


@pytest.mark.parametrize("seen", ["", "1:x", "1:0 2", "²:0"])
def test_who_does_not_say_what_they_saw_submits_nothing(
    batch: Batch, member: User, signed_in: SignedIn, seen: str
) -> None:
    answer = signed_in(member).post(addresses(batch)["submit_batch"], {"seen": seen})
    assert answer.status_code == 400
    assert "from the page that lists them" in answer.content.decode()
    assert not Curve.objects.exists()


def test_a_batch_that_is_not_submitted_is_there_for_who_uploaded_it_alone(
    batch: Batch, lead: User, student: User, observer: User, stranger: User, member: User, signed_in: SignedIn
) -> None:
    for user in (lead, student, observer, stranger):
        client = signed_in(user)
        assert client.get(batch.get_absolute_url()).status_code == 404
        for address in addresses(batch).values():
            assert client.post(address).status_code in {403, 404}
    assert not Curve.objects.exists()
    assert signed_in(member).get(batch.get_absolute_url()).status_code == 200


def test_a_submitted_one_is_a_record_for_all_who_see_the_curves(
    batch: Batch, lead: User, student: User, observer: User, stranger: User, signed_in: SignedIn
) -> None:
    submit(batch)
    for user, status in ((lead, 200), (observer, 200), (student, 404), (stranger, 404)):
        assert signed_in(user).get(batch.get_absolute_url()).status_code == status


def test_one_of_a_desk_is_a_record_for_the_student_and_leads(
    measurement: Measurement, lead: User, member: User, student: User, neighbour: User, signed_in: SignedIn
) -> None:
    batch = submit(uploaded(measurement, student))
    for user, status in ((student, 200), (lead, 200), (member, 404), (neighbour, 404)):
        assert signed_in(user).get(batch.get_absolute_url()).status_code == status
    assert {theory.desk for theory in Theory.objects.all()} == {student}


def test_who_may_upload(
    measurement: Measurement,
    lead: User,
    member: User,
    student: User,
    observer: User,
    stranger: User,
    signed_in: SignedIn,
) -> None:
    address = reverse("theories:new_batch", args=[measurement.pk])
    for user, status in ((lead, 200), (member, 200), (student, 200), (observer, 403), (stranger, 404)):
        assert signed_in(user).get(address).status_code == status


def test_who_has_become_an_observer_submits_no_more(batch: Batch, member: User, signed_in: SignedIn) -> None:
    member.memberships.update(role="observer")
    assert signed_in(member).post(addresses(batch)["submit_batch"]).status_code == 403


def test_a_refused_upload_is_named_and_the_form_stays(
    measurement: Measurement, member: User, signed_in: SignedIn
) -> None:
    fields = {"table": SimpleUploadedFile("many.zip", b"no archive"), "note": "What I wrote."}
    answer = signed_in(member).post(reverse("theories:new_batch", args=[measurement.pk]), fields)
    page = answer.content.decode()
    assert answer.status_code == 400
    for words in ("many.zip", "is no zip archive that can be read", "What I wrote."):
        assert words in page


def test_a_discarded_one_is_gone(batch: Batch, member: User, signed_in: SignedIn) -> None:
    client = signed_in(member)
    waiting = reverse("theories:new_batch", args=[batch.measurement_id])
    assert batch.get_absolute_url() in client.get(waiting).content.decode()
    client.post(addresses(batch)["discard_batch"])
    assert not Batch.objects.exists()
    assert client.get(batch.get_absolute_url()).status_code == 404


def test_following_a_link_submits_nothing(batch: Batch, member: User, signed_in: SignedIn) -> None:
    for address in addresses(batch).values():
        assert signed_in(member).get(address).status_code == 405


def test_data_of_a_sealed_measurement_are_drawn_for_a_lead_who_has_looked_alone(
    release: Release, measurement: Measurement, lead: User, member: User, signed_in: SignedIn
) -> None:
    Measurement.objects.filter(pk=measurement.pk).update(sealed_at=timezone.now())
    EarlyLook.objects.create(measurement=measurement, user=lead)
    for user, is_drawn in ((lead, True), (member, False)):
        page = page_of(signed_in(user), uploaded(measurement, user))
        assert ("Over the data of release 1" in page) is is_drawn
        assert ("release" in page) is is_drawn


def test_queries_do_not_grow_with_curves(
    release: Release, measurement: Measurement, member: User, signed_in: SignedIn
) -> None:
    client = signed_in(member)
    counts = []
    for columns in (2, 12):
        names = [f"{columns} {number}" for number in range(columns)]
        rows = [",".join(str(x + n) for n in range(columns + 1)) for x in range(4)]
        batch = uploaded(measurement, member, "\n".join([",".join(["x", *names]), *rows]))
        for _ in ("waiting", "submitted"):
            with CaptureQueriesContext(connection) as captured:
                page_of(client, batch)
            counts.append(len(captured))
            if batch.submitted_at is None:
                batch = submit(batch)
    assert counts[:2] == counts[2:]
    assert max(counts) <= 12


def test_an_upload_that_its_uploader_sees_no_more_is_not_offered(
    batch: Batch, member: User, signed_in: SignedIn
) -> None:
    client, address = signed_in(member), reverse("theories:new_batch", args=[batch.measurement_id])
    assert batch.get_absolute_url() in client.get(address).content.decode()
    member.memberships.update(role="student")
    assert client.get(batch.get_absolute_url()).status_code == 404
    page = client.get(address).content.decode()
    assert batch.get_absolute_url() not in page
    assert "if it stands at your desk" in page
