"""Who has given the passphrase of a link: a signed cookie says so, for that link's addresses alone."""

import hashlib

from django.http import HttpRequest, HttpResponse
from django.urls import reverse
from django.utils.crypto import constant_time_compare

from fits.reports.models import ShareLink

COOKIE, SALT = "opened_link", "fits.reports.passphrases"
HOURS = 12


def is_unlocked(request: HttpRequest, link: ShareLink) -> bool:
    """Whether the link asks for nothing, or has been given it."""
    if not link.passphrase:
        return True
    given = request.get_signed_cookie(COOKIE, default="", salt=SALT, max_age=HOURS * 3600)
    return constant_time_compare(given or "", _mark(link))


def remember(response: HttpResponse, link: ShareLink, token: str, *, is_secure: bool) -> None:
    """Let the browser that gave it read on."""
    response.set_signed_cookie(
        COOKIE,
        _mark(link),
        salt=SALT,
        max_age=HOURS * 3600,
        path=reverse("reports:shared", args=[token]),
        secure=is_secure,
        httponly=True,
        samesite="Lax",
    )


def _mark(link: ShareLink) -> str:
    return f"{link.pk}.{hashlib.sha256(link.passphrase.encode()).hexdigest()}"
