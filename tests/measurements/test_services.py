"""Releases from upload to publication: what is kept, what is refused, and how they are numbered."""

import threading
from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np
import pytest
from django.db import connection

from core.errors import UserError
from core.measurements import services
from core.measurements.models import Measurement, Release
from core.measurements.reading.stored import from_bytes, to_bytes
from core.measurements.services import measurement as editing
from core.measurements.stored_release import data_of
from core.people.models import Collaboration, User
from tests.meanwhile import meanwhile

HEADED = "frequency,power,sigma\n" + "".join(f"{x},{x * x},0.1\n" for x in range(1, 11))
PLAIN = "x,y,error\n" + "".join(f"{x},{x * x},0.1\n" for x in range(1, 11))


def drafted(measurement: Measurement, user: User, text: str = PLAIN, **more: Any) -> Release:
    return services.draft_release(
        user=user, measurement=measurement, content=text.encode(), file_name="tank.csv", **more
    )


def test_a_draft_keeps_the_numbers_as_they_were_uploaded(measurement: Measurement, lead: User) -> None:
    draft = drafted(measurement, lead)
    assert from_bytes(draft.table)[:, 1].tolist() == [x * x for x in range(1, 11)]
    assert (draft.number, draft.state, draft.points) == (None, "draft", 10)


def test_a_path_in_a_file_name_is_not_kept(measurement: Measurement, lead: User) -> None:
    draft = services.draft_release(
        user=lead, measurement=measurement, content=PLAIN.encode(), file_name="../../etc/tank.csv"
    )
    assert draft.file_name == "tank.csv"


@pytest.mark.parametrize(
    ("text", "line"),
    [
        (PLAIN.replace("3,9,0.1", "3,nine,0.1"), 4),
        (PLAIN.replace("3,9,0.1", "3,9,0"), 4),
        (PLAIN.replace("3,9,0.1", "3,inf,0.1"), 4),
    ],
)
def test_nothing_is_kept_of_a_refused_table(
    measurement: Measurement, lead: User, text: str, line: int
) -> None:
    with pytest.raises(UserError) as refusal:
        drafted(measurement, lead, text)
    assert (refusal.value.file, refusal.value.line) == ("tank.csv", line)
    assert not Release.objects.exists()


def test_nothing_is_kept_of_a_table_whose_covariance_is_refused(measurement: Measurement, lead: User) -> None:
    with pytest.raises(UserError, match=r"cov\.npy"):
        drafted(measurement, lead, covariance_content=to_bytes(-np.eye(10)), covariance_name="cov.npy")
    assert not Release.objects.exists()


def test_a_covariance_is_kept_with_its_hash(measurement: Measurement, lead: User) -> None:
    draft = drafted(measurement, lead, covariance_content=to_bytes(np.eye(10)), covariance_name="cov.npy")
    assert draft.covariance_name == "cov.npy"
    assert len(draft.covariance_sha256) == 64
    assert data_of(draft).covariance is not None


def test_columns_with_other_headers_wait_to_be_mapped(measurement: Measurement, lead: User) -> None:
    draft = drafted(measurement, lead, HEADED)
    with pytest.raises(UserError):
        services.publish_release(draft, lead)
    services.map_columns(draft, ["x", "y", "error"], user=lead)
    assert services.publish_release(draft, lead).number == 1


def test_a_mapping_under_which_a_rule_breaks_changes_nothing(measurement: Measurement, lead: User) -> None:
    draft = drafted(measurement, lead, HEADED.replace("5,25,0.1", "5,25,-0.1"))
    before = draft.columns
    with pytest.raises(UserError, match="line 6"):
        services.map_columns(draft, ["x", "y", "error"], user=lead)
    draft.refresh_from_db()
    assert draft.columns == before


def test_releases_are_numbered_in_the_order_of_publication(
    release: Release, measurement: Measurement, lead: User
) -> None:
    first, second = drafted(measurement, lead), drafted(measurement, lead)
    assert services.publish_release(second, lead).number == 2
    assert services.publish_release(first, lead).number == 3


def test_a_release_is_published_once(release: Release, lead: User) -> None:
    with pytest.raises(UserError, match="draft no more"):
        services.publish_release(release, lead)


