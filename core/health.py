"""Whether the site can work: for containers and for whoever watches them."""

from django.conf import settings
from django.db import DatabaseError, connection
from django.http import HttpRequest, HttpResponse

from core import broker


def health(request: HttpRequest) -> HttpResponse:
    """200 and “ok” when database and broker answer, else 503 and which one does not. Needs no sign-in."""
    away = [name for name, answers in (("database", _database), ("broker", _broker)) if not answers()]
    text = "".join(f"{name} away\n" for name in away) or "ok\n"
    response = HttpResponse(text, content_type="text/plain", status=503 if away else 200)
    response.headers["Cache-Control"] = "no-store"
    return response


def _database() -> bool:
    try:
        with connection.cursor() as cursor:
            cursor.execute("SELECT 1")
    except DatabaseError:
        return False
    return True


def _broker() -> bool:
    return broker.answers(settings.CELERY_BROKER_URL)
