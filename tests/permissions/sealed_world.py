"""A sealed measurement in the world of these tests, as everybody may see it, and what is hidden behind the seal."""

from dataclasses import dataclass, replace
from datetime import timedelta
from functools import partial

from django.utils import timezone

from core.measurements import services
from core.measurements.models import Measurement, Release
from core.measurements.seal_terms import SealTerms
from core.people.models import User
from fits.assessments.models import Assessment
from fits.assessments.services import request_assessment, request_features
from fits.talk.models import Comment
from fits.talk.services import comment
from tests.browser.survey import SETTINGS, computed, curve_of
from tests.conftest import ERROR, FREQUENCIES, power
from tests.permissions.world import Rows, World

TABLE = "x,y,error\n" + "".join(f"{x},{power(x):.6g},{ERROR}\n" for x in FREQUENCIES)


@dataclass(frozen=True)
class Hidden:
    """What nobody may learn of but who looked: the world with its rows in the place of those that are open."""

    world: World
    comments: tuple[Comment, ...]


def sealed_world(here: World) -> World:
    """The world with a sealed measurement in the place of the open one, as all may see it: with curves of the shared
    theory and of one at a desk. One lead, not the other, has looked."""
    people = here.people
    # The name is that which the cases of these tests ask for.
    made = Measurement.objects.create(
        collaboration=here.collaboration,
        name="Power at the outflow",
        x_name="frequency",
        y_name="power",
        created_by=people["lead"],
    )
    terms = SealTerms(timezone.now() + timedelta(days=2), timezone.now() + timedelta(days=1), 0.5, 4.5)
    services.seal_measurement(user=people["lead"], measurement=made, seen=0, terms=terms)
    services.look_early(user=people["second_lead"], measurement=made)
    rows = {}
    for desk, found in here.rows.items():
        by = people[desk or "member"]
        rows[desk] = replace(found, curve=curve_of(found.theory, made, by, stretch=1.0, version=1))
    return replace(here, measurement=made, rows=rows)


def hide(here: World) -> Hidden:
    """Have the lead who looked publish, withdraw, assess and discuss, all of it behind the seal."""
    by, measurement = here.people["second_lead"], here.measurement
    first, second, draft = (_drafted(measurement, by) for _ in range(3))
    release = services.publish_release(first, by)
    withdrawn = services.publish_release(second, by)
    services.withdraw_release(user=by, release=withdrawn, reason="The gauge stuck.")
    rows = {desk: _assessed(found, release, by) for desk, found in here.rows.items()}
    comments = tuple(
        comment(by=by, on=found.done, words="@Member of Merrow @Lead of Merrow: calm, and inside.")
        for found in rows.values()
    )
    world = replace(here, release=release, draft=draft, rows=rows)
    return Hidden(world, comments)


def _drafted(measurement: Measurement, by: User) -> Release:
    return services.draft_release(
        user=by, measurement=measurement, content=TABLE.encode(), file_name="outflow.csv"
    )


def _assessed(found: Rows, release: Release, by: User) -> Rows:
    ask = partial(request_assessment, user=by, release=release, curves=[found.curve], settings=SETTINGS)
    done, running = computed(ask(seed=1)), ask(seed=2)
    Assessment.objects.filter(pk=running.pk).update(status=Assessment.Status.RUNNING, progress=0.5)
    search = request_features(user=by, assessment=done)
    return replace(found, done=done, running=running, search=search)
