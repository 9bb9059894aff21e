"""Add a theory or change its words."""

from django.db import IntegrityError, transaction

from core.errors import UserError
from core.people.models import Collaboration, User
from core.theories.models import Theory


def create_theory(
    *,
    user: User,
    collaboration: Collaboration,
    name: str,
    proposed_by: str = "",
    description: str = "",
    reference: str = "",
) -> Theory:
    """A new theory, without curves."""
    theory = Theory(
        collaboration=collaboration,
        name=name,
        proposed_by=proposed_by,
        description=description,
        reference=reference,
        submitted_by=user,
    )
    _save(theory)
    return theory


def edit_theory(*, theory: Theory, name: str, proposed_by: str, description: str, reference: str) -> None:
    """Other words for it; its curves stay as they are."""
    theory.name, theory.proposed_by = name, proposed_by
    theory.description, theory.reference = description, reference
    _save(theory)


def _save(theory: Theory) -> None:
    try:
        with transaction.atomic():
            theory.save()
    except IntegrityError as error:
        same = Theory.objects.filter(collaboration=theory.collaboration, name=theory.name)
        if not same.exclude(pk=theory.pk).exists():
            raise
        reason = f"a theory named “{theory.name}” is here already"
        raise UserError("name-taken", reason, "Choose another name") from error
