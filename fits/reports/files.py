"""Answers that are files: charts, the result, the ranking."""

import json

from django.http import Http404, HttpRequest, HttpResponse

from fits.reports.exports import ranking_csv, table_csv
from fits.reports.features.files import feature_file
from fits.reports.figures import figure_of
from fits.reports.figures.figure import Figure
from fits.reports.figures.svg import svg
from fits.reports.snapshot import Snapshot


def chart_file(request: HttpRequest, snapshot: Snapshot, name: str, form: str) -> HttpResponse:
    """A chart as "svg" or "csv" under the level and curve in the query."""
    figure = figure_of(name, snapshot, level=request.GET.get("level"), curve=request.GET.get("curve"))
    if figure is None or form not in {"svg", "csv"}:
        raise Http404
    return figure_file(figure, form)


def figure_file(figure: Figure, form: str) -> HttpResponse:
    """A figure as "svg" or "csv"."""
    if form == "svg":
        return text_file(svg(figure), "image/svg+xml", f"{figure.name}.svg", shown=True)
    return text_file(table_csv(figure.table), "text/csv", f"{figure.name}.csv")


def features_file(request: HttpRequest, snapshot: Snapshot, name: str) -> HttpResponse:
    """A file of the features under the level and curve in the query."""
    found = feature_file(snapshot, name, level=request.GET.get("level"), curve=request.GET.get("curve"))
    if found is None:
        raise Http404
    return text_file(found.text, found.kind, name)


def result_file(snapshot: Snapshot) -> HttpResponse:
    """The whole result as JSON."""
    return text_file(json.dumps(snapshot.result, indent=1), "application/json", "result.json")


def ranking_file(snapshot: Snapshot) -> HttpResponse:
    """The ranking table as CSV."""
    return text_file(ranking_csv(snapshot), "text/csv", "ranking.csv")


def text_file(text: str, kind: str, name: str, *, shown: bool = False) -> HttpResponse:
    """A text as a file to keep, or to be shown as it is."""
    disposition = f'{"inline" if shown else "attachment"}; filename="{name}"'
    response = HttpResponse(text.encode(), content_type=f"{kind}; charset=utf-8")
    response["Content-Disposition"] = disposition
    # Opened by itself, a drawing is a document: it may style itself and do nothing else.
    response["Content-Security-Policy"] = (
        "default-src 'none'; style-src 'unsafe-inline'; img-src data:; sandbox"
    )
    return response
