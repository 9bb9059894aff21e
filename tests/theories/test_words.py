"""Two who change the words of a theory, and what the log keeps of theories and curves."""

from collections.abc import Callable

import pytest
from django.test import Client
from django.urls import reverse

from core.errors import UserError
from core.measurements.models import Measurement
from core.people.models import Collaboration, LogEntry, User
from core.theories import services
from core.theories.models import Theory
from core.theories.services import theory as theory_services
from tests.meanwhile import meanwhile

pytestmark = pytest.mark.usefixtures("read_in_this_process")
SignedIn = Callable[[User], Client]
CURVE = b"x,y\n1,1\n2,4\n3,9\n"


def renamed(theory: Theory, by: User, name: str) -> None:
    services.edit_theory(
        by=by, theory=theory, seen=theory.revision, name=name, proposed_by="", description="", reference=""
    )


def test_of_two_who_change_a_theory_the_second_is_told_and_loses_nothing(
    theory: Theory, lead: User, member: User, signed_in: SignedIn
) -> None:
    address = reverse("theories:edit_theory", args=[theory.pk])
    both = signed_in(lead), signed_in(member)
    seen = [client.get(address).context["form"]["revision"].value() for client in both]
    both[0].post(address, {"name": "Level floor", "reference": "Merian", "revision": seen[0]})
    answer = both[1].post(address, {"name": "Deep floor", "reference": "Chrystal 1905", "revision": seen[1]})
    page = answer.content.decode()
    theory.refresh_from_db()
    assert theory.name == "Level floor"
    for words in ("Somebody else has changed this", "Now stands here: “Level floor”.", 'value="Deep floor"'):
        assert words in page
    again = {"name": "Deep floor", "reference": "Chrystal 1905", "revision": theory.revision}
    both[1].post(address, again)
    theory.refresh_from_db()
    assert theory.name == "Deep floor"


@pytest.mark.django_db(transaction=True)
def test_of_two_who_save_at_the_same_moment_one_is_refused(
    theory: Theory, lead: User, member: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    mine, other = Theory.objects.get(), Theory.objects.get()
    with meanwhile(
        monkeypatch, theory_services, "save_if_current", lambda: renamed(other, lead, "Level floor")
    ) as refusals:
        renamed(mine, member, "Deep floor")
    assert refusals == ["changed-meanwhile"]
    assert Theory.objects.get().name == "Deep floor"


def test_a_name_that_is_taken_is_refused_on_the_form(
    theory: Theory, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    other = services.create_theory(user=lead, collaboration=collaboration, name="Flat floor")
    address = reverse("theories:edit_theory", args=[other.pk])
    page = signed_in(lead).post(address, {"name": theory.name, "revision": 0}).content.decode()
    assert "is here already" in page
    other.refresh_from_db()
    assert (other.name, other.revision) == ("Flat floor", 0)


def test_the_log_tells_of_theories_and_curves(
    collaboration: Collaboration, measurement: Measurement, member: User
) -> None:
    theory = services.create_theory(user=member, collaboration=collaboration, name="Flat floor")
    draft = services.draft_curve(
        user=member, theory=theory, measurement=measurement, content=CURVE, file_name="flat.csv"
    )
    services.submit_curve(draft)
    renamed(theory, member, "Level floor")
    entries = list(LogEntry.objects.order_by("pk"))
    assert [entry.deed for entry in entries] == ["added_theory", "submitted", "edited_theory"]
    assert {entry.who for entry in entries} == {member}
    assert entries[1].about == "Flat floor, version 1, for Surface seiche power"
    assert entries[1].detail == {"version": 1, "sha256": draft.file_sha256}
    assert entries[2].detail == {"changed": ["name"], "name_before": "Flat floor"}


def test_what_is_refused_leaves_no_entry(theory: Theory, member: User) -> None:
    theory.revision = 7
    with pytest.raises(UserError):
        renamed(theory, member, "Deep floor")
    assert not LogEntry.objects.exists()


@pytest.mark.django_db(transaction=True)
def test_two_who_rename_theories_at_once_come_one_after_the_other(
    theory: Theory, collaboration: Collaboration, lead: User, member: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = services.create_theory(user=lead, collaboration=collaboration, name="Flat floor")
    name = theory.name
    with meanwhile(
        monkeypatch, theory_services, "save_if_current", lambda: renamed(other, lead, name)
    ) as refusals:
        renamed(theory, member, "Deep floor")
    # The second waits until the name is free, and holds nothing meanwhile that the first might want.
    assert refusals == []
    assert list(Theory.objects.order_by("pk").values_list("name", flat=True)) == ["Deep floor", name]
