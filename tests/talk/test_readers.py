"""Who may see a row, asked the other way round."""

import pytest

from core.people.access import readers_of, seen_by
from core.people.models import User
from core.theories.models import Theory
from fits.assessments.models import Assessment
from tests.talk.conftest import seal

Row = Theory | Assessment


@pytest.fixture
def everybody(
    lead: User,
    second_lead: User,
    member: User,
    student: User,
    other_student: User,
    observer: User,
    stranger: User,
) -> tuple[User, ...]:
    return (lead, second_lead, member, student, other_student, observer, stranger)


def those_who_see(row: Row, everybody: tuple[User, ...]) -> set[User]:
    rows = type(row)._default_manager.filter(pk=row.pk)
    return {user for user in everybody if seen_by(rows, user).exists()}


def test_what_is_shared_has_all_but_students_for_readers(
    everybody: tuple[User, ...], theory: Theory, judged: Assessment
) -> None:
    lead, second_lead, member, _, _, observer, _ = everybody
    for row in (theory, judged):
        assert set(readers_of(row)) == {lead, second_lead, member, observer}
        assert set(readers_of(row)) == those_who_see(row, everybody)


def test_a_desk_has_its_student_and_the_leads(
    everybody: tuple[User, ...], desk_theory: Theory, judged: Assessment, student: User
) -> None:
    Assessment.objects.filter(pk=judged.pk).update(desk=student)
    judged.refresh_from_db()
    for row in (desk_theory, judged):
        assert set(readers_of(row)) == {everybody[0], everybody[1], student}
        assert set(readers_of(row)) == those_who_see(row, everybody)


def test_verdicts_of_a_sealed_measurement_have_the_leads_who_looked(
    everybody: tuple[User, ...], judged: Assessment, member: User, lead: User
) -> None:
    # A look of somebody who leads no more opens nothing.
    seal(judged.release.measurement, lead, member)
    assert set(readers_of(judged)) == {lead}
    assert set(readers_of(judged)) == those_who_see(judged, everybody)
