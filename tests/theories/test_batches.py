"""Many curves submitted at once: what is accepted, what becomes of it, and two who do it at the same moment."""

import io
import zipfile
from collections.abc import Callable
from datetime import timedelta
from functools import partial
from typing import Any

import numpy as np
import pytest
from django.utils import timezone

from core.errors import UserError
from core.measurements.models import Measurement
from core.people.models import Collaboration, LogEntry, User
from core.theories import services
from core.theories.batch_rules import current_of, seen_now
from core.theories.models import Batch, BatchItem, Curve, Theory
from core.theories.services import batch_submission
from core.theories.stored_curve import table_of
from tests.meanwhile import meanwhile
from tests.theories.batches import submit

pytestmark = pytest.mark.usefixtures("read_in_this_process")
TABLE = "x,Flat floor,Deep floor\n1,10,5\n2,20,6\n3,30,7\n"
Upload = Callable[..., Batch]


@pytest.fixture
def upload(measurement: Measurement, member: User) -> Upload:
    """Uploads a table, or the members of an archive."""

    def uploading(table: str = TABLE, by: User = member, **members: str) -> Batch:
        if not members:
            content, name = table.encode(), "many.csv"
        else:
            buffer = io.BytesIO()
            with zipfile.ZipFile(buffer, "w") as archive:
                for member_name, text in members.items():
                    archive.writestr(f"{member_name}.csv", text)
            content, name = buffer.getvalue(), "many.zip"
        return services.draft_batch(
            user=by, measurement=measurement, content=content, file_name=name, note="From one run."
        )

    return uploading


def codes(batch: Batch) -> dict[str, str]:
    """By name the code of the refusal, empty where it is accepted."""
    return dict(batch.items.values_list("name", "refusal_code"))


def seal(measurement: Measurement, **said: object) -> None:
    Measurement.objects.filter(pk=measurement.pk).update(sealed_at=timezone.now(), **said)


def test_an_upload_is_looked_at_before_anything_counts(upload: Upload) -> None:
    assert codes(upload()) == {"Flat floor": "", "Deep floor": ""}
    assert not Curve.objects.exists()
    assert not Theory.objects.exists()


def test_accepted_curves_make_theories_and_are_submitted_at_one_moment(upload: Upload, member: User) -> None:
    batch = submit(upload())
    curves = list(Curve.objects.select_related("theory").order_by("pk"))
    assert [curve.theory.name for curve in curves] == ["Flat floor", "Deep floor"]
    assert {(curve.version, curve.state, curve.submitted_at) for curve in curves} == {
        (1, "submitted", batch.submitted_at)
    }
    assert {theory.submitted_by for theory in Theory.objects.all()} == {member}
    assert table_of(curves[1]).y.tolist() == [5, 6, 7]
    assert (curves[1].note, curves[1].file_name) == ("From one run.", "many.csv, column 3")
    assert curves[1].file_sha256 == batch.file_sha256


def test_a_curve_from_an_archive_keeps_the_name_and_hash_of_its_own_file(upload: Upload) -> None:
    batch = submit(upload(flat="1,10\n2,20\n", deep="1,5\n2,6\n"))
    curve = Curve.objects.get(theory__name="flat")
    assert curve.file_name == "many.zip: flat.csv"
    assert curve.file_sha256 == batch.items.get(name="flat").sha256 != batch.file_sha256


def test_a_submitted_batch_keeps_what_became_of_it_and_no_second_copy(upload: Upload) -> None:
    batch = submit(upload(flat="1,10\n2,20\n", odd="1,windy\n"))
    assert [item.curve is not None for item in batch.items.all()] == [True, False]
    assert not batch.items.exclude(table=None).exists()


def test_a_theory_that_is_there_gets_a_new_version_whoever_submitted_it(
    curve: Curve, upload: Upload, lead: User
) -> None:
    submit(upload(f"x,{curve.theory.name}\n1,10\n2,20\n", by=lead))
    newer = Curve.objects.get(version=2)
    assert (newer.theory, newer.submitted_by) == (curve.theory, lead)
    assert Theory.objects.count() == 1


