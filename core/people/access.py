"""Who sees which rows and may do what with them, by the table in `permissions`.

Each model that belongs to a collaboration names its way there in `COLLABORATION_PATH`; where its rows can stand at
a student's desk, the way to that student in `DESK_PATH`; where they tell something of a measurement's data, the way
to the measurement, which may be sealed, in `SEAL_PATH`. Views load rows by `load` and list them by `seen_by`, so that
nobody can tell a row that is hidden from one that is not there.
"""

from typing import Any, Protocol, TypeVar

from django.apps import apps
from django.contrib.auth.models import AnonymousUser
from django.core.exceptions import PermissionDenied
from django.db.models import Model, Q, QuerySet
from django.http import Http404
from django.utils import timezone

from core.people.models import Collaboration, Membership, Role, User
from core.people.permissions import PERMITTED, SHARERS, Action

__all__ = [
    "PERMITTED",
    "Action",
    "collaboration_of",
    "desk_of",
    "in_overview",
    "load",
    "may",
    "readers_of",
    "require",
    "role_of",
    "seen_by",
    "sees_data",
]


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
    """Those of the rows that the user may see: of their collaborations, of no desk that is closed to them, and of no
    measurement that is sealed for them."""
    if not isinstance(user, User):
        return rows.none()
    mine = Membership.objects.filter(user=user)
    key = _path(rows.model) or "pk"
    seen = Q(**{f"{key}__in": mine.values("collaboration")})
    if desk := _desk_path(rows.model):
        led = mine.filter(role=Role.LEAD).values("collaboration")
        shared = mine.filter(role__in=SHARERS).values("collaboration")
        seen &= (
            Q(**{desk: user})
            | Q(**{f"{key}__in": led})
            | Q(**{f"{desk}__isnull": True, f"{key}__in": shared})
        )
    if seal := getattr(rows.model, "SEAL_PATH", ""):
        seen &= _open(f"{seal}__") | Q(**{f"{seal}__in": _looked_at(user)})
    return rows.filter(seen)


def in_overview(rows: QuerySet[Row], user: User) -> QuerySet[Row]:
    """Those of the rows that pages of many list: what is shared and what stands at the user's own desk. A lead sees
    the other desks on their own page and by their addresses."""
    seen = seen_by(rows, user)
    if desk := _desk_path(rows.model):
        seen = seen.filter(Q(**{f"{desk}__isnull": True}) | Q(**{desk: user}))
    return seen


def sees_data(user: Someone, measurement: Model) -> bool:
    """Whether data and verdicts of a measurement are open to this user, who may see the measurement itself."""
    key = measurement.pk
    if type(measurement)._default_manager.filter(_open(""), pk=key).exists():
        return True
    return isinstance(user, User) and _looked_at(user).filter(measurement=key).exists()


def readers_of(row: Model) -> QuerySet[User]:
    """All who may see this row: what `seen_by` says for one of them, said for one row."""
    here = Membership.objects.filter(collaboration=collaboration_of(row))
    if path := _desk_path(type(row)):
        desk = _along(row, path)
        allowed = Q(role__in=SHARERS) if desk is None else Q(role=Role.LEAD)
        here = here.filter(allowed | Q(user=desk))
    measurement = _along(row, path) if (path := getattr(type(row), "SEAL_PATH", "")) else None
    if isinstance(measurement, Model) and not sees_data(AnonymousUser(), measurement):
        looks = apps.get_model("measurements", "EarlyLook")._default_manager.filter(
            measurement=measurement.pk
        )
        here = here.filter(role=Role.LEAD, user__in=looks.values("user"))
    return User.objects.filter(pk__in=here.values("user"))


def desk_of(user: User, collaboration: Collaboration) -> User | None:
    """At whose desk what this user brings will stand: a student's own, None for all others."""
    return user if role_of(user, collaboration) is Role.STUDENT else None


def _open(prefix: str) -> Q:
    """Measurements whose data are to be seen. To the second: no job has to run for one to open."""
    return (
        Q(**{f"{prefix}sealed_at__isnull": True})
        | Q(**{f"{prefix}opened_at__isnull": False})
        | Q(**{f"{prefix}opens_at__lte": timezone.now()})
    )


def _looked_at(user: User) -> QuerySet[Any]:
    """The measurements that this user, as a lead, looked at before they opened."""
    # By name: this layer lies below that of measurements.
    looks = apps.get_model("measurements", "EarlyLook")._default_manager.filter(user=user)
    led = Membership.objects.filter(user=user, role=Role.LEAD).values("collaboration")
    return looks.filter(measurement__collaboration__in=led).values("measurement")


def _desk_path(model: type[Model]) -> str:
    return str(getattr(model, "DESK_PATH", ""))


def load(rows: QuerySet[Row], user: Someone, action: Action, pk: int) -> Row:
    """The row with this key for someone who may do this to it; 404 for strangers, 403 without the right."""
    row = seen_by(rows, user).filter(pk=pk).first()
    if row is None:
        raise Http404
    require(user, action, collaboration_of(row))
    return row


def collaboration_of(row: Model) -> Collaboration:
    """The collaboration that a row belongs to."""
    owner = _along(row, _path(type(row)))
    assert isinstance(owner, Collaboration)
    return owner


def _along(row: Model, path: str) -> object:
    """What stands at the end of a path that begins at the row."""
    found: object = row
    for step in path.split("__") if path else []:
        found = getattr(found, step)
    return found


def _path(model: type[Model]) -> str:
    if model is Collaboration:
        return ""
    path = getattr(model, "COLLABORATION_PATH", None)
    assert isinstance(path, str), f"{model.__name__} names no COLLABORATION_PATH"
    return path
