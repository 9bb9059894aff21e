"""`manage.py serve`: the site on a single machine."""

from typing import Any

from core.management.site_command import SiteCommand
from core.single_machine import Site


class Command(SiteCommand):
    """Prepares the database and runs Redis, a worker and the web server until Ctrl-C."""

    help = "Run the site on this machine: database, Redis, worker and web server. Ctrl-C ends all of it."

    def use(self, site: Site, options: dict[str, Any]) -> None:
        """Say where it is and stay."""
        self.stdout.write(f"Inradius is at {site.address}  (Ctrl-C ends it)")
        self.stdout.flush()
        site.watch()
