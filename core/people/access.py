"""Who may do what, in one place.

Each model that belongs to a collaboration names its way there in `COLLABORATION_PATH`. Views load rows by
`load`, so that a stranger cannot tell a row that is hidden from one that is not there.
"""

from enum import StrEnum
from typing import Protocol, TypeVar

from django.contrib.auth.models import AnonymousUser
from django.core.exceptions import PermissionDenied
from django.db.models import Model, QuerySet
from django.http import Http404

from core.people.models import Collaboration, Membership, Role, User


class Action(StrEnum):
    """What can be done in a collaboration."""

    VIEW = "see measurements, theories, assessments and reports"
    SUBMIT = "submit theories and curves"
    ASSESS = "start and cancel assessments"
    PUBLISH = "add measurements, upload and publish releases"
    REPORT = "write reports and share them by link"
    MANAGE = "add people and change the collaboration"


PERMITTED: dict[Action, frozenset[Role]] = {
    Action.VIEW: frozenset({Role.LEAD, Role.MEMBER}),
    Action.SUBMIT: frozenset({Role.LEAD, Role.MEMBER}),
    Action.ASSESS: frozenset({Role.LEAD, Role.MEMBER}),
    Action.PUBLISH: frozenset({Role.LEAD}),
    Action.REPORT: frozenset({Role.LEAD}),
    Action.MANAGE: frozenset({Role.LEAD}),
}

Someone = User | AnonymousUser


class BelongsToCollaboration(Protocol):
    """A model whose rows belong to a collaboration."""

    COLLABORATION_PATH: str


Row = TypeVar("Row", bound=Model)


def role_of(user: Someone, collaboration: Collaboration) -> Role | None:
    """The user's role, None for a stranger."""
    if not isinstance(user, User):
        return None
    membership = Membership.objects.filter(user=user, collaboration=collaboration).first()
    return Role(membership.role) if membership else None


def may(user: Someone, action: Action, collaboration: Collaboration) -> bool:
    """Whether the user may do this here; for showing or hiding what leads to it."""
    return role_of(user, collaboration) in PERMITTED[action]


def require(user: Someone, action: Action, collaboration: Collaboration) -> None:
    """Refuse a stranger with 404 and a member without the right with 403."""
    role = role_of(user, collaboration)
    if role is None:
        raise Http404
    if role not in PERMITTED[action]:
        raise PermissionDenied(f"a {role} may not {action.value}")


def seen_by(rows: QuerySet[Row], user: Someone) -> QuerySet[Row]:
    """Those of the rows that belong to the user's collaborations."""
    path = _path(rows.model)
    key = "pk__in" if not path else f"{path}__in"
    if not isinstance(user, User):
        return rows.none()
    mine = Membership.objects.filter(user=user).values("collaboration")
    return rows.filter(**{key: mine})


def load(rows: QuerySet[Row], user: Someone, action: Action, pk: int) -> Row:
    """The row with this key for someone who may do this to it; 404 for strangers, 403 without the right."""
    row = seen_by(rows, user).filter(pk=pk).first()
    if row is None:
        raise Http404
    require(user, action, collaboration_of(row))
    return row


def collaboration_of(row: Model) -> Collaboration:
    """The collaboration that a row belongs to."""
    owner: object = row
    path = _path(type(row))
    for step in path.split("__") if path else []:
        owner = getattr(owner, step)
    assert isinstance(owner, Collaboration)
    return owner


def _path(model: type[Model]) -> str:
    if model is Collaboration:
        return ""
    path = getattr(model, "COLLABORATION_PATH", None)
    assert isinstance(path, str), f"{model.__name__} names no COLLABORATION_PATH"
    return path
