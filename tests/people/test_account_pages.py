"""Signing in and out, and setting a password."""

import pytest
from django.conf import settings
from django.core import mail
from django.http import HttpResponse
from django.test import Client, RequestFactory
from django.urls import reverse

from core.people.models import Collaboration, User
from core.private_pages import PrivatePagesMiddleware
from tests.conftest import PASSWORD


def test_someone_signs_in_with_an_e_mail_address_and_lands_on_the_first_page(
    lead: User, client: Client
) -> None:
    answer = client.post(reverse("account_login"), {"login": lead.email, "password": PASSWORD})
    assert answer.status_code == 302
    assert answer["Location"] == reverse("overviews:home")


def test_a_wrong_password_is_explained_and_lets_nobody_in(lead: User, client: Client) -> None:
    answer = client.post(reverse("account_login"), {"login": lead.email, "password": "not it"})
    assert "This could not be taken" in answer.content.decode()
    assert "_auth_user_id" not in client.session


def test_signing_out_takes_a_press_of_the_button(lead: User, client: Client) -> None:
    client.force_login(lead)
    client.get(reverse("account_logout"))
    assert "_auth_user_id" in client.session
    client.post(reverse("account_logout"))
    assert "_auth_user_id" not in client.session


def test_what_a_signed_in_person_sees_is_not_kept_for_the_next_at_the_same_computer(
    lead: User, collaboration: Collaboration, client: Client
) -> None:
    client.force_login(lead)
    for address in (collaboration.get_absolute_url(), reverse("people:preferences"), "/nothing-here"):
        assert client.get(address)["Cache-Control"] == "private, no-store"


def test_an_answer_that_says_how_long_it_may_be_kept_is_left_to_it(rf: RequestFactory) -> None:
    kept = "private, max-age=86400"
    request = rf.get("/a-chart")
    request.COOKIES[settings.SESSION_COOKIE_NAME] = "any"
    answer = PrivatePagesMiddleware(lambda request: HttpResponse(headers={"Cache-Control": kept}))(request)
    assert answer["Cache-Control"] == kept


def test_a_page_without_a_session_may_be_kept(db: None, client: Client) -> None:
    assert "Cache-Control" not in client.get("/nothing-here")


def test_sign_up_is_closed(client: Client) -> None:
    page = client.get(reverse("account_signup")).content.decode()
    assert "By invitation" in page


def test_a_forgotten_password_is_replaced_by_e_mail(lead: User, client: Client) -> None:
    client.post(reverse("account_reset_password"), {"email": lead.email})
    link = next(line for line in mail.outbox[0].body.splitlines() if line.startswith("http"))
    address = client.get(link, follow=True).redirect_chain[-1][0]
    client.post(address, {"password1": "another calm lake", "password2": "another calm lake"})
    lead.refresh_from_db()
    assert lead.check_password("another calm lake")


@pytest.mark.parametrize("name", ["account_login", "account_reset_password", "account_reset_password_done"])
def test_pages_before_signing_in_open(name: str, db: None, client: Client) -> None:
    assert client.get(reverse(name)).status_code == 200


@pytest.mark.parametrize("name", ["account_change_password", "account_logout"])
def test_pages_of_an_account_open(name: str, lead: User, client: Client) -> None:
    client.force_login(lead)
    assert client.get(reverse(name)).status_code == 200


@pytest.mark.parametrize("method", ["get", "post"])
def test_an_e_mail_address_is_not_changed_by_its_owner(method: str, lead: User, client: Client) -> None:
    client.force_login(lead)
    answer = client.generic(method, reverse("account_email"))
    assert (answer.status_code, answer["Location"]) == (302, reverse("account_change_password"))


def test_a_page_that_is_not_there_says_so(db: None, client: Client) -> None:
    answer = client.get("/nowhere")
    assert answer.status_code == 404
    assert "Not here" in answer.content.decode()


def test_each_page_carries_the_content_security_policy(db: None, client: Client) -> None:
    policy = client.get(reverse("account_login"))["Content-Security-Policy"]
    assert "script-src 'self'" in policy
    assert "unsafe" not in policy
