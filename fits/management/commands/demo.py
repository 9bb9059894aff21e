"""`manage.py demo`: the site on a single machine with a made-up scenario in it."""

from typing import Any

from django.core.management.base import CommandParser

from core.management.site_command import SiteCommand
from core.single_machine import Site
from fits.management.demo import load, show

SECONDS_TO_ASSESS = 300.0


class Command(SiteCommand):
    """Loads the demo, has its assessments computed by the worker, prints address and sign-ins, and stays."""

    help = "Run the site with an invented lake and a lab class in it. Ctrl-C ends all its processes."

    def add_arguments(self, parser: CommandParser) -> None:
        """Those of the site, and whether to stay."""
        super().add_arguments(parser)
        parser.add_argument(
            "--exit-when-ready",
            action="store_true",
            help="check that a report opens by its share link, print the rankings and end",
        )

    def use(self, site: Site, options: dict[str, Any]) -> None:
        """Load and show."""
        assessments = load.load()
        passwords = load.fresh_passwords()
        self.stdout.write(
            f"\nInradius is at {site.address}  (Ctrl-C ends it)\n\nSign-ins of the demo, all made up:"
        )
        for account, password in passwords.items():
            self.stdout.write(f"  {account.email:<24} {password:<18} {account.does}")
        self.stdout.write(f"\nThe worker computes {len(assessments)} assessments …")
        self.stdout.flush()
        site.processes.wait_until(
            lambda: show.all_done(assessments), seconds=SECONDS_TO_ASSESS, what="the demo's assessments"
        )
        self.stdout.write("They are done. It looks for the peaks that the data demand …")
        self.stdout.flush()
        shown = show.reported(assessments)
        site.processes.wait_until(
            lambda: show.all_found(shown), seconds=SECONDS_TO_ASSESS, what="the features of the demo's report"
        )
        report = show.report_on(shown)
        self.stdout.write(
            f"They are found. Its report: {site.address.rstrip('/')}{report.get_absolute_url()}"
        )
        self.stdout.flush()
        if not options["exit_when_ready"]:
            site.watch()
        self.stdout.write(f"\n{show.rankings(assessments)}\n")
        sentence = show.open_by_share_link(report, site.address)
        self.stdout.write(f"A report opens by its share link and says:\n  {sentence}")
