"""Bring the made-up scenario in, through the same services as the pages do."""

import secrets

from core.people.models import User
from fits.assessments.models import Assessment
from fits.management.demo import load_class, load_survey
from fits.management.demo.accounts import ACCOUNTS, Account


def load() -> list[Assessment]:
    """The demo's assessments in order, the survey's by release first; what is there already is not doubled."""
    return [*load_survey.load(), *load_class.load()]


def fresh_passwords() -> dict[Account, str]:
    """A new password for each account at each start, so that none of them can be known from the code."""
    passwords = {account: f"merrow-{secrets.token_hex(4)}" for account in ACCOUNTS}
    for account, password in passwords.items():
        user = User.objects.get(email=account.email)
        user.set_password(password)
        user.save(update_fields=["password"])
    return passwords
