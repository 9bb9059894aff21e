"""The two families of error: the user's, which say what to do, and ours, which carry an id to the log."""

import logging
import secrets
from collections.abc import Callable

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render

from core.user_error import UserError

__all__ = ["ErrorMiddleware", "UserError", "record_fault"]

logger = logging.getLogger(__name__)


def record_fault(error: BaseException, doing: str) -> str:
    """Log an error of ours; the id returned is what a page may show of it."""
    fault_id = secrets.token_hex(4)
    logger.error("fault %s while %s", fault_id, doing, exc_info=error)
    return fault_id


class ErrorMiddleware:
    """Turns an error that left a view into a page: 400 with the remedy, or 500 with an id."""

    def __init__(self, get_response: Callable[[HttpRequest], HttpResponse]) -> None:
        self.get_response = get_response

    def __call__(self, request: HttpRequest) -> HttpResponse:
        return self.get_response(request)

    def process_exception(self, request: HttpRequest, error: Exception) -> HttpResponse | None:
        from django.core.exceptions import PermissionDenied, SuspiciousOperation
        from django.http import Http404

        if isinstance(error, (Http404, PermissionDenied, SuspiciousOperation)):
            return None
        if isinstance(error, UserError):
            return render(request, "user_error.html", {"error": error}, status=400)
        fault_id = record_fault(error, f"answering {request.method} {request.path_info}")
        return render(request, "fault.html", {"fault_id": fault_id}, status=500)
