"""`manage.py first_user`: somebody who can sign in and found a collaboration."""

import getpass
import sys
from typing import Any

from django.contrib.auth.password_validation import validate_password
from django.core.exceptions import ValidationError
from django.core.management.base import BaseCommand, CommandError, CommandParser
from django.core.validators import validate_email

from core.people.models import User


class Command(BaseCommand):
    """Makes a user; all others come by an invitation to a collaboration."""

    help = "Make a user who can sign in. The password is asked for, or read as one line from standard input."

    def add_arguments(self, parser: CommandParser) -> None:
        """Address and name."""
        parser.add_argument("email", help="the address to sign in with")
        parser.add_argument("--name", default="", help="shown to others")

    def handle(self, *args: Any, **options: Any) -> None:
        """Check and create."""
        email = options["email"].strip().lower()
        try:
            validate_email(email)
            if User.objects.filter(email=email).exists():
                raise CommandError(f"{email} is a user already", returncode=2)
            user = User(email=email, name=options["name"])
            password = self._password()
            validate_password(password, user)
        except ValidationError as error:
            raise CommandError(" ".join(error.messages), returncode=2) from None
        User.objects.create_user(email, password, name=options["name"])
        self.stdout.write(f"{email} can sign in now.")

    @staticmethod
    def _password() -> str:
        if not sys.stdin.isatty():
            return sys.stdin.readline().rstrip("\n")
        password = getpass.getpass("Password: ")
        if getpass.getpass("Again: ") != password:
            raise CommandError("the two passwords differ", returncode=2)
        return password
