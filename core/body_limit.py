"""How large a request may be at all, settled before any of it is read."""

from collections.abc import Callable

from django.conf import settings
from django.http import HttpRequest, HttpResponse
from django.shortcuts import render

from core.user_error import UserError


class BodyLimitMiddleware:
    """Refuses what is longer than all files of a form together: forms weigh a file only once it lies on the disk."""

    def __init__(self, get_response: Callable[[HttpRequest], HttpResponse]) -> None:
        self.get_response = get_response

    def __call__(self, request: HttpRequest) -> HttpResponse:
        # Of a request that does not say how long it is, Django reads nothing.
        length = request.META.get("CONTENT_LENGTH") or "0"
        if not length.isdecimal() or int(length) <= settings.REQUEST_MAX_BYTES:
            return self.get_response(request)
        megabytes = settings.UPLOAD_MAX_BYTES // (1024 * 1024)
        error = UserError(
            "too-large", "this is more than is taken at once", f"Send up to {megabytes} MB a file"
        )
        return render(request, "user_error.html", {"error": error}, status=413)
