"""The life of a share link: made, opened, expired, revoked."""

import logging
from collections.abc import Callable
from datetime import timedelta

import pytest
from django.test import Client
from django.urls import reverse
from django.utils import timezone

from core.masking import MaskShareLinks
from core.people.models import User
from fits.reports.models import Report, ShareLink
from fits.reports.services import create_link, revoke_link

SignedIn = Callable[[User], Client]


@pytest.fixture
def secret(lead: User, report: Report) -> str:
    return create_link(user=lead, report=report, label="Referee", expires_at=None).secret


def test_a_link_opens_the_report_for_anyone(client: Client, secret: str) -> None:
    page = client.get(reverse("reports:shared", args=[secret]))
    assert page.status_code == 200
    assert b"What the first release says" in page.content
    assert b"Sign out" not in page.content


def test_a_shared_page_is_not_kept_indexed_or_told(client: Client, secret: str) -> None:
    for address in (
        reverse("reports:shared", args=[secret]),
        reverse("reports:shared_chart", args=[secret, "curves", "svg"]),
        reverse("reports:shared_json", args=[secret]),
        reverse("reports:shared_csv", args=[secret]),
        reverse("reports:shared", args=["unknown"]),
        reverse("reports:shared_chart", args=[secret, "nothing", "svg"]),
    ):
        answer = client.get(address)
        assert answer["Referrer-Policy"] == "no-referrer"
        assert answer["X-Robots-Tag"].startswith("noindex")
        assert answer["Cache-Control"] == "no-store"


def test_its_files_open_too(client: Client, secret: str) -> None:
    assert client.get(reverse("reports:shared_chart", args=[secret, "ball", "svg"])).status_code == 200
    assert client.get(reverse("reports:shared_json", args=[secret])).json()["schema"] == "inradius/1"
    assert client.get(reverse("reports:shared_csv", args=[secret])).status_code == 200


def test_only_the_hash_is_kept(secret: str) -> None:
    stored = ShareLink.objects.values_list().get()
    assert secret not in str(stored)
    assert len(ShareLink.objects.get().token_sha256) == 64


def test_unknown_expired_and_revoked_links_answer_alike(client: Client, lead: User, report: Report) -> None:
    gone = create_link(
        user=lead, report=report, label="", expires_at=timezone.now() - timedelta(seconds=1)
    ).secret
    revoked = create_link(user=lead, report=report, label="", expires_at=None)
    revoke_link(revoked.link, by=lead)
    answers = [
        client.get(reverse("reports:shared", args=[token])) for token in ("unknown", gone, revoked.secret)
    ]
    assert {answer.status_code for answer in answers} == {404}
    assert len({answer.content for answer in answers}) == 1
    assert len({str(sorted(answer.headers.items())) for answer in answers}) == 1


def test_a_lead_makes_a_link_and_sees_its_secret_once(
    signed_in: SignedIn, lead: User, report: Report, client: Client
) -> None:
    answer = signed_in(lead).post(
        reverse("reports:new_link", args=[report.pk]), {"label": "Referee", "days": "30"}
    )
    address = answer.context["new_address"]
    assert address in answer.content.decode()
    assert "no-store" in answer["Cache-Control"]
    assert client.get(address).status_code == 200
    again = signed_in(lead).get(report.get_absolute_url()).content.decode()
    assert address not in again
    assert "Referee" in again


def test_a_lead_revokes_a_link(signed_in: SignedIn, lead: User, secret: str, client: Client) -> None:
    link = ShareLink.objects.get()
    signed_in(lead).post(reverse("reports:revoke", args=[link.pk]))
    assert client.get(reverse("reports:shared", args=[secret])).status_code == 404
    page = signed_in(lead).get(link.report.get_absolute_url()).content.decode()
    assert "revoked" in page


def test_members_and_strangers_make_and_revoke_no_links(
    signed_in: SignedIn, member: User, stranger: User, report: Report, secret: str
) -> None:
    link = ShareLink.objects.get()
    for address in (reverse("reports:new_link", args=[report.pk]), reverse("reports:revoke", args=[link.pk])):
        assert signed_in(member).post(address, {"days": "30"}).status_code == 403
        assert signed_in(stranger).post(address, {"days": "30"}).status_code == 404
    assert ShareLink.objects.get().is_open


def test_members_do_not_see_links(signed_in: SignedIn, member: User, report: Report, secret: str) -> None:
    assert "Share by link" not in signed_in(member).get(report.get_absolute_url()).content.decode()


def test_secrets_are_masked_in_logs() -> None:
    record = logging.LogRecord("x", 20, "x", 1, "Not Found: %s", ("/r/abcDEF_123-456/charts/ball.svg",), None)
    MaskShareLinks().filter(record)
    assert record.getMessage() == "Not Found: /r/…/charts/ball.svg"
