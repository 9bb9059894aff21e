"""How often the confidence sets hold a truth that is known, by simulation."""

import sys
from functools import partial
from typing import Any

from django.core.management.base import CommandParser

from fits.engine.coverage.cells import POINTS, Cell, ErrorKind, cells
from fits.engine.coverage.curves import TrueCurve
from fits.engine.coverage.repeats import CellCoverage, run_cell
from fits.engine.settings import DEFAULT_LEVELS, Settings
from fits.management.base import FileCommand
from fits.management.coverage_document import coverage_document, coverage_json, coverage_tables
from fits.management.in_parallel import in_parallel, usable_cores
from fits.management.progress_bar import ProgressBar

# Half of what an assessment draws by default: the quantiles are a little less certain, which flatters no set.
DRAWS = 1000


class Command(FileCommand):
    """`manage.py coverage`"""

    help = "Simulate how often the confidence sets hold the truth, and how often they reject wrong curves."

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--repeats", type=int, default=1500, help="of each setting, default 1500")
        parser.add_argument("--seed", type=int, default=1, help="default 1")
        parser.add_argument("--draws", type=int, default=DRAWS, help=f"of each repeat, default {DRAWS}")
        parser.add_argument(
            "--processes", type=int, default=usable_cores(), help="default: one for each core"
        )
        parser.add_argument("--json", metavar="FILE", help="write the shares as JSON; - for standard output")
        only = parser.add_argument_group("only some settings; their numbers stay the same")
        only.add_argument("--errors", nargs="+", choices=[kind.value for kind in ErrorKind])
        only.add_argument("--points", nargs="+", type=int, choices=POINTS)
        only.add_argument("--truth", nargs="+", choices=[kind.value for kind in TrueCurve])

    def compute(self, options: dict[str, Any]) -> None:
        for name in ("repeats", "processes"):
            if options[name] < 1:
                self.refuse(f"--{name}: at least 1")
        if options["seed"] < 0:
            self.refuse("--seed: at least 0")
        settings = Settings(levels=DEFAULT_LEVELS, draws=options["draws"])
        found = _run(_chosen(options), options, settings)
        if options["json"]:
            text = coverage_json(coverage_document(found, seed=options["seed"], settings=settings))
            if options["json"] == "-":
                self.stdout.write(text)
                return
            self.write_file(options["json"], text)
        self.stdout.write(coverage_tables(found, settings=settings))


def _chosen(options: dict[str, Any]) -> list[tuple[int, Cell]]:
    """The settings asked for, with their places among all: what seeds them."""
    return [
        (index, cell)
        for index, cell in enumerate(cells())
        if (not options["errors"] or cell.errors.value in options["errors"])
        and (not options["points"] or cell.points in options["points"])
        and (not options["truth"] or cell.truth.value in options["truth"])
    ]


def _run(chosen: list[tuple[int, Cell]], options: dict[str, Any], settings: Settings) -> list[CellCoverage]:
    work = partial(_work, seed=options["seed"], repeats=options["repeats"], settings=settings)
    bar = ProgressBar(sys.stderr, total=len(chosen), of="settings")
    found: dict[int, CellCoverage] = {}
    try:
        for place, coverage in in_parallel(work, chosen, processes=min(options["processes"], len(chosen))):
            found[place] = coverage
            bar.advance()
    finally:
        bar.close()
    return [found[place] for place in range(len(chosen))]


def _work(piece: tuple[int, Cell], *, seed: int, repeats: int, settings: Settings) -> CellCoverage:
    index, cell = piece
    return run_cell(cell, index=index, seed=seed, repeats=repeats, settings=settings)
