"""A result as one file that needs no server: styles, scripts and drawings are inside it."""

import base64
import json
from typing import Any

from django.template.loader import render_to_string
from django.utils.safestring import SafeString, mark_safe

from fits.reports.exports import ranking_csv, table_csv
from fits.reports.features.files import feature_file
from fits.reports.figures.figure import Figure
from fits.reports.figures.svg import svg
from fits.reports.page import result_page
from fits.reports.snapshot import Document, Snapshot
from fits.reports.static_texts import static_text

STYLES = ("css/site.css", "css/report.css", "css/plotly.css")
SCRIPTS = ("vendor/plotly/plotly-cartesian.min.js", "js/charts.js")


class InsideThePage:
    """Addresses that hold what they lead to."""

    def __init__(self, snapshot: Snapshot) -> None:
        self.snapshot = snapshot

    def chart(self, figure: Figure, form: str) -> str:
        """The chart as a data: address."""
        if form == "svg":
            return data_address("image/svg+xml", svg(figure))
        return data_address("text/csv", table_csv(figure.table))

    def result_json(self) -> str:
        """The result as a data: address."""
        return data_address("application/json", json.dumps(self.snapshot.result))

    def ranking_csv(self) -> str:
        """The ranking as a data: address."""
        return data_address("text/csv", ranking_csv(self.snapshot))

    def explained(self) -> str:
        """Words and notes are explained at the end of the page itself."""
        return ""

    def features(self, name: str) -> str:
        """A file of the features as a data: address; its charts are in the page already."""
        found = feature_file(self.snapshot, name)
        return "" if found is None or name == "plots.json" else data_address(found.kind, found.text)


def render_standalone(
    result: Document, detail: Document, context: Document, features: Document | None = None
) -> str:
    """The page. Reads static files only: no database, no request, no network."""
    snapshot = Snapshot(result, detail, context, features)
    page: dict[str, Any] = result_page(snapshot, InsideThePage(snapshot))
    page["styles"] = [_style(static_text(name)) for name in STYLES]
    page["scripts"] = [_script(static_text(name)) for name in SCRIPTS]
    return render_to_string("reports/standalone.html", page)


def data_address(kind: str, text: str) -> str:
    """A data: address of a text."""
    return f"data:{kind};charset=utf-8;base64,{base64.b64encode(text.encode()).decode()}"


# These are files of ours: nothing that anybody sent is in them. What would end the element early is broken up.
def _script(text: str) -> SafeString:
    return mark_safe(text.replace("</script", r"<\/script").replace("<!--", r"<\!--"))  # noqa: S308


def _style(text: str) -> SafeString:
    return mark_safe(text.replace("</style", r"<\/style"))  # noqa: S308
