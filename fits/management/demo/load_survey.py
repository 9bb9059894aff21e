"""The survey of the lake at work: three releases, a second measurement, and a third that is still sealed."""

from django.db import transaction

from core.measurements.models import Measurement
from core.measurements.seal_terms import SealTerms
from core.measurements.services import create_measurement, seal_measurement
from core.people.models import Collaboration, User
from core.theories.models import Theory
from fits.assessments.models import Assessment
from fits.management.demo import survey
from fits.management.demo.accounts import LEAD, MARK, MEMBER, OBSERVER, collaboration_of, user_of
from fits.management.demo.bringing import assess, propose, publish, submit, submit_together
from fits.management.demo.lake import NARROWS, SURFACE
from fits.talk.services import comment


@transaction.atomic
def load() -> list[Assessment]:
    """The assessments of the survey: those of the surface by release, then that of the current."""
    collaboration, is_new = collaboration_of(
        "Lake Merrow survey", "A lake 52 km long.", LEAD, MEMBER, OBSERVER
    )
    if is_new:
        _work(collaboration, user_of(LEAD), user_of(MEMBER))
    assessments = Assessment.objects.filter(release__measurement__collaboration=collaboration)
    return list(assessments.order_by("release__measurement", "release__number"))


def _work(collaboration: Collaboration, lead: User, member: User) -> None:
    surface = _measurement(lead, collaboration, "Surface seiche power", "surface seiche power", "mm²")
    first, *later = (
        survey.survey_release(stage, number) for number, stage in enumerate(survey.STAGES, start=1)
    )
    release = publish(lead, surface, first)
    theories = [(floor, propose(member, surface, words)) for floor, words in survey.FLOORS]
    curves = [
        submit(member, theory, surface, survey.floor_curve(floor, theory.name)) for floor, theory in theories
    ]
    assess(lead, release, curves)
    for files in later:
        publish(lead, surface, files)  # which assesses all curves anew
    _measure_current(lead, member, collaboration, theories)
    _seal_winter(lead, member, collaboration, theories)
    flat = theories[0][1]
    comment(
        by=lead,
        on=flat,
        words=f"@{member.name} this one left the 95 % set at release 2. Would a sloping shore bring it back?",
    )
    comment(
        by=member,
        on=flat,
        words="I doubt it: it is the spacing of the overtones that is off, not their height.",
    )


def _measure_current(
    lead: User, member: User, collaboration: Collaboration, theories: list[tuple[survey.Floor, Theory]]
) -> None:
    current = _measurement(lead, collaboration, "Current in the narrows", "power of the current", "(cm/s)²")
    curves = [(floor, theory.name) for floor, theory in theories]
    submit_together(member, current, survey.table_of_curves("narrows-curves", curves, NARROWS))
    publish(
        lead, current, survey.plain_release(survey.CURRENT, "merrow-narrows", NARROWS, "power of the current")
    )


def _seal_winter(
    lead: User, member: User, collaboration: Collaboration, theories: list[tuple[survey.Floor, Theory]]
) -> None:
    winter = _measurement(
        lead, collaboration, "Surface seiche power under ice", "surface seiche power", "mm²"
    )
    low, high = survey.FREQUENCIES
    terms = SealTerms(announced_x_min=low, announced_x_max=high)
    seal_measurement(user=lead, measurement=winter, seen=winter.revision, terms=terms)
    curves = [(floor, theory.name) for floor, theory in theories[:3]]
    submit_together(member, winter, survey.table_of_curves("winter-curves", curves, SURFACE))
    publish(
        lead, winter, survey.plain_release(survey.WINTER, "merrow-winter", SURFACE, "surface seiche power")
    )


def _measurement(
    lead: User, collaboration: Collaboration, name: str, y_name: str, y_unit: str
) -> Measurement:
    return create_measurement(
        user=lead,
        collaboration=collaboration,
        name=name,
        about=f"Standing waves of Lake Merrow: power against frequency. {MARK}",
        x_name="frequency",
        x_unit="cycles per hour",
        y_name=y_name,
        y_unit=y_unit,
    )
