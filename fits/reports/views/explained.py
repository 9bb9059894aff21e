"""The page that explains every word and note. It holds no data and is open to whoever was sent a report."""

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.views.decorators.http import require_safe


@require_safe
def explained(request: HttpRequest) -> HttpResponse:
    """One page, an anchor a word and a note."""
    return render(request, "reports/explained.html")