def test_a_published_release_is_neither_discarded_nor_mapped(release: Release, lead: User) -> None:
    with pytest.raises(UserError):
        services.discard_release(release, lead)
    with pytest.raises(UserError):
        services.map_columns(release, ["x", "y", "error"], user=lead)
    assert Release.objects.filter(pk=release.pk).exists()


def test_a_discarded_draft_is_gone(measurement: Measurement, lead: User) -> None:
    services.discard_release(drafted(measurement, lead), lead)
    assert not Release.objects.exists()


def test_the_axis_is_settled_with_the_first_release(
    release: Release, measurement: Measurement, lead: User
) -> None:
    words: dict[str, Any] = {"user": lead, "measurement": measurement, "seen": measurement.revision}
    words |= {"name": "Seiches", "about": "", "x_name": "f", "x_unit": "", "y_name": "P", "y_unit": ""}
    with pytest.raises(UserError, match="published already"):
        services.edit_measurement(axis="log", **words)
    services.edit_measurement(axis="linear", **words)
    assert Measurement.objects.get().name == "Seiches"


def test_two_measurements_of_a_collaboration_have_two_names(
    measurement: Measurement, collaboration: Collaboration, lead: User
) -> None:
    with pytest.raises(UserError, match="here already"):
        services.create_measurement(
            user=lead, collaboration=collaboration, name=measurement.name, x_name="x", y_name="y"
        )


@pytest.mark.django_db(transaction=True)
def test_two_who_publish_at_once_get_two_numbers(measurement: Measurement, lead: User) -> None:
    drafts = [drafted(measurement, lead) for _ in range(4)]
    start = threading.Barrier(len(drafts))
    failures: list[Exception] = []

    def publish(draft: Release) -> None:
        start.wait()
        try:
            services.publish_release(draft, lead)
        except Exception as error:
            failures.append(error)
        finally:
            connection.close()

    run_together([lambda draft=draft: publish(draft) for draft in drafts])  # type: ignore[misc]
    assert failures == []
    assert set(measurement.releases.values_list("number", flat=True)) == {1, 2, 3, 4}


@pytest.mark.django_db(transaction=True)
def test_two_who_rename_measurements_at_once_come_one_after_the_other(
    measurement: Measurement, collaboration: Collaboration, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    words: dict[str, Any] = {"about": "", "x_name": "x", "x_unit": "", "y_name": "y", "y_unit": ""}
    words |= {"user": lead, "axis": "linear", "seen": 0}
    other = services.create_measurement(
        user=lead, collaboration=collaboration, name="Depth", x_name="x", y_name="y"
    )
    take = partial(services.edit_measurement, measurement=other, name=measurement.name, **words)
    with meanwhile(monkeypatch, editing, "save_if_current", take) as refusals:
        services.edit_measurement(measurement=measurement, name="Seiches", **words)
    # The second waits until the name is free, and holds nothing meanwhile that the first might want.
    assert refusals == []
    assert set(Measurement.objects.values_list("pk", "name")) == {
        (measurement.pk, "Seiches"),
        (other.pk, "Surface seiche power"),
    }


@pytest.mark.django_db(transaction=True)
def test_nothing_is_published_between_the_check_of_an_axis_and_its_change(
    measurement: Measurement, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    draft = drafted(measurement, lead, PLAIN.replace("1,1,0.1", "0,1,0.1"))
    words: dict[str, Any] = {"user": lead, "measurement": measurement, "seen": measurement.revision}
    words |= {"name": "Seiches", "about": "", "x_name": "f", "x_unit": "", "y_name": "P", "y_unit": ""}
    publish = partial(services.publish_release, draft, lead)
    with meanwhile(monkeypatch, editing, "save_if_current", publish) as refusals:
        services.edit_measurement(axis="log", **words)
    # 0 has no logarithm.
    assert len(refusals) == 1
    assert not Release.objects.filter(state=Release.State.PUBLISHED).exists()


@pytest.mark.django_db(transaction=True)
def test_a_draft_that_is_being_published_is_not_discarded(
    measurement: Measurement, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    draft = drafted(measurement, lead)
    discard = partial(services.discard_release, draft, lead)
    with meanwhile(monkeypatch, Release, "save", discard) as refusals:
        services.publish_release(draft, lead)
    assert refusals == ["not-a-draft"]
    assert Release.objects.get().number == 1


def run_together(works: list[Callable[[], None]]) -> None:
    threads = [threading.Thread(target=work) for work in works]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
