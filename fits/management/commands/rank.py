"""Ranks curves against a table of data, without database or broker."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from django.core.management.base import CommandParser
from threadpoolctl import threadpool_limits

from fits.assessments.detail import detail_document, error_sizes
from fits.assessments.document import level_key, result_document
from fits.engine.assess import assess
from fits.engine.scales import TABLE_DRAWS
from fits.management.base import FileCommand
from fits.management.options import add_options, read_inputs
from fits.management.text_table import aligned
from fits.reports import numbers


class Command(FileCommand):
    """`manage.py rank DATA CURVE …`"""

    help = "Rank curves against data: distance, p-values, and which confidence sets hold them."

    def add_arguments(self, parser: CommandParser) -> None:
        add_options(parser)
        parser.add_argument("curves", metavar="CURVE", nargs="+", help="table with x and y")
        parser.add_argument("--page", metavar="FILE", help="write a report page that stands alone")

    def compute(self, options: dict[str, Any]) -> None:
        inputs = read_inputs(options, options["curves"], command="rank")
        rng = np.random.default_rng(inputs.seed)
        # As in a worker: sums split over threads come out otherwise rounded.
        with threadpool_limits(limits=1):
            found = assess(inputs.data, inputs.curves, inputs.settings, rng=rng)
            result = result_document(found, seed=inputs.seed)
        if options["page"]:
            # Loaded here, since charts take longer to load than a ranking to compute.
            from fits.reports.standalone import render_standalone

            page = render_standalone(result, detail_document(found), inputs.context)
            self.write_file(options["page"], page)
        if options["json"]:
            self.write_json(options["json"], result)
        if options["json"] != "-":
            self.stdout.write(ranking_table(result, error_sizes(found)))


def ranking_table(result: dict[str, Any], sizes: Sequence[dict[str, Any]] = ()) -> str:
    """The result for people at a terminal; with the estimates of the error size where it is not known."""
    levels = [level_key(radius["level"]) for radius in result["radii"]]
    smallest = numbers.smallest_p_value(result["draws"])
    rows = [
        ["rank", "curve", "distance", "entry", "p-value", "scale p", "worst scale"]
        + [f"{100 * float(level):g} %" for level in levels]
    ]
    for curve in result["curves"]:
        marks = [_word(curve, level) for level in levels]
        rows.append(
            [
                f"{curve['rank']}{'' if curve['order_settled'] else '~'}",
                curve["name"],
                f"{curve['distance']:.4f}",
                numbers.entry_level(curve["entry_level"]["calibrated"], draws=result["draws"]),
                numbers.p_value(curve["p_value"], curve["p_value_error"], smallest=smallest),
                numbers.p_value(curve["scales"]["p_value"], smallest=numbers.smallest_p_value(TABLE_DRAWS)),
                f"> {curve['scales']['worst']['wider_than']:.3g}",
                *marks,
            ]
        )
    lines = aligned(rows)
    if not all(curve["order_settled"] for curve in result["curves"]):
        lines += ["", "~ the data do not settle the order of neighbours so marked"]
    if any("but off" in row[-k] for row in rows[1:] for k in range(1, len(levels) + 1)):
        lines += ["but off: inside the ball, rejected by the scale set; see its scale p and worst scale"]
    lines += ["", *aligned(_radii(result)), "", *_summary(result, sizes)]
    return "\n".join(lines + [f"Note: {note['message']}" for note in result["notes"]])


def _word(curve: dict[str, Any], level: str) -> str:
    if not curve["inside"]["exact"][level]:
        return "outside"
    return "inside" if curve["inside"]["scales"][level] else "inside, but off"


def _radii(result: dict[str, Any]) -> list[list[str]]:
    kinds = ("published", "calibrated", "cautious")
    return [["radius", *kinds]] + [
        [f"{100 * radius['level']:g} %", *(f"{radius[kind]:.4f}" for kind in kinds)]
        for radius in result["radii"]
    ]


def _summary(result: dict[str, Any], sizes: Sequence[dict[str, Any]]) -> list[str]:
    fit, leftover = result["fit"], result["leftover"]
    lines = [
        f"{result['release']['points']} points, resolution {fit['resolution']}, "
        f"{fit['effective_parameters']:.2f} effective parameters, {fit['shrinkage']} shrinkage"
    ]
    if leftover:
        lines.append(
            f"leftover χ² {leftover['chi2']:.2f} on {leftover['dof']}, p = {leftover['p_value']:.3g}"
        )
    for size in sizes:
        used = ", which is used" if size is sizes[0] else ""
        lines.append(
            f"error size from {size['source']}: {size['sigma']:.4g} ± {size['standard_error']:.2g}{used}"
        )
    lines.append("Inside means not ruled out at that level; it never means proved.")
    return lines
