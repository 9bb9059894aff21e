"""Changes to collaborations and to who belongs to them, one function each."""

from functools import partial

from django.core.exceptions import ValidationError
from django.core.validators import validate_email
from django.db import transaction

from core.errors import UserError
from core.people.invitation import send_invitation
from core.people.models import Collaboration, Membership, Role, User


@transaction.atomic
def create_collaboration(*, user: User, name: str, about: str = "") -> Collaboration:
    """A new collaboration, led by its creator."""
    collaboration = Collaboration.objects.create(name=name, about=about)
    Membership.objects.create(user=user, collaboration=collaboration, role=Role.LEAD)
    return collaboration


@transaction.atomic
def edit_collaboration(*, collaboration: Collaboration, name: str, about: str) -> None:
    """Another name or description."""
    collaboration.name, collaboration.about = name, about
    collaboration.save(update_fields=["name", "about"])


@transaction.atomic
def add_member(*, collaboration: Collaboration, email: str, role: str, name: str = "") -> Membership:
    """Add someone by e-mail address; an unknown address gets a user and the e-mail that sets a password."""
    address = email.strip().lower()
    try:
        validate_email(address)
    except ValidationError:
        raise UserError("email", f"“{email}” is not an e-mail address", "Correct it") from None
    _known_role(role)
    # The lock makes two adds of the same address wait for each other.
    Collaboration.objects.select_for_update().get(pk=collaboration.pk)
    user = User.objects.filter(email=address).first()
    if user is not None and Membership.objects.filter(user=user, collaboration=collaboration).exists():
        raise UserError("already-here", f"{address} is here already", "Change the role in the list instead")
    if user is None:
        user = User.objects.create_user(address, name=name.strip())
    if not user.has_usable_password():
        # Robust: someone whose e-mail failed is here all the same and can ask for a new one at sign-in.
        transaction.on_commit(partial(send_invitation, user, collaboration), robust=True)
    return Membership.objects.create(user=user, collaboration=collaboration, role=role)


@transaction.atomic
def remove_member(membership: Membership) -> None:
    """Take someone out; what they brought stays. The last lead cannot go."""
    _keep_a_lead(membership, "Make someone else a lead first")
    membership.delete()


@transaction.atomic
def change_role(membership: Membership, role: str) -> None:
    """Give someone another role. The last lead keeps it."""
    _known_role(role)
    if role != Role.LEAD:
        _keep_a_lead(membership, "Make someone else a lead first")
    membership.role = role
    membership.save(update_fields=["role"])


def _known_role(role: str) -> None:
    if role not in Role.values:
        raise UserError("role", f"“{role}” is not a role", f"Choose one of {', '.join(Role.values)}")


def _keep_a_lead(membership: Membership, remedy: str) -> None:
    # Two leads who remove each other at once must not both succeed: the collaboration's row is the lock.
    Collaboration.objects.select_for_update().get(pk=membership.collaboration_id)
    others = Membership.objects.filter(collaboration=membership.collaboration_id, role=Role.LEAD)
    if not others.exclude(pk=membership.pk).exists():
        raise UserError("last-lead", f"{membership.user} is the last lead here", remedy)
