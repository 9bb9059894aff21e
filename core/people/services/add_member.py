"""Add someone without asking them, for commands; on pages people are invited."""

from functools import partial

from django.db import IntegrityError, transaction

from core.people.log import Deed, record
from core.people.mails import send_password_link
from core.people.models import Collaboration, Membership, User
from core.people.services.rules import known_address, known_role, lock, people_page, refuse_who_is_here


@transaction.atomic
def add_member(
    *, collaboration: Collaboration, email: str, role: str, name: str = "", by: User | None = None
) -> Membership:
    """Add someone by e-mail address; an unknown address gets a user and the e-mail that sets a password."""
    address, role = known_address(email), known_role(role)
    lock(collaboration)
    refuse_who_is_here(address, collaboration)
    user = _user_of(address, name.strip())
    if not user.has_usable_password():
        # Robust: someone whose e-mail failed is here all the same and can ask for a new one at sign-in.
        transaction.on_commit(partial(send_password_link, user, collaboration), robust=True)
    record(
        Deed.ADDED_PERSON,
        who=by,
        collaboration=collaboration,
        about=f"{user}, as {role}",
        url=people_page(collaboration),
    )
    return Membership.objects.create(user=user, collaboration=collaboration, role=role)


def _user_of(address: str, name: str) -> User:
    user = User.objects.filter(email=address).first()
    if user is not None:
        return user
    try:
        with transaction.atomic():
            return User.objects.create_user(address, name=name)
    except IntegrityError:
        # Another collaboration has added the same address at this moment; its lock is not ours.
        return User.objects.get(email=address)
