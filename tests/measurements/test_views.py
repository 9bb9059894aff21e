"""Who sees and does what on the pages of measurements and releases."""

from collections.abc import Callable

import numpy as np
import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.test import Client
from django.urls import reverse
from pytest_django import Settings

from core.measurements import services
from core.measurements.models import Measurement, Release
from core.measurements.reading.stored import from_bytes
from core.people.models import Collaboration, User

SignedIn = Callable[[User], Client]
TABLE = "x,y,error\n" + "".join(f"{x},{x * x},0.1\n" for x in range(1, 11))
WORDS = {"name": "Wave height", "x_name": "distance", "y_name": "height", "axis": "linear"}


@pytest.fixture
def draft(measurement: Measurement, lead: User) -> Release:
    return services.draft_release(
        user=lead, measurement=measurement, content=TABLE.encode(), file_name="tank.csv"
    )


@pytest.fixture
def unmapped(measurement: Measurement, lead: User) -> Release:
    text = TABLE.replace("x,y,error", "distance,height,spread").replace("4,16,0.1", "4,16,-1")
    return services.draft_release(
        user=lead, measurement=measurement, content=text.encode(), file_name="tank.csv"
    )


def file(text: str = TABLE, name: str = "tank.csv") -> SimpleUploadedFile:
    return SimpleUploadedFile(name, text.encode())


def addresses_of_leads(measurement: Measurement, draft: Release) -> list[str]:
    return [
        reverse("measurements:new_measurement", args=[measurement.collaboration_id]),
        reverse("measurements:edit_measurement", args=[measurement.pk]),
        reverse("measurements:upload", args=[measurement.pk]),
        reverse("measurements:release", args=[draft.pk]),
        reverse("measurements:download", args=[draft.pk]),
    ]


def test_pages_of_leads_open_for_the_lead(
    measurement: Measurement, draft: Release, lead: User, signed_in: SignedIn
) -> None:
    answers = [signed_in(lead).get(address).status_code for address in addresses_of_leads(measurement, draft)]
    assert set(answers) == {200}


def test_pages_of_leads_refuse_a_member(
    measurement: Measurement, draft: Release, member: User, signed_in: SignedIn
) -> None:
    client = signed_in(member)
    assert {client.get(address).status_code for address in addresses_of_leads(measurement, draft)} == {403}


def test_a_stranger_cannot_tell_that_they_exist(
    measurement: Measurement, draft: Release, stranger: User, signed_in: SignedIn
) -> None:
    client = signed_in(stranger)
    assert {client.get(address).status_code for address in addresses_of_leads(measurement, draft)} == {404}


def test_someone_not_signed_in_is_sent_to_sign_in(
    measurement: Measurement, draft: Release, client: Client
) -> None:
    for address in addresses_of_leads(measurement, draft):
        answer = client.get(address)
        assert answer.status_code == 302
        assert answer["Location"].startswith(reverse("account_login"))


@pytest.mark.parametrize("name", ["publish", "discard"])
def test_a_member_and_a_stranger_neither_publish_nor_discard(
    name: str, draft: Release, member: User, stranger: User, signed_in: SignedIn
) -> None:
    address = reverse(f"measurements:{name}", args=[draft.pk])
    assert signed_in(member).post(address).status_code == 403
    assert signed_in(stranger).post(address).status_code == 404
    assert Release.objects.get().state == Release.State.DRAFT


@pytest.mark.parametrize("name", ["publish", "discard"])
def test_following_a_link_neither_publishes_nor_discards(
    name: str, draft: Release, lead: User, signed_in: SignedIn
) -> None:
    assert signed_in(lead).get(reverse(f"measurements:{name}", args=[draft.pk])).status_code == 405


def test_a_published_release_is_read_by_a_member_and_hidden_from_a_stranger(
    release: Release, member: User, stranger: User, signed_in: SignedIn
) -> None:
    for address in (release.get_absolute_url(), reverse("measurements:download", args=[release.pk])):
        assert signed_in(member).get(address).status_code == 200
        assert signed_in(stranger).get(address).status_code == 404


