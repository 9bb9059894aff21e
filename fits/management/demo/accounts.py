"""The people of the demo."""

import secrets
from dataclasses import dataclass

from core.people.models import Collaboration, User
from core.people.services import add_member, create_collaboration

MARK = "Invented for the demo: no such lake, people or data exist."


@dataclass(frozen=True)
class Account:
    """Somebody who can sign in to the demo."""

    email: str
    name: str
    does: str
    role: str


LEAD = Account("lead@merrow.example", "Lin Merrow", "leads the Lake Merrow survey", "lead")
MEMBER = Account("member@merrow.example", "Mo Merrow", "submits theories to it", "member")
OBSERVER = Account("harbour@merrow.example", "Ona Harbour", "reads what it finds", "observer")
TEACHER = Account("teacher@tank.example", "Tess Tank", "leads the wave tank class", "lead")
FIRST_BENCH = Account("bench1@tank.example", "Ben Tank", "is a student in it, at bench 1", "student")
SECOND_BENCH = Account("bench2@tank.example", "Bea Tank", "is a student in it, at bench 2", "student")
ACCOUNTS = (LEAD, MEMBER, OBSERVER, TEACHER, FIRST_BENCH, SECOND_BENCH)


def user_of(account: Account) -> User:
    """The account's user, made where there is none."""
    found = User.objects.filter(email=account.email).first()
    return found or User.objects.create_user(account.email, secrets.token_hex(), name=account.name)


def collaboration_of(name: str, about: str, *accounts: Account) -> tuple[Collaboration, bool]:
    """The collaboration of this name, led by the first of the accounts, and whether it is new."""
    lead, *others = accounts
    found = Collaboration.objects.filter(name=name, memberships__user=user_of(lead)).first()
    if found:
        return found, False
    made = create_collaboration(user=user_of(lead), name=name, about=f"{about} {MARK}")
    for account in others:
        user_of(account)
        add_member(collaboration=made, email=account.email, role=account.role, by=user_of(lead))
    return made, True
