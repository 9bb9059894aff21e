"""What signed-in people were shown is not kept by the browser, where the next one at a shared computer could page back
to it."""

from collections.abc import Callable

from django.conf import settings
from django.http import HttpRequest, HttpResponse


class PrivatePagesMiddleware:
    """Forbids to store any answer within a session, unless it says itself how long it may be kept."""

    def __init__(self, get_response: Callable[[HttpRequest], HttpResponse]) -> None:
        self.get_response = get_response

    def __call__(self, request: HttpRequest) -> HttpResponse:
        response = self.get_response(request)
        # The cookie says enough, and needs no database, which an answer about a fault may lack.
        if settings.SESSION_COOKIE_NAME in request.COOKIES:
            response.headers.setdefault("Cache-Control", "private, no-store")
        return response
