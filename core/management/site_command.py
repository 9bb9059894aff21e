"""What the commands that run the site have in common."""

from abc import abstractmethod
from typing import Any

from django.core.management.base import BaseCommand, CommandError, CommandParser

from core.processes import ProcessEnded
from core.single_machine import Site, running_site
from core.user_error import UserError

DEFAULT_PORT = 8000


class SiteCommand(BaseCommand):
    """Runs the site while `use` does its part. Exit 2 for what its user can mend, 1 for a fault of ours."""

    requires_system_checks: list[str] = []  # noqa: RUF012 - Django's own declaration

    def add_arguments(self, parser: CommandParser) -> None:
        """The options of both commands."""
        parser.add_argument("--port", type=int, default=DEFAULT_PORT, help="where to listen (default 8000)")

    def handle(self, *args: Any, **options: Any) -> None:
        """Run the site until `use` is through."""
        try:
            with running_site(options["port"]) as site:
                self.use(site, options)
        except KeyboardInterrupt:
            self.stdout.write("\nEnded.")
        except UserError as error:
            raise CommandError(str(error), returncode=2) from None
        except ProcessEnded as error:
            raise CommandError(str(error), returncode=1) from None

    @abstractmethod
    def use(self, site: Site, options: dict[str, Any]) -> None:
        """What this command does with the running site."""
