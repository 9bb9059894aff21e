"""Which peaks do data demand, where and how high, without database or broker."""

from typing import Any

import numpy as np
from django.core.management.base import CommandParser
from threadpoolctl import threadpool_limits

from core.user_error import UserError
from fits.assessments.features_document import features_document
from fits.engine.assess import assess
from fits.engine.features.find import count_peaks, feature_case, find_peak, find_spacing, windows_of
from fits.management.base import FileCommand
from fits.management.options import add_options, read_inputs
from fits.reports import numbers


class Command(FileCommand):
    """`manage.py features DATA [--windows a:b,c:d]`"""

    help = "Find what every curve in the confidence ball must have: peaks, their places and heights, their spacing."

    def add_arguments(self, parser: CommandParser) -> None:
        add_options(parser, matrix_option="--window-matrix")
        parser.add_argument(
            "--windows",
            default="",
            metavar="A:B,C:D",
            help="where to seek one peak each; default: between the dips",
        )

    def compute(self, options: dict[str, Any]) -> None:
        given = windows_in(options["windows"])
        inputs = read_inputs(options, [], command="features")
        with threadpool_limits(limits=1):
            found = assess(inputs.data, [], inputs.settings, rng=np.random.default_rng(inputs.seed))
            case = feature_case(found)
            peaks = [find_peak(case, window, with_map=False) for window in windows_of(case, given)]
            document = features_document(case, peaks, count_peaks(case), find_spacing(case))
        if options["json"]:
            self.write_json(options["json"], document)
        if options["json"] != "-":
            self.stdout.write(features_in_words(document, draws=inputs.settings.draws))


def windows_in(text: str) -> tuple[tuple[float, float], ...]:
    """ "a:b,c:d" as pairs of numbers."""
    windows = []
    for part in filter(None, text.split(",")):
        ends = part.split(":")
        try:
            low, high = (float(end) for end in ends)
        except ValueError:
            reason = f"window “{part[:40]}” is not two numbers with a colon between them"
            raise UserError("window", reason, "Give windows as 40:100,150:210") from None
        windows.append((low, high))
    return tuple(windows)


def features_in_words(document: dict[str, Any], *, draws: int) -> str:
    """The result for people at a terminal."""
    lines = []
    for entry in document["count"]:
        if entry["price_lower"] > 0.0:
            level = numbers.entry_level(entry["demanded_level"], draws=draws)
            upper = "?" if entry["price_upper"] is None else f"{entry['price_upper']:.4f}"
            lines.append(
                f"more than {entry['at_most']} peaks: demanded up to {level} "
                f"(price of at most {entry['at_most']}: {entry['price_lower']:.4f} to {upper})"
            )
    if not lines:
        lines.append("no peak is demanded")
    for peak in document["peaks"]:
        low, high = peak["window"]
        lines.append(f"\npeak between {low:.6g} and {high:.6g}")
        absent = peak["no_peak"]["entry_level"]
        level = "an unknown level" if absent is None else numbers.entry_level(absent, draws=draws)
        lines.append(f"  demanded up to {level}")
        for key, stretches in peak["location"].items():
            places = " and ".join(f"{start:.6g} to {end:.6g}" for start, end in stretches) or "nowhere"
            bottom, top = peak["height"][key]
            height = "unknown" if bottom is None or top is None else f"{bottom:.6g} to {top:.6g}"
            lines.append(f"  {100 * float(key):g} %: at {places}; height {height}")
    if document["spacing"] is not None:
        lines.append("\neven spacing of the peaks")
        for level, intervals in document["spacing"]["interval"].items():
            places = " and ".join(f"{start:.6g} to {end:.6g}" for start, end in intervals) or "rejected"
            lines.append(f"  {100 * float(level):g} %: {places}")
    return "\n".join(lines)
