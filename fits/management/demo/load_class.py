"""A lab class at work: what the teacher shows to all, and two students at desks of their own."""

from django.db import transaction

from core.measurements.services import create_measurement
from core.people.models import Collaboration
from fits.assessments.models import Assessment
from fits.management.demo import wave_tank
from fits.management.demo.accounts import FIRST_BENCH, MARK, SECOND_BENCH, TEACHER, collaboration_of, user_of
from fits.management.demo.bringing import assess, propose, publish, submit


@transaction.atomic
def load() -> list[Assessment]:
    """The assessments of the class: the teacher's first, then each desk's."""
    collaboration, is_new = collaboration_of(
        "Wave tank class", "A lab class.", TEACHER, FIRST_BENCH, SECOND_BENCH
    )
    if is_new:
        _work(collaboration)
    assessments = Assessment.objects.filter(release__measurement__collaboration=collaboration)
    return list(assessments.order_by("pk"))


def _work(collaboration: Collaboration) -> None:
    teacher = user_of(TEACHER)
    tank = create_measurement(
        user=teacher,
        collaboration=collaboration,
        name="Wave height in the tank",
        about=f"One resonance or two? {MARK}",
        x_name="paddle frequency",
        x_unit="Hz",
        y_name="amplitude",
        y_unit="mm",
    )
    release = publish(teacher, tank, wave_tank.class_release())
    shown = [
        submit(teacher, propose(teacher, tank, words), tank, wave_tank.class_curve(words))
        for words in (wave_tank.ONE, wave_tank.TWO)
    ]
    assess(teacher, release, shown)
    for account, words in ((FIRST_BENCH, wave_tank.FIRST_BENCH), (SECOND_BENCH, wave_tank.SECOND_BENCH)):
        student = user_of(account)
        curve = submit(student, propose(student, tank, words), tank, wave_tank.class_curve(words))
        assess(student, release, [curve])
