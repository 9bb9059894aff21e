"""What the commands that compute from files have in common: bad input ends with one line and exit code 2."""

import json
import sys
from pathlib import Path
from typing import Any, NoReturn

from django.core.management.base import BaseCommand, CommandParser

from core.user_error import UserError
from fits.engine.refusal import InputRefused


class FileCommand(BaseCommand):
    """A command without database and broker."""

    requires_system_checks: list[str] = []  # noqa: RUF012

    def create_parser(self, prog_name: str, subcommand: str, **kwargs: Any) -> CommandParser:
        """A parser whose complaints take one line too."""
        parser = super().create_parser(prog_name, subcommand, **kwargs)

        def complain(message: str) -> NoReturn:
            self.refuse(message)

        parser.error = complain  # type: ignore[method-assign]
        return parser

    def handle(self, *args: Any, **options: Any) -> None:
        try:
            self.compute(options)
        except (UserError, InputRefused) as error:
            self.refuse(str(error))

    def compute(self, options: dict[str, Any]) -> None:
        """What the command does."""
        raise NotImplementedError

    def refuse(self, message: str) -> NoReturn:
        """End with one line on standard error."""
        self.stderr.write(" ".join(message.split()))
        sys.exit(2)

    def write_json(self, path: str, document: dict[str, Any]) -> None:
        """Write a document to a file, or to standard output for "-"."""
        text = json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False)
        if path == "-":
            self.stdout.write(text)
        else:
            self.write_file(path, text + "\n")

    def write_file(self, path: str, text: str) -> None:
        """Write a file, with the family of errors that its caller can mend."""
        try:
            Path(path).write_text(text, encoding="utf-8")
        except OSError as error:
            raise UserError(
                "not-written", f"cannot be written: {error.strerror}", "Check the path", path
            ) from error
