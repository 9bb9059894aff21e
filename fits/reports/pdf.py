"""Pages laid out by WeasyPrint. It is large and needs Pango, so that only who prints imports this."""

import logging
from collections.abc import Iterable
from typing import Any, NoReturn

from weasyprint import CSS, HTML  # type: ignore[import-untyped]
from weasyprint.urls import URLFetcher  # type: ignore[import-untyped]

# It warns of names that several drawings have, each of which keeps its own.
logging.getLogger("weasyprint").setLevel(logging.ERROR)


class NothingIsFetched(Exception):
    """Something on the pages asks for an address."""


class Refusing(URLFetcher):  # type: ignore[misc]
    """Fetches nothing: not from the network, not from the disk."""

    def fetch(self, url: str, headers: Any = None) -> NoReturn:
        """Refuse; what stands there is left out."""
        raise NothingIsFetched(url)


def laid_out(html: str, styles: Iterable[str]) -> Any:
    """The pages of a document."""
    sheets = [CSS(string=style, url_fetcher=Refusing()) for style in styles]
    return HTML(string=html, url_fetcher=Refusing()).render(stylesheets=sheets)


def written(document: Any, identifier: str) -> bytes:
    """Laid out pages as a file; the same ones give the same bytes."""
    pdf = document.write_pdf(pdf_identifier=identifier.encode(), pdf_tags=True)
    assert isinstance(pdf, bytes)
    return pdf