def test_a_lead_adds_a_measurement(collaboration: Collaboration, lead: User, signed_in: SignedIn) -> None:
    address = reverse("measurements:new_measurement", args=[collaboration.pk])
    answer = signed_in(lead).post(address, WORDS)
    assert answer.status_code == 302
    assert answer["Location"] == Measurement.objects.get().get_absolute_url()


def test_a_name_that_is_taken_is_said_beside_the_field(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    address = reverse("measurements:new_measurement", args=[measurement.collaboration_id])
    page = signed_in(lead).post(address, WORDS | {"name": measurement.name}).content.decode()
    assert "is here already" in page
    assert 'aria-describedby="id_name_helptext id_name_error"' in page


def test_a_lead_uploads_looks_and_publishes(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    client.post(reverse("measurements:upload", args=[measurement.pk]), {"table": file(), "note": "First."})
    draft = Release.objects.get()
    page = client.get(draft.get_absolute_url()).content.decode()
    assert "10 points" in page
    assert "from 1 to 10" in page
    client.post(reverse("measurements:publish", args=[draft.pk]))
    assert Release.objects.get().number == 1


def test_a_refused_file_is_named_with_line_and_column_and_the_form_stays(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    address = reverse("measurements:upload", args=[measurement.pk])
    answer = signed_in(lead).post(
        address, {"table": file(TABLE.replace("4,16,0.1", "4,16,-1")), "note": "What I wrote."}
    )
    page = answer.content.decode()
    assert answer.status_code == 400
    for words in ("tank.csv", "<dd>5</dd>", "<dd>3 (error)</dd>", "What I wrote."):
        assert words in page
    assert not Release.objects.exists()


def test_a_file_above_the_limit_is_refused_before_it_is_read(
    measurement: Measurement,
    lead: User,
    signed_in: SignedIn,
    monkeypatch: pytest.MonkeyPatch,
    settings: Settings,
) -> None:
    settings.UPLOAD_MAX_BYTES = 20
    monkeypatch.setattr(services, "draft_release", lambda **_: pytest.fail("it was read"))
    answer = signed_in(lead).post(reverse("measurements:upload", args=[measurement.pk]), {"table": file()})
    assert answer.status_code == 400
    assert "larger than" in answer.content.decode()


def test_markup_in_a_header_is_shown_as_words(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    text = TABLE.replace("x,y,error", "x,y,<script>alert(1)</script>")
    client = signed_in(lead)
    client.post(reverse("measurements:upload", args=[measurement.pk]), {"table": file(text)})
    page = client.get(Release.objects.get().get_absolute_url()).content.decode()
    assert "<script>alert" not in page


def test_columns_are_mapped_on_the_page(unmapped: Release, lead: User, signed_in: SignedIn) -> None:
    roles = {"role_0": "x", "role_1": "y", "role_2": "shared", "shared_2": "baseline"}
    client = signed_in(lead)
    client.post(unmapped.get_absolute_url(), roles)
    # Without an error for each point it may not stand; the page says so and the columns stay.
    unmapped.refresh_from_db()
    assert [column["role"] for column in unmapped.columns] == ["", "", ""]


def test_a_mapping_that_breaks_a_rule_names_the_line_and_keeps_the_choice(
    unmapped: Release, lead: User, signed_in: SignedIn
) -> None:
    roles = {"role_0": "x", "role_1": "y", "role_2": "error", "shared_2": ""}
    answer = signed_in(lead).post(unmapped.get_absolute_url(), roles)
    page = answer.content.decode()
    assert answer.status_code == 400
    assert "<dd>5</dd>" in page
    assert '<option value="error" selected>' in page


def test_an_unfinished_draft_offers_no_publication(
    unmapped: Release, lead: User, signed_in: SignedIn
) -> None:
    page = signed_in(lead).get(unmapped.get_absolute_url()).content.decode()
    assert "No column is marked y" in page
    assert reverse("measurements:publish", args=[unmapped.pk]) not in page


def test_the_download_reads_back_to_the_same_numbers(
    release: Release, member: User, signed_in: SignedIn
) -> None:
    answer = signed_in(member).get(reverse("measurements:download", args=[release.pk]))
    text = b"".join(answer.streaming_content).decode()  # type: ignore[attr-defined]
    read = np.array([[float(cell) for cell in line.split(",")] for line in text.split("\r\n")[1:-1]])
    assert np.array_equal(read, from_bytes(release.table))
