"""What leads, members and strangers see and do on the pages of a seal."""

from collections.abc import Callable

import pytest
from django.test import Client
from django.urls import reverse

from core.measurements import services
from core.measurements.models import EarlyLook, Measurement, Release
from core.measurements.seal_page import seal_of
from core.people.models import User
from tests.measurements.sealing import drafted, published, seal, soon

SignedIn = Callable[[User], Client]


def page(client: Client, name: str, key: int) -> str:
    answer = client.get(reverse(name, args=[key]))
    assert answer.status_code == 200
    return answer.content.decode()


def test_a_lead_seals_it_on_its_page_in_utc(
    measurement: Measurement, lead: User, signed_in: SignedIn, settings: object
) -> None:
    settings.TIME_ZONE = "Asia/Tokyo"  # type: ignore[attr-defined]
    opens = soon(days=2)
    client = signed_in(lead)
    address = reverse("measurements:seal", args=[measurement.pk])
    sent = {"revision": 0, "opens_at": f"{opens:%Y-%m-%dT%H:%M}"}
    assert client.post(address, sent).status_code == 302
    measurement.refresh_from_db()
    assert measurement.opens_at == opens
    assert f'value="{opens:%Y-%m-%dT%H:%M}"' in client.get(address).content.decode()


def test_a_refusal_stands_beside_its_field(measurement: Measurement, lead: User, signed_in: SignedIn) -> None:
    address = reverse("measurements:seal", args=[measurement.pk])
    words = signed_in(lead).post(address, {"revision": 0, "announced_x_min": "1"}).content.decode()
    assert "One end of the announced x is missing" in words
    assert 'id="id_announced_x_max_error"' in words


def test_who_saves_a_seal_that_has_changed_is_shown_what_stands(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    seal(measurement, lead, announced_x_min=1.0, announced_x_max=10.0)
    address = reverse("measurements:seal", args=[measurement.pk])
    sent = {"revision": 0, "announced_x_min": "2", "announced_x_max": "10"}
    words = signed_in(lead).post(address, sent).content.decode()
    assert "somebody else has changed this" in words.lower()
    assert "Now stands here: “1.0”" in words


@pytest.mark.parametrize("name", ["seal", "open", "look"])
def test_a_member_does_none_of_it_and_a_stranger_cannot_tell(
    name: str, measurement: Measurement, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    seal(measurement, lead)
    address = reverse(f"measurements:{name}", args=[measurement.pk])
    assert signed_in(member).post(address).status_code == 403
    assert signed_in(stranger).post(address).status_code == 404
    assert Measurement.objects.get().is_sealed
    assert not EarlyLook.objects.exists()


def test_opening_asks_first(measurement: Measurement, lead: User, signed_in: SignedIn) -> None:
    seal(measurement, lead)
    client = signed_in(lead)
    assert "It cannot be sealed again" in page(client, "measurements:open", measurement.pk)
    assert Measurement.objects.get().is_sealed
    client.post(reverse("measurements:open", args=[measurement.pk]))
    assert not Measurement.objects.get().is_sealed
    assert "It is open" in page(client, "measurements:open", measurement.pk)


def test_sealed_data_are_there_for_a_lead_who_looked_alone(
    measurement: Measurement, lead: User, member: User, signed_in: SignedIn
) -> None:
    seal(measurement, lead)
    release = published(measurement, lead)
    EarlyLook.objects.all().delete()
    address, client = release.get_absolute_url(), signed_in(lead)
    assert client.get(address).status_code == 404
    client.post(reverse("measurements:look", args=[measurement.pk]))
    assert client.get(address).status_code == 200
    assert signed_in(member).get(address).status_code == 404
    services.open_measurement(user=lead, measurement=measurement)
    assert signed_in(member).get(address).status_code == 200


def test_the_page_for_uploads_warns_of_the_look_it_will_be(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    warning = "has seen them: that is recorded"
    assert warning not in page(client, "measurements:upload", measurement.pk)
    seal(measurement, lead)
    assert warning in page(client, "measurements:upload", measurement.pk)


def test_a_release_is_withdrawn_on_its_page_and_says_so_at_the_top(
    release: Release, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    address = reverse("measurements:withdraw", args=[release.pk])
    assert signed_in(member).post(address, {"reason": "No."}).status_code == 403
    assert signed_in(stranger).post(address, {"reason": "No."}).status_code == 404
    assert signed_in(lead).post(address, {}).status_code == 200
    assert signed_in(lead).post(address, {"reason": "The gauge <b>stuck</b>."}).status_code == 302
    words = page(signed_in(member), "measurements:release", release.pk)
    assert "Release 1 is withdrawn" in words
    assert "The gauge &lt;b&gt;stuck&lt;/b&gt;." in words


def test_the_page_of_a_draft_carries_what_its_reader_saw(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    draft = drafted(measurement, lead)
    client = signed_in(lead)
    seen = client.get(draft.get_absolute_url()).context["reading"]
    roles = {"role_0": "x", "role_1": "y", "role_2": "error", "scale_percent": "5"}
    assert client.post(draft.get_absolute_url(), roles | {"seen": seen}).status_code == 302
    assert client.post(draft.get_absolute_url(), roles | {"seen": seen}).status_code == 400
    answer = client.post(reverse("measurements:publish", args=[draft.pk]), {"seen": seen})
    assert answer.status_code == 400
    assert Release.objects.get().state == "draft"


def test_what_a_lead_may_do_about_a_seal_follows_its_state(
    measurement: Measurement, lead: User, member: User
) -> None:
    assert seal_of(measurement, lead).may_begin
    assert not seal_of(measurement, member).is_shown
    seal(measurement, lead)
    assert seal_of(measurement, lead).may_change
    assert not seal_of(measurement, member).may_change
    services.open_measurement(user=lead, measurement=measurement)
    of_lead = seal_of(measurement, lead)
    assert not of_lead.may_change
    assert not of_lead.may_begin
    assert of_lead.is_shown