def test_what_is_the_newest_version_already_is_nothing_new(upload: Upload) -> None:
    submit(upload())
    again = upload(TABLE.replace("7", "8"))
    assert codes(again) == {"Flat floor": "nothing-new", "Deep floor": ""}
    assert "version 1" in again.items.get(name="Flat floor").refusal


def test_an_older_version_may_be_submitted_again(upload: Upload) -> None:
    for table in (TABLE, TABLE.replace("7", "8")):
        submit(upload(table))
    assert codes(upload()) == {"Flat floor": "nothing-new", "Deep floor": ""}


def test_names_that_are_missing_too_long_or_twice_are_refused(upload: Upload) -> None:
    assert set(codes(upload("1,10\n2,20\n")).values()) == {"name-missing"}
    assert codes(upload("x,flat,flat,deep\n1,1,2,3\n2,2,3,4\n")) == {"flat": "name-twice", "deep": ""}
    assert list(codes(upload(**{"n" * 121: "1,10\n2,20\n"})).values()) == ["name-too-long"]


def test_at_a_desk_names_are_those_of_the_desk(
    curve: Curve, student: User, upload: Upload, collaboration: Collaboration
) -> None:
    table = f"x,{curve.theory.name}\n1,10\n2,20\n"
    submit(upload(table, by=student))
    own = Theory.objects.get(desk=student)
    assert (own.name, own.submitted_by) == (curve.theory.name, student)
    assert curve.theory.curves.count() == 1
    assert codes(upload(table, by=student)) == {curve.theory.name: "nothing-new"}


def test_the_log_tells_of_each_theory_and_curve(upload: Upload, student: User) -> None:
    submit(upload(by=student))
    deeds = LogEntry.objects.values_list("deed", "desk")
    assert sorted(deeds) == [("added_theory", student.pk)] * 2 + [("submitted", student.pk)] * 2


def test_curves_short_of_the_announced_stretch_are_refused_and_the_others_kept(
    upload: Upload, measurement: Measurement
) -> None:
    seal(measurement, announced_x_min=1.0, announced_x_max=3.0)
    measurement.refresh_from_db()
    batch = upload(long="1,1\n3,3\n", short="1,1\n2,2\n")
    assert codes(batch) == {"long": "", "short": "announced-range-not-covered"}
    assert "missing stretch 2–3" in batch.items.get(name="short").refusal


def test_what_has_become_refusable_meanwhile_is_refused_and_the_others_are_kept(
    upload: Upload, collaboration: Collaboration, lead: User
) -> None:
    batch = upload()
    seen = seen_now(batch)
    services.create_theory(user=lead, collaboration=collaboration, name="Deep floor")
    submitted = services.submit_batch(batch, seen=seen)
    assert codes(submitted) == {"Flat floor": "", "Deep floor": "theory-appeared"}
    assert "A theory of Lin Lead has come to have this name" in submitted.items.get(name="Deep floor").refusal
    assert Curve.objects.get().theory.name == "Flat floor"


def test_where_nothing_is_left_the_batch_is_not_submitted(upload: Upload) -> None:
    first, second = upload(), upload()
    submit(first)
    assert submit(second).submitted_at is None
    assert set(codes(second).values()) == {"nothing-new"}
    assert Curve.objects.count() == 2


def test_after_the_deadline_nothing_is_submitted_and_the_batch_stays(
    upload: Upload, measurement: Measurement
) -> None:
    batch = upload()
    seal(measurement, curves_until=timezone.now() - timedelta(hours=1))
    with pytest.raises(UserError) as refused:
        submit(batch)
    assert refused.value.code == "curves-closed"
    assert codes(batch) == {"Flat floor": "", "Deep floor": ""}
    assert not Theory.objects.exists()
    measurement.refresh_from_db()
    with pytest.raises(UserError, match="taken until"):
        upload()


def test_nothing_is_kept_of_an_upload_that_cannot_be_taken_apart(upload: Upload) -> None:
    with pytest.raises(UserError):
        upload("x,flat\n1,1\n2\n")
    assert not Batch.objects.exists()


