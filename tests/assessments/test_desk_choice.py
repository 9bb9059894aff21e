"""Whose curves can be chosen for an assessment: shared ones, or those of one desk."""

from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from core.measurements.models import Release
from core.people.models import Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment
from tests.assessments.test_views import FORM

SignedIn = Callable[[User], Client]


@pytest.fixture
def student(release: Release) -> User:
    user = User.objects.create_user("student@merrow.example", name="Stu Student")
    Membership.objects.create(user=user, collaboration=release.measurement.collaboration, role=Role.STUDENT)
    return user


@pytest.fixture
def own(curve: Curve, student: User) -> Curve:
    """A curve like `curve` at the student's desk."""
    theory = Theory.objects.create(
        collaboration=curve.theory.collaboration, name="Own floor", submitted_by=student, desk=student
    )
    copy = Curve.objects.get(pk=curve.pk)
    copy.pk, copy.theory, copy.submitted_by = None, theory, student
    copy.save(force_insert=True)
    return copy


def address(release: Release, desk: object = None) -> str:
    query = "" if desk is None else f"?desk={desk}"
    return reverse("assessments:new", args=[release.pk]) + query


def offered(client: Client, where: str) -> set[Curve]:
    form: Any = client.get(where).context["form"]
    return set(form.fields["curves"].queryset)


def test_a_student_chooses_among_own_curves(
    release: Release, curve: Curve, own: Curve, student: User, signed_in: SignedIn
) -> None:
    client = signed_in(student)
    assert offered(client, address(release)) == {own}
    assert client.post(address(release), FORM | {"curves": [curve.pk]}).status_code == 200
    assert not Assessment.objects.exists()
    client.post(address(release), FORM | {"curves": [own.pk]})
    assert Assessment.objects.get().desk == student


def test_a_member_chooses_among_shared_curves(
    release: Release, curve: Curve, own: Curve, student: User, member: User, signed_in: SignedIn
) -> None:
    client = signed_in(member)
    assert offered(client, address(release)) == {curve}
    assert "Stu Student" not in client.get(address(release)).content.decode()
    assert client.get(address(release, student.pk)).status_code == 404


def test_a_lead_chooses_shared_curves_or_a_desk(
    release: Release, curve: Curve, own: Curve, student: User, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    assert offered(client, address(release)) == {curve}
    page = client.get(address(release)).content.decode()
    assert f"?desk={student.pk}" in page
    assert "the desk of Stu Student" in page
    assert offered(client, address(release, student.pk)) == {own}
    client.post(address(release, student.pk), FORM | {"curves": [own.pk]})
    assert Assessment.objects.get().desk == student


def test_who_was_a_student_chooses_shared_curves_or_their_desk(
    release: Release, curve: Curve, own: Curve, student: User, signed_in: SignedIn
) -> None:
    student.memberships.update(role=Role.MEMBER)
    client = signed_in(student)
    assert offered(client, address(release)) == {curve}
    assert offered(client, address(release, student.pk)) == {own}


@pytest.mark.parametrize("desk", ["0", "-1", "stu", "99999999999999999999", "9" * 5000, "²"])
def test_a_desk_that_is_not_there_is_not_found(
    release: Release, curve: Curve, own: Curve, lead: User, signed_in: SignedIn, desk: str
) -> None:
    assert signed_in(lead).get(address(release, desk)).status_code == 404


def test_a_student_without_curves_is_told_so(
    release: Release, curve: Curve, student: User, signed_in: SignedIn
) -> None:
    assert "You have submitted no curve" in signed_in(student).get(address(release)).content.decode()


def test_a_student_cancels_what_is_of_their_desk_alone(
    release: Release, curve: Curve, own: Curve, student: User, member: User, lead: User, signed_in: SignedIn
) -> None:
    for user, chosen in ((student, own), (member, curve)):
        signed_in(user).post(address(release), FORM | {"curves": [chosen.pk]})
    at_desk, shared = Assessment.objects.get(desk=student), Assessment.objects.get(desk=None)
    cancel = {asked: reverse("assessments:cancel", args=[asked.pk]) for asked in (at_desk, shared)}
    assert signed_in(student).post(cancel[shared]).status_code == 404
    assert signed_in(member).post(cancel[at_desk]).status_code == 404
    assert signed_in(student).post(cancel[at_desk]).status_code == 302
    assert signed_in(lead).post(cancel[shared]).status_code == 302
    assert set(Assessment.objects.values_list("status", flat=True)) == {"cancelled"}
