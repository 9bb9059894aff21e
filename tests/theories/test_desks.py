"""A student's theories and curves stand at their desk: for them and the leads alone."""

from collections.abc import Callable

import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.test import Client
from django.urls import reverse

from core.errors import UserError
from core.measurements.models import Measurement
from core.people.models import Collaboration, LogEntry, User
from core.theories import services
from core.theories.models import Curve, Theory

pytestmark = pytest.mark.usefixtures("read_in_this_process")
SignedIn = Callable[[User], Client]
CURVE = b"x,y\n1,1\n2,4\n3,9\n"


@pytest.fixture
def own(student: User, collaboration: Collaboration, measurement: Measurement) -> Curve:
    """A submitted curve at the student's desk."""
    theory = services.create_theory(user=student, collaboration=collaboration, name="Flat floor")
    draft = services.draft_curve(
        user=student, theory=theory, measurement=measurement, content=CURVE, file_name="flat.csv"
    )
    return services.submit_curve(draft)


def test_what_a_student_adds_stands_at_their_desk_and_what_a_member_adds_is_shared(
    own: Curve, theory: Theory, student: User, member: User, collaboration: Collaboration
) -> None:
    assert own.theory.desk == student
    assert services.create_theory(user=member, collaboration=collaboration, name="Deep").desk is None


def test_desks_do_not_take_names_from_each_other_nor_from_what_is_shared(
    own: Curve, neighbour: User, member: User, collaboration: Collaboration
) -> None:
    for user in (neighbour, member):
        services.create_theory(user=user, collaboration=collaboration, name=own.theory.name)
    assert Theory.objects.filter(name=own.theory.name).count() == 3


def test_at_one_desk_a_name_is_there_once(own: Curve, student: User, collaboration: Collaboration) -> None:
    with pytest.raises(UserError, match="at this desk already"):
        services.create_theory(user=student, collaboration=collaboration, name=own.theory.name)


def test_the_log_keeps_the_desk_with_what_was_done_there(own: Curve, student: User) -> None:
    assert set(LogEntry.objects.values_list("deed", "desk")) == {
        ("added_theory", student.pk),
        ("submitted", student.pk),
    }


def test_only_the_student_and_leads_open_it(
    own: Curve,
    lead: User,
    member: User,
    student: User,
    neighbour: User,
    observer: User,
    stranger: User,
    signed_in: SignedIn,
) -> None:
    reading = [reverse(f"theories:{name}", args=[own.pk]) for name in ("curve", "download")]
    changing = [reverse(f"theories:{name}", args=[own.theory_id]) for name in ("edit_theory", "new_curve")]
    for user in (student, lead):
        client = signed_in(user)
        assert {client.get(address).status_code for address in (*reading, *changing)} == {200}
    for user in (member, neighbour, observer, stranger):
        client = signed_in(user)
        assert {client.get(address).status_code for address in (*reading, *changing)} == {404}


def test_an_observer_reads_what_is_shared_and_changes_nothing(
    curve: Curve, observer: User, signed_in: SignedIn, collaboration: Collaboration
) -> None:
    client = signed_in(observer)
    assert client.get(reverse("theories:curve", args=[curve.pk])).status_code == 200
    for name, key in (
        ("new_theory", collaboration.pk),
        ("edit_theory", curve.theory_id),
        ("new_curve", curve.theory_id),
        ("new_batch", curve.measurement_id),
    ):
        assert client.get(reverse(f"theories:{name}", args=[key])).status_code == 403


def test_a_student_does_not_see_what_is_shared(curve: Curve, student: User, signed_in: SignedIn) -> None:
    client = signed_in(student)
    assert client.get(reverse("theories:curve", args=[curve.pk])).status_code == 404
    upload = {"measurement": curve.measurement_id, "table": SimpleUploadedFile("flat.csv", CURVE)}
    assert client.post(reverse("theories:new_curve", args=[curve.theory_id]), upload).status_code == 404


def test_the_form_says_where_a_theory_will_stand(
    student: User, member: User, collaboration: Collaboration, signed_in: SignedIn
) -> None:
    address = reverse("theories:new_theory", args=[collaboration.pk])
    assert "at your desk" in signed_in(student).get(address).content.decode()
    assert "at your desk" not in signed_in(member).get(address).content.decode()
