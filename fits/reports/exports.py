"""Tables as CSV, safe to open in a spreadsheet."""

import csv
import io
from collections.abc import Iterable, Sequence

from fits.reports.figures.figure import Cell, Table
from fits.reports.snapshot import Snapshot

# A spreadsheet takes a text cell that begins so for a formula.
FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def csv_text(columns: Sequence[str], rows: Iterable[Sequence[Cell]]) -> str:
    """Rows as CSV; numbers to their last bit, text that looks like a formula behind an apostrophe."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\r\n")
    writer.writerow([_cell(column) for column in columns])
    writer.writerows([_cell(value) for value in row] for row in rows)
    return out.getvalue()


def table_csv(table: Table) -> str:
    """The numbers behind a figure."""
    return csv_text(table.columns, table.rows)


def ranking_csv(snapshot: Snapshot) -> str:
    """One row for each curve: everything of its verdict."""
    levels = snapshot.levels
    kinds = ("exact", "published", "calibrated", "scales")
    # Where some are not shown, their number says what the ranks are among.
    judged = (len(snapshot.curves) + snapshot.hidden,) if snapshot.hidden else ()
    columns = (
        "rank",
        "curve",
        "order_settled",
        "distance",
        "entry_level_published",
        "entry_level_calibrated",
        "p_value",
        "p_value_error",
        "scale_p_value",
        "worst_scale_functions",
        "worst_scale_wider_than",
        "worst_scale_p_value",
        "interpolation_error",
        *(f"{kind}_{level}" for kind in kinds for level in levels),
        *("curves_judged" for _ in judged),
    )
    rows = []
    for curve in snapshot.curves:
        worst = curve["scales"]["worst"]
        sets = curve["inside"]
        rows.append(
            (
                curve["rank"],
                curve["name"],
                "yes" if curve["order_settled"] else "no",
                curve["distance"],
                curve["entry_level"]["published"],
                curve["entry_level"]["calibrated"],
                curve["p_value"],
                curve["p_value_error"],
                curve["scales"]["p_value"],
                worst["functions"],
                worst["wider_than"],
                worst["p_value"],
                curve["interpolation_error"],
                *("inside" if sets[kind][level] else "outside" for kind in kinds for level in levels),
                *judged,
            )
        )
    return csv_text(columns, rows)


def _cell(value: Cell) -> str:
    if value is None:
        return ""
    if isinstance(value, str):
        return f"'{value}" if value.startswith(FORMULA_STARTS) else value
    return repr(value) if isinstance(value, float) else str(value)
