"""Our own static files as text, for pages that stand alone and for print."""

from pathlib import Path

from django.contrib.staticfiles import finders


def static_text(name: str) -> str:
    """The text of a file under static/."""
    path = finders.find(name)
    assert isinstance(path, str), f"static file {name} is missing"
    return Path(path).read_text(encoding="utf-8")
