"""What someone wants for themselves."""

from django.urls import reverse

from core.people.models import DigestPace, User
from tests.people.conftest import SignedIn


def test_someone_changes_their_name_and_how_often_an_e_mail_comes(
    stranger: User, member: User, signed_in: SignedIn
) -> None:
    signed_in(stranger).post(reverse("people:preferences"), {"name": "Sal of Merrow", "digest": "weekly"})
    stranger.refresh_from_db()
    member.refresh_from_db()
    assert (stranger.name, stranger.digest) == ("Sal of Merrow", DigestPace.WEEKLY)
    assert (member.name, member.digest) == ("Mo Member", DigestPace.DAILY)


def test_what_is_not_offered_is_refused(stranger: User, signed_in: SignedIn) -> None:
    answer = signed_in(stranger).post(reverse("people:preferences"), {"name": "Sal", "digest": "hourly"})
    assert "This could not be taken" in answer.content.decode()
    stranger.refresh_from_db()
    assert (stranger.name, stranger.digest) == ("Sal Stranger", DigestPace.DAILY)


def test_every_page_leads_there(stranger: User, signed_in: SignedIn) -> None:
    page = signed_in(stranger).get(reverse("overviews:home")).content.decode()
    assert f'href="{reverse("people:preferences")}"' in page
