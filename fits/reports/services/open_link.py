"""What happens to a link when somebody comes by it: its passphrase is tried, and it is counted."""

from datetime import timedelta

from django.contrib.auth.hashers import check_password
from django.db import transaction
from django.db.models import F
from django.utils import timezone

from core.user_error import UserError
from fits.reports.models import PassphraseTry, ShareLink

MOST_TRIES = 10
WITHIN = timedelta(minutes=10)


def try_passphrase(link: ShareLink, given: str) -> None:
    """Raises UserError `passphrase-wrong`, or `passphrase-waits` after too many wrong ones, also of others.

    A try counts from before it is checked, so that none of many at once is free.
    """
    attempt = _begin(link)
    if attempt is None:
        raise UserError(
            "passphrase-waits",
            f"a wrong passphrase was given {MOST_TRIES} times",
            "Wait ten minutes, and try again",
        )
    if not check_password(given, link.passphrase):
        raise UserError("passphrase-wrong", "this is not the passphrase", "Ask whoever gave you the link")
    attempt.delete()


@transaction.atomic
def _begin(link: ShareLink) -> PassphraseTry | None:
    # Others at the same link wait here.
    ShareLink.objects.select_for_update(no_key=True).order_by("pk").get(pk=link.pk)
    since = timezone.now() - WITHIN
    tries = PassphraseTry.objects.filter(link=link)
    tries.filter(at__lt=since).delete()
    if tries.count() >= MOST_TRIES:
        return None
    return PassphraseTry.objects.create(link=link)


def count_opening(link: ShareLink) -> None:
    """Its first page was read."""
    ShareLink.objects.filter(pk=link.pk).update(opened=F("opened") + 1, last_opened_at=timezone.now())
