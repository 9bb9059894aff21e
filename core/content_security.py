"""The content security policy, on every answer."""

from collections.abc import Callable, Mapping, Sequence

from django.conf import settings
from django.http import HttpRequest, HttpResponse


def header(policy: Mapping[str, Sequence[str]]) -> str:
    """The policy as one header value."""
    return "; ".join(f"{directive} {' '.join(sources)}" for directive, sources in policy.items())


class ContentSecurityMiddleware:
    """Sends settings.SECURE_CSP with each answer that has no policy of its own."""

    def __init__(self, get_response: Callable[[HttpRequest], HttpResponse]) -> None:
        self.get_response = get_response
        self.value = header(settings.SECURE_CSP)

    def __call__(self, request: HttpRequest) -> HttpResponse:
        response = self.get_response(request)
        response.headers.setdefault("Content-Security-Policy", self.value)
        return response
