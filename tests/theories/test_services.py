"""Theories and curves: what is kept, what is refused, and how versions are given."""

import threading
from functools import partial

import pytest
from django.db import connection

from core.errors import UserError
from core.measurements.models import Measurement
from core.people.models import Collaboration, User
from core.people.services import create_collaboration
from core.theories import services
from core.theories.models import Curve, Theory
from core.theories.stored_curve import table_of
from tests.meanwhile import meanwhile

CURVE = "x,y\n" + "".join(f"{x},{x * x}\n" for x in (3, 1, 2, 4))


def drafted(theory: Theory, measurement: Measurement, user: User, text: str = CURVE) -> Curve:
    return services.draft_curve(
        user=user, theory=theory, measurement=measurement, content=text.encode(), file_name="../flat.csv"
    )


def test_a_curve_is_sorted_and_its_range_kept(theory: Theory, measurement: Measurement, member: User) -> None:
    draft = drafted(theory, measurement, member)
    assert table_of(draft).x.tolist() == [1, 2, 3, 4]
    assert (draft.x_min, draft.x_max, draft.points, draft.file_name) == (1, 4, 4, "flat.csv")


@pytest.mark.parametrize("text", [CURVE + "2,5\n", CURVE.replace("2,4", "2,four"), "x,y\n1,1\n", ""])
def test_nothing_is_kept_of_a_refused_curve(
    theory: Theory, measurement: Measurement, member: User, text: str
) -> None:
    with pytest.raises(UserError):
        drafted(theory, measurement, member, text)
    assert not Curve.objects.exists()


def test_a_curve_is_for_a_measurement_of_its_own_collaboration(
    theory: Theory, stranger: User, member: User
) -> None:
    other = create_collaboration(user=stranger, name="Wave tank")
    elsewhere = Measurement.objects.create(
        collaboration=other, name="Height", x_name="x", y_name="y", created_by=stranger
    )
    with pytest.raises(UserError, match="another collaboration"):
        drafted(theory, elsewhere, member)


def test_versions_count_up_for_each_measurement(
    curve: Curve, theory: Theory, measurement: Measurement, member: User
) -> None:
    other = Measurement.objects.create(
        collaboration=theory.collaboration, name="Phase", x_name="x", y_name="y", created_by=member
    )
    assert services.submit_curve(drafted(theory, measurement, member)).version == 2
    assert services.submit_curve(drafted(theory, other, member)).version == 1


def test_a_submitted_curve_is_neither_submitted_again_nor_discarded(curve: Curve) -> None:
    with pytest.raises(UserError):
        services.submit_curve(curve)
    with pytest.raises(UserError):
        services.discard_curve(curve)
    assert Curve.objects.filter(pk=curve.pk, version=1).exists()


def test_a_discarded_draft_is_gone(theory: Theory, measurement: Measurement, member: User) -> None:
    services.discard_curve(drafted(theory, measurement, member))
    assert not Curve.objects.exists()


def test_two_theories_of_a_collaboration_have_two_names(
    theory: Theory, collaboration: Collaboration, member: User
) -> None:
    with pytest.raises(UserError, match="here already"):
        services.create_theory(user=member, collaboration=collaboration, name=theory.name)


@pytest.mark.django_db(transaction=True)
def test_two_who_submit_at_once_get_two_versions(
    theory: Theory, measurement: Measurement, member: User
) -> None:
    drafts = [drafted(theory, measurement, member) for _ in range(3)]
    start = threading.Barrier(len(drafts))

    def submit(draft: Curve) -> None:
        start.wait()
        try:
            services.submit_curve(draft)
        finally:
            connection.close()

    threads = [threading.Thread(target=submit, args=[draft]) for draft in drafts]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert set(theory.curves.values_list("version", flat=True)) == {1, 2, 3}


@pytest.mark.django_db(transaction=True)
def test_a_draft_that_is_being_submitted_is_not_discarded(
    theory: Theory, measurement: Measurement, member: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    draft = drafted(theory, measurement, member)
    discard = partial(services.discard_curve, draft)
    with meanwhile(monkeypatch, Curve, "save", discard) as refusals:
        services.submit_curve(draft)
    assert refusals == ["not-a-draft"]
    assert Curve.objects.get().version == 1
