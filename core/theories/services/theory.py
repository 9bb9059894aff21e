"""Add a theory or change its words."""

from collections.abc import Mapping
from typing import Any

from django.db import IntegrityError, transaction

from core.errors import UserError
from core.people.access import desk_of
from core.people.log import Deed, record
from core.people.models import Collaboration, LogEntry, User
from core.people.services.rules import lock
from core.revision import save_if_current
from core.theories.models import Theory
from core.theories.rules import refuse_registered

WORDS = ("name", "proposed_by", "description", "reference")


@transaction.atomic
def create_theory(
    *,
    user: User,
    collaboration: Collaboration,
    name: str,
    proposed_by: str = "",
    description: str = "",
    reference: str = "",
) -> Theory:
    """A new theory, without curves; a student's stands at their desk."""
    theory = Theory(
        collaboration=collaboration,
        name=name,
        proposed_by=proposed_by,
        description=description,
        reference=reference,
        submitted_by=user,
        desk=desk_of(user, collaboration),
    )
    try:
        with transaction.atomic():
            theory.save()
    except IntegrityError as error:
        _refuse_taken(theory, error)
    record_theory(Deed.ADDED_THEORY, theory, user)
    return theory


@transaction.atomic
def edit_theory(
    *, by: User, theory: Theory, seen: int, name: str, proposed_by: str, description: str, reference: str
) -> None:
    """Other words for it, unless somebody has changed them since revision `seen`; its curves stay as they are."""
    # Of two who swap the names of two theories at once, each would wait for the other.
    lock(theory.collaboration)
    # Whoever submits a curve at this moment holds the same lock.
    Theory.objects.select_for_update().get(pk=theory.pk)
    refuse_registered(theory)
    before = Theory.objects.values(*WORDS).get(pk=theory.pk)
    theory.name, theory.proposed_by = name, proposed_by
    theory.description, theory.reference = description, reference
    try:
        with transaction.atomic():
            save_if_current(theory, seen=seen, fields=WORDS)
    except IntegrityError as error:
        _refuse_taken(theory, error)
    detail: dict[str, Any] = {"changed": [word for word in WORDS if before[word] != getattr(theory, word)]}
    if "name" in detail["changed"]:
        detail["name_before"] = before["name"]
    record_theory(Deed.EDITED_THEORY, theory, by, detail)


def record_theory(
    deed: Deed,
    theory: Theory,
    who: User,
    detail: Mapping[str, Any] | None = None,
    into: list[LogEntry] | None = None,
) -> None:
    """Write into the log what was done to a theory."""
    record(
        deed,
        who=who,
        collaboration=theory.collaboration,
        about=theory.name,
        url=theory.get_absolute_url(),
        detail=detail,
        desk=theory.desk,
        into=into,
    )


def _refuse_taken(theory: Theory, error: IntegrityError) -> None:
    same = Theory.objects.filter(collaboration=theory.collaboration_id, desk=theory.desk_id, name=theory.name)
    if not same.exclude(pk=theory.pk).exists():
        raise error
    where = "here" if theory.desk_id is None else "at this desk"
    reason = f"a theory named “{theory.name}” is {where} already"
    raise UserError("name-taken", reason, "Choose another name") from error
