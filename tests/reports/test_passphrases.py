"""Links that ask for a passphrase, and how often links are opened."""

import threading
from collections.abc import Callable
from datetime import timedelta

import pytest
from django.db import connection
from django.test import Client
from django.urls import reverse
from django.utils import timezone

from core.errors import UserError
from core.people.models import User
from fits.reports.models import PassphraseTry, Report, ShareLink
from fits.reports.services import create_link, open_link, try_passphrase
from fits.reports.services.open_link import MOST_TRIES

SignedIn = Callable[[User], Client]
PASSPHRASE = "calm water & deep"


@pytest.fixture(autouse=True)
def quick_hashes(settings: object) -> None:
    settings.PASSWORD_HASHERS = ["django.contrib.auth.hashers.MD5PasswordHasher"]  # type: ignore[attr-defined]


@pytest.fixture
def secret(lead: User, report: Report) -> str:
    return create_link(
        user=lead, report=report, label="Referee", expires_at=None, passphrase=PASSPHRASE
    ).secret


def address(route: str, secret: str, *more: str) -> str:
    return reverse(f"reports:{route}", args=[secret, *more])


def files(secret: str) -> list[str]:
    return [
        address("shared_chart", secret, "curves", "svg"),
        address("shared_json", secret),
        address("shared_csv", secret),
        address("shared_features", secret, "features.json"),
        address("shared_print", secret, "a4"),
        address("shared_print_progress", secret, "a4"),
    ]


def give(client: Client, secret: str, passphrase: str) -> int:
    return client.post(address("shared", secret), {"passphrase": passphrase}).status_code


def test_only_its_hash_is_kept(secret: str) -> None:
    assert PASSPHRASE not in str(ShareLink.objects.values_list().get())


def test_nothing_of_the_report_is_shown_without_it(client: Client, secret: str, report: Report) -> None:
    page = client.get(address("shared", secret)).content.decode()
    assert "asks for a passphrase" in page
    assert report.title not in page
    for file in files(secret):
        answer = client.get(file)
        assert answer.status_code == 403
        assert "asks for a passphrase" in answer.content.decode()


def test_whoever_gives_it_reads_the_report_and_all_its_files(
    client: Client, secret: str, report: Report
) -> None:
    assert give(client, secret, PASSPHRASE) == 302
    assert report.title in client.get(address("shared", secret)).content.decode()
    assert [client.get(file).status_code for file in files(secret)] == [200, 200, 200, 404, 200, 200]


def test_it_is_remembered_for_this_link_alone(
    client: Client, secret: str, lead: User, report: Report
) -> None:
    give(client, secret, PASSPHRASE)
    cookie = client.cookies["opened_link"]
    assert cookie["path"] == address("shared", secret)
    assert cookie["httponly"]
    other = create_link(user=lead, report=report, label="", expires_at=None, passphrase=PASSPHRASE).secret
    # Even where a browser is made to send it there.
    cookie["path"] = "/"
    assert "asks for a passphrase" in client.get(address("shared", other)).content.decode()


def test_a_forged_cookie_opens_nothing(client: Client, secret: str) -> None:
    client.cookies["opened_link"] = f"{ShareLink.objects.get().pk}.x"
    assert "asks for a passphrase" in client.get(address("shared", secret)).content.decode()


def test_the_form_can_be_sent_from_the_page(secret: str) -> None:
    client = Client(enforce_csrf_checks=True)
    page = client.get(address("shared", secret))
    # With "no-referrer" a browser would send the form with the origin "null", which is refused.
    assert page["Referrer-Policy"] == "strict-origin"
    token = client.cookies["csrftoken"].value
    data = {"passphrase": PASSPHRASE, "csrfmiddlewaretoken": token}
    sent = client.post(address("shared", secret), data, headers={"origin": "http://testserver"})
    assert sent.status_code == 302
    assert client.get(address("shared", secret))["Referrer-Policy"] == "no-referrer"


def test_after_ten_wrong_ones_even_the_right_one_waits(client: Client, secret: str) -> None:
    for _ in range(MOST_TRIES):
        assert give(client, secret, "wrong") == 400
    assert give(client, secret, PASSPHRASE) == 400
    PassphraseTry.objects.update(at=timezone.now() - timedelta(minutes=11))
    assert give(client, secret, PASSPHRASE) == 302
    assert not PassphraseTry.objects.exists()


def test_right_ones_do_not_use_up_tries(client: Client, secret: str) -> None:
    for _ in range(MOST_TRIES + 2):
        assert give(client, secret, PASSPHRASE) == 302


@pytest.mark.django_db(transaction=True)
def test_of_two_who_try_at_once_none_gets_a_try_too_many(
    secret: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    link = ShareLink.objects.get()
    PassphraseTry.objects.bulk_create(PassphraseTry(link=link) for _ in range(MOST_TRIES - 1))
    checked: list[str] = []
    both = threading.Barrier(2, timeout=10)
    codes: list[str] = []

    def check(given: str, kept: str) -> bool:
        checked.append(given)
        return False

    monkeypatch.setattr(open_link, "check_password", check)

    def attempt() -> None:
        both.wait()
        try:
            try_passphrase(link, "wrong")
        except UserError as error:
            codes.append(error.code)
        finally:
            connection.close()

    others = [threading.Thread(target=attempt) for _ in range(2)]
    for other in others:
        other.start()
    for other in others:
        other.join()
    assert sorted(codes) == ["passphrase-waits", "passphrase-wrong"]
    assert checked == ["wrong"]


def test_an_opening_is_counted_once_for_the_first_page(client: Client, lead: User, report: Report) -> None:
    made = create_link(user=lead, report=report, label="", expires_at=None)
    client.get(address("shared", made.secret))
    for file in files(made.secret):
        client.get(file)
    client.get(address("shared", made.secret), {"level": "0.9"})
    client.head(address("shared", made.secret))
    made.link.refresh_from_db()
    assert made.link.opened == 1
    assert made.link.last_opened_at is not None


def test_what_signed_in_leads_open_is_not_counted(
    signed_in: SignedIn, lead: User, member: User, report: Report
) -> None:
    made = create_link(user=lead, report=report, label="", expires_at=None)
    signed_in(lead).get(address("shared", made.secret))
    signed_in(member).get(address("shared", made.secret))
    made.link.refresh_from_db()
    assert made.link.opened == 1


def test_what_stays_closed_is_not_counted(client: Client, secret: str) -> None:
    client.get(address("shared", secret))
    give(client, secret, "wrong")
    assert ShareLink.objects.get().opened == 0
    give(client, secret, PASSPHRASE)
    client.get(address("shared", secret))
    assert ShareLink.objects.get().opened == 1


def test_a_lead_sees_how_often_a_link_was_opened(
    signed_in: SignedIn, lead: User, client: Client, report: Report
) -> None:
    made = create_link(user=lead, report=report, label="Referee", expires_at=None)
    assert "never" in signed_in(lead).get(report.get_absolute_url()).content.decode()
    for _ in range(3):
        client.get(address("shared", made.secret))
    page = signed_in(lead).get(report.get_absolute_url()).content.decode()
    assert '<td class="number">3</td>' in page


def test_a_lead_sets_a_passphrase(signed_in: SignedIn, lead: User, report: Report, client: Client) -> None:
    data = {"label": "Referee", "days": "30", "passphrase": PASSPHRASE}
    made = signed_in(lead).post(reverse("reports:new_link", args=[report.pk]), data)
    assert PASSPHRASE not in made.content.decode()
    assert "asks for a passphrase" in client.get(made.context["new_address"]).content.decode()
