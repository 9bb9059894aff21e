"""Pages laid out by WeasyPrint. It is large and needs Pango, so that only who prints imports this."""

import logging
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from typing import Any, NoReturn

from weasyprint import CSS, HTML  # type: ignore[import-untyped]
from weasyprint.urls import URLFetcher  # type: ignore[import-untyped]

# It warns of names that several drawings have, each of which keeps its own.
logging.getLogger("weasyprint").setLevel(logging.ERROR)
# It tells of each page that it sets, and of what it does when all are set.
PROGRESS = logging.getLogger("weasyprint.progress")
PROGRESS.setLevel(logging.INFO)
PROGRESS.propagate = False


class NothingIsFetched(Exception):
    """Something on the pages asks for an address."""


class Refusing(URLFetcher):  # type: ignore[misc]
    """Fetches nothing: not from the network, not from the disk."""

    def fetch(self, url: str, headers: Any = None) -> NoReturn:
        """Refuse; what stands there is left out."""
        raise NothingIsFetched(url)


class _Told(logging.Handler):
    """Hands on that something went on; what that raises ends the work."""

    def __init__(self, step: Callable[[], None]) -> None:
        super().__init__()
        self.step = step

    def emit(self, record: logging.LogRecord) -> None:
        """Something went on."""
        self.step()


@contextmanager
def telling(step: Callable[[], None]) -> Iterator[None]:
    """Call `step` with each page that is set in this block."""
    told = _Told(step)
    PROGRESS.addHandler(told)
    try:
        yield
    finally:
        PROGRESS.removeHandler(told)


def laid_out(html: str, styles: Iterable[str]) -> Any:
    """The pages of a document."""
    sheets = [CSS(string=style, url_fetcher=Refusing()) for style in styles]
    return HTML(string=html, url_fetcher=Refusing()).render(stylesheets=sheets)


def written(document: Any, identifier: str, step: Callable[[], None] = lambda: None) -> bytes:
    """Laid out pages as a file; the same ones give the same bytes. `step` is called with each page."""
    for page in document.pages:
        page.paint = _telling_first(page.paint, step)
    pdf = document.write_pdf(pdf_identifier=identifier.encode(), pdf_tags=True)
    assert isinstance(pdf, bytes)
    return pdf


def _telling_first(paint: Callable[..., None], step: Callable[[], None]) -> Callable[..., None]:
    def painted(*args: Any, **kwargs: Any) -> None:
        step()
        paint(*args, **kwargs)

    return painted
