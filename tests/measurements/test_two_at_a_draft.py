"""Two leads at one draft or one release: nobody's change is lost without a word."""

from functools import partial
from importlib import import_module

import pytest

from core.errors import UserError
from core.measurements import services
from core.measurements.models import Measurement, Release
from core.measurements.services import withdraw as withdrawing
from core.measurements.services.locked_draft import reading_of
from core.people.models import LogEntry, User
from tests.meanwhile import meanwhile
from tests.measurements.sealing import drafted, published, seal

OTHERS = "distance,height,spread\n" + "".join(f"{x},{x * x},0.1\n" for x in range(1, 11))
MAPPED = ["x", "y", "error"]


@pytest.fixture
def draft(measurement: Measurement, lead: User) -> Release:
    return drafted(measurement, lead, OTHERS)


def test_a_draft_that_was_mapped_since_it_was_seen_is_neither_mapped_published_nor_discarded(
    draft: Release, lead: User
) -> None:
    seen = reading_of(draft)
    services.map_columns(draft, MAPPED, user=lead)
    for change in (
        partial(services.map_columns, draft, ["y", "x", "error"], user=lead),
        partial(services.publish_release, draft, lead),
        partial(services.discard_release, draft, lead),
    ):
        with pytest.raises(UserError) as refusal:
            change(seen=seen)
        assert refusal.value.code == "changed-meanwhile"
    assert [column["role"] for column in Release.objects.get().columns] == MAPPED


def test_the_log_tells_how_a_draft_came_to_be_read_and_what_became_of_it(draft: Release, lead: User) -> None:
    services.map_columns(draft, MAPPED, user=lead)
    services.map_columns(draft, MAPPED, user=lead)
    services.discard_release(draft, lead)
    deeds = list(LogEntry.objects.order_by("pk").values_list("deed", "hidden_with"))
    key = draft.measurement_id
    assert deeds == [("uploaded", key), ("mapped_columns", key), ("discarded_draft", key)]


@pytest.mark.django_db(transaction=True)
def test_of_two_who_map_a_draft_at_once_the_second_is_told(
    draft: Release, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = partial(services.map_columns, Release.objects.get(), MAPPED, user=lead)
    mapping = import_module("core.measurements.services.map_columns")
    came_first = meanwhile(monkeypatch, mapping, "data_of", other)
    with came_first as refusals, pytest.raises(UserError) as refusal:
        services.map_columns(draft, ["y", "x", "error"], user=lead)
    assert (refusals, refusal.value.code) == ([], "changed-meanwhile")
    assert [column["role"] for column in Release.objects.get().columns] == MAPPED


def test_words_of_a_measurement_that_somebody_else_has_changed_are_not_overwritten(
    measurement: Measurement, lead: User
) -> None:
    words = {"about": "", "x_name": "f", "x_unit": "", "y_name": "P", "y_unit": "", "axis": "linear"}
    edit = partial(services.edit_measurement, user=lead, measurement=measurement, seen=0, **words)
    edit(name="Seiches of the north")
    with pytest.raises(UserError) as refusal:
        edit(name="Seiches of the south")
    assert refusal.value.code == "changed-meanwhile"
    assert Measurement.objects.get().name == "Seiches of the north"


def test_words_that_are_changed_leave_a_seal_that_came_meanwhile(
    measurement: Measurement, lead: User
) -> None:
    words = {"about": "", "x_name": "f", "x_unit": "", "y_name": "P", "y_unit": "", "axis": "linear"}
    stale = Measurement.objects.get()
    seal(measurement, lead)
    services.edit_measurement(user=lead, measurement=stale, seen=1, name="Seiches", **words)
    assert Measurement.objects.get().is_sealed


def test_a_withdrawn_release_stays_with_its_reason(measurement: Measurement, lead: User) -> None:
    release = published(measurement, lead)
    with pytest.raises(UserError, match="without a reason"):
        services.withdraw_release(user=lead, release=release, reason="  ")
    services.withdraw_release(user=lead, release=release, reason="The gauge stuck.")
    kept = Release.objects.get()
    assert (kept.state, kept.withdrawn_by, kept.number) == ("withdrawn", lead, 1)
    assert LogEntry.objects.get(deed="withdrew").detail == {"reason": "The gauge stuck."}
    with pytest.raises(UserError, match="withdrawn already"):
        services.withdraw_release(user=lead, release=release, reason="Again.")


def test_a_draft_is_not_withdrawn(draft: Release, lead: User) -> None:
    with pytest.raises(UserError, match="is a draft"):
        services.withdraw_release(user=lead, release=draft, reason="No.")


@pytest.mark.django_db(transaction=True)
def test_of_two_who_withdraw_a_release_at_once_the_reason_of_the_first_stays(
    measurement: Measurement, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    release = published(measurement, lead)
    other = partial(services.withdraw_release, user=lead, release=Release.objects.get(), reason="The other.")
    with meanwhile(monkeypatch, withdrawing, "record", other) as refusals:
        services.withdraw_release(user=lead, release=release, reason="The first.")
    assert refusals == ["withdrawn-already"]
    assert Release.objects.get().withdrawal_reason == "The first."
