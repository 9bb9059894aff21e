"""Times the engine beside the library routines that do the same."""

import sys
from typing import Any

from django.core.management.base import CommandParser

from fits.management.base import FileCommand
from fits.management.bench.case import Row
from fits.management.bench.run import run_bench

REPEATS = 7
QUICK_SCALE = 20


class Command(FileCommand):
    """`manage.py bench`: exit 0 when every row holds, 1 when one does not."""

    help = (
        "Time the engine beside library routines: medians of processor time after a warm-up, "
        "one thread on both sides."
    )

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("--json", metavar="FILE", help="write the rows as JSON; - for standard output")
        parser.add_argument(
            "--quick", action="store_true", help="one repeat of small cases, to try the command; says nothing"
        )

    def compute(self, options: dict[str, Any]) -> None:
        # Rows come slowly: where the document goes to standard output, they go to the other one.
        stream = self.stderr if options["json"] == "-" else self.stdout
        if options["quick"]:
            rows = run_bench(repeats=1, scale=QUICK_SCALE, tell=lambda row: stream.write(line_of(row)))
        else:
            rows = run_bench(repeats=REPEATS, tell=lambda row: stream.write(line_of(row)))
        if options["json"]:
            self.write_json(options["json"], {"rows": rows})
        if not options["quick"] and not all(row["holds"] for row in rows):
            sys.exit(1)


def line_of(row: Row) -> str:
    """A row for people at a terminal."""
    verdict = "holds" if row["holds"] else "does not hold"
    return f"{verdict}: {row['ratio']:.3g} ({row['wanted']})  {row['name']}"
