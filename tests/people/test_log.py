"""The log is written once and never changed."""

from collections.abc import Callable

import pytest
from django.db import transaction
from django.db.models import ProtectedError

from core.people.log import Deed, record
from core.people.models import Collaboration, LogEntry, User


@pytest.fixture
def entry(collaboration: Collaboration, lead: User) -> LogEntry:
    return record(Deed.STARTED, who=lead, collaboration=collaboration, about="Lake Merrow survey")


def test_an_entry_is_kept_as_it_was_written(entry: LogEntry, lead: User) -> None:
    kept = LogEntry.objects.get()
    assert (kept.who, kept.deed, kept.about) == (lead, "started", "Lake Merrow survey")


def test_an_entry_cannot_be_saved_again(entry: LogEntry) -> None:
    for again in (entry, LogEntry.objects.get()):
        again.about = "Another lake"
        with pytest.raises(TypeError, match="append-only"):
            again.save()
    assert LogEntry.objects.get().about == "Lake Merrow survey"


@pytest.mark.parametrize(
    "change",
    [
        lambda entry: LogEntry.objects.update(about="Another lake"),
        lambda entry: LogEntry.objects.bulk_update([entry], ["about"]),
        lambda entry: LogEntry.objects.update_or_create(pk=entry.pk, defaults={"about": "Another lake"}),
    ],
    ids=["update", "bulk_update", "update_or_create"],
)
def test_entries_cannot_be_updated(change: Callable[[LogEntry], object], entry: LogEntry) -> None:
    entry.about = "Another lake"
    with pytest.raises(TypeError, match="append-only"), transaction.atomic():
        change(entry)
    assert LogEntry.objects.get().about == "Lake Merrow survey"


def test_entries_cannot_be_deleted(entry: LogEntry) -> None:
    with pytest.raises(TypeError, match="append-only"):
        entry.delete()
    with pytest.raises(TypeError, match="append-only"):
        LogEntry.objects.all().delete()
    assert LogEntry.objects.count() == 1


def test_neither_who_did_it_nor_where_can_be_deleted_from_under_it(
    entry: LogEntry, collaboration: Collaboration, lead: User
) -> None:
    for row in (collaboration, lead):
        with pytest.raises(ProtectedError):
            row.delete()
    assert LogEntry.objects.count() == 1