def test_a_discarded_batch_is_gone_and_a_submitted_one_stays(upload: Upload) -> None:
    services.discard_batch(upload())
    assert not BatchItem.objects.exists()
    submitted = submit(upload())
    for change in (submit, services.discard_batch):
        with pytest.raises(UserError) as refused:
            change(submitted)
        assert refused.value.code == "batch-submitted"
    assert Curve.objects.count() == 2


@pytest.mark.django_db(transaction=True)
@pytest.mark.parametrize("other", [submit, services.discard_batch])
def test_of_two_who_decide_at_once_one_comes_first(
    upload: Upload, monkeypatch: pytest.MonkeyPatch, other: Callable[[Batch], object]
) -> None:
    batch = upload()
    with meanwhile(monkeypatch, batch_submission, "_add_curves", lambda: other(batch)) as refusals:
        submit(batch)
    assert refusals == ["batch-submitted"]
    assert Curve.objects.count() == 2


@pytest.mark.django_db(transaction=True)
def test_of_two_batches_with_one_name_the_second_is_told_whose_theory_it_is(
    upload: Upload, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    mine, other = upload(), upload(TABLE.replace("Flat", "Wide").replace("7", "8"), by=lead)
    submit_other = partial(services.submit_batch, other, seen=seen_now(other))
    with meanwhile(monkeypatch, batch_submission, "_add_curves", submit_other):
        submit(mine)
    assert codes(other) == {"Wide floor": "", "Deep floor": "theory-appeared"}
    assert Theory.objects.count() == 3


@pytest.mark.django_db(transaction=True)
def test_two_batches_that_add_the_same_theories_do_not_wait_for_each_other_in_turn(
    upload: Upload, lead: User, collaboration: Collaboration, monkeypatch: pytest.MonkeyPatch
) -> None:
    elsewhere = Measurement.objects.create(
        collaboration=collaboration, name="Depth", x_name="x", y_name="y", created_by=lead
    )
    mine, other = upload(), upload("x,Deep floor,Flat floor\n1,1,1\n2,2,2\n", by=lead)
    Batch.objects.filter(pk=other.pk).update(measurement=elsewhere)
    other.refresh_from_db()
    submit_other = partial(services.submit_batch, other, seen=seen_now(other))
    with meanwhile(monkeypatch, batch_submission, "_add_curves", submit_other):
        submit(mine)
    assert codes(mine) == {"Flat floor": "", "Deep floor": ""}
    assert codes(other) == {"Flat floor": "theory-appeared", "Deep floor": "theory-appeared"}


@pytest.mark.django_db(transaction=True)
def test_a_name_that_somebody_takes_at_the_last_moment_is_refused(
    upload: Upload, lead: User, collaboration: Collaboration, monkeypatch: pytest.MonkeyPatch
) -> None:
    batch = upload()

    def look(*args: Any) -> object:
        found = current_of(*args)
        Theory.objects.create(collaboration=collaboration, name="Deep floor", submitted_by=lead)
        return found

    monkeypatch.setattr(batch_submission, "current_of", look)
    submit(batch)
    assert codes(batch) == {"Flat floor": "", "Deep floor": "theory-appeared"}


def test_sixty_curves_take_few_queries_to_read_and_to_submit(
    upload: Upload, django_assert_max_num_queries: Callable[[int], object]
) -> None:
    names = [f"theory {number}" for number in range(60)]
    values = np.linspace(0.0, 1.0, 1000)
    rows = [",".join([repr(x), *(repr(x + index) for index in range(60))]) for x in values.tolist()]
    table = "\n".join([",".join(["x", *names]), *rows])
    with django_assert_max_num_queries(12):  # type: ignore[attr-defined]
        batch = upload(table)
    assert set(codes(batch).values()) == {""}
    seen = seen_now(batch)
    with django_assert_max_num_queries(30):  # type: ignore[attr-defined]
        services.submit_batch(batch, seen=seen)
    assert Curve.objects.count() == 60
    assert LogEntry.objects.count() == 120
