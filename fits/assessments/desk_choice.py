"""Whose curves are assessed: the shared ones, or those of one desk, as they are never judged together."""

from dataclasses import dataclass

from django.db.models import QuerySet
from django.http import Http404

from core.measurements.models import Release
from core.people.access import desk_of, seen_by
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.forms import is_no_key, submitted_curves


@dataclass(frozen=True)
class DeskChoice:
    """The desk that is chosen, None for what is shared; `others` are those that could be chosen instead."""

    desk: User | None
    others: tuple[User | None, ...]
    curves: QuerySet[Curve]


def desk_choice(user: User, release: Release, asked_for: str) -> DeskChoice:
    """What `?desk=` chooses among the curves that the user may see; without it the shared ones, a student's own.

    A desk at which the user sees no curve for this measurement is not there: 404.
    """
    seen = seen_by(submitted_curves(release), user)
    keys = set(seen.order_by().values_list("theory__desk", flat=True).distinct())
    own = desk_of(user, release.measurement.collaboration)
    chosen = _key(asked_for) if asked_for else own.pk if own else None
    if asked_for and chosen not in keys:
        raise Http404
    people = {person.pk: person for person in User.objects.filter(pk__in=keys | {chosen})}
    others = [people[key] for key in keys - {None, chosen} if key is not None]
    others.sort(key=lambda person: (str(person), person.pk))
    shared: list[User | None] = [None] if chosen is not None and None in keys else []
    desk = None if chosen is None else people[chosen]
    return DeskChoice(desk, (*shared, *others), seen.filter(theory__desk=desk))


def _key(text: str) -> int | None:
    if not text.isdecimal() or is_no_key(text):
        raise Http404
    return int(text)
