"""When a curve is taken for a sealed measurement, and when the words of its theory stand still."""

from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from django.utils import timezone

from core.errors import UserError
from core.measurements.models import Measurement
from core.people.models import User
from core.theories import services
from core.theories.models import Curve, Theory
from core.theories.rules import refuse_short

pytestmark = pytest.mark.usefixtures("read_in_this_process")
CURVE = "x,y\n" + "".join(f"{x},{x * x}\n" for x in (3, 1, 2, 4))
Seal = Callable[..., None]


@pytest.fixture
def seal(measurement: Measurement) -> Seal:
    """Seals the measurement, with what else is said of it; hours count from now."""

    def sealing(*, deadline: float | None = None, opens: float | None = None, **said: Any) -> None:
        def moment(hours: float | None) -> Any:
            return None if hours is None else timezone.now() + timedelta(hours=hours)

        Measurement.objects.filter(pk=measurement.pk).update(
            sealed_at=moment(-48), curves_until=moment(deadline), opens_at=moment(opens), **said
        )
        measurement.refresh_from_db()

    return sealing


@pytest.fixture
def draft(theory: Theory, measurement: Measurement, member: User) -> Curve:
    return services.draft_curve(
        user=member, theory=theory, measurement=measurement, content=CURVE.encode(), file_name="flat.csv"
    )


def refusal(change: Callable[[], object]) -> UserError:
    with pytest.raises(UserError) as refused:
        change()
    return refused.value


def new_words(theory: Theory, by: User) -> None:
    services.edit_theory(
        by=by,
        theory=theory,
        seen=theory.revision,
        name="Deep floor",
        proposed_by="",
        description="",
        reference="",
    )


def test_a_sealed_measurement_takes_curves_until_its_deadline(draft: Curve, seal: Seal) -> None:
    seal(deadline=1, opens=2)
    assert services.submit_curve(draft).version == 1


def test_between_deadline_and_opening_no_curve_is_submitted(draft: Curve, seal: Seal) -> None:
    seal(deadline=-1, opens=2)
    assert refusal(lambda: services.submit_curve(draft)).code == "curves-closed"
    draft.refresh_from_db()
    assert draft.state == Curve.State.DRAFT


def test_nor_is_one_drafted(theory: Theory, measurement: Measurement, member: User, seal: Seal) -> None:
    seal(deadline=-1)
    refused = refusal(
        lambda: services.draft_curve(
            user=member, theory=theory, measurement=measurement, content=CURVE.encode(), file_name="flat.csv"
        )
    )
    assert refused.code == "curves-closed"


def test_the_seal_as_it_stands_at_that_moment_decides(draft: Curve, seal: Seal) -> None:
    # The draft in hand knows of no seal.
    loaded = Curve.objects.select_related("measurement").get(pk=draft.pk)
    assert not loaded.measurement.is_sealed
    seal(deadline=-1)
    assert refusal(lambda: services.submit_curve(loaded)).code == "curves-closed"


def test_once_it_is_open_curves_are_taken_again(draft: Curve, seal: Seal) -> None:
    seal(deadline=-2, opens=-1)
    assert services.submit_curve(draft).version == 1


def test_a_curve_has_to_cover_the_announced_stretch(draft: Curve, seal: Seal) -> None:
    seal(announced_x_min=0.5, announced_x_max=4.0)
    refused = refusal(lambda: services.submit_curve(draft))
    assert refused.code == "announced-range-not-covered"
    assert refused.reason == "the curve covers 1–4, and 0.5–4 is announced: missing stretch 0.5–1"


@pytest.mark.parametrize(
    ("low", "high", "missing"),
    [
        (0.5, 5.0, "0.5–1 and 4–5"),
        (10.0, 40.0, "10–40"),
        (None, 5.0, "4–5"),
        (0.0, None, "0–1"),
        (1.0, 4.0, ""),
        (None, None, ""),
    ],
)
def test_the_missing_stretch_is_named(
    measurement: Measurement, seal: Seal, low: float | None, high: float | None, missing: str
) -> None:
    seal(announced_x_min=low, announced_x_max=high)
    if missing:
        assert refusal(lambda: refuse_short(measurement, 1.0, 4.0)).reason.endswith(
            f"missing stretch {missing}"
        )
    else:
        refuse_short(measurement, 1.0, 4.0)


def test_once_it_is_open_the_data_say_what_a_curve_has_to_cover(measurement: Measurement, seal: Seal) -> None:
    seal(opens=-1, announced_x_min=0.0, announced_x_max=9.0)
    refuse_short(measurement, 1.0, 4.0)


def test_the_words_of_a_registered_theory_stand_still_from_deadline_to_opening(
    curve: Curve, member: User, seal: Seal
) -> None:
    seal(deadline=1)
    new_words(curve.theory, member)
    seal(deadline=-1)
    theory = Theory.objects.get()
    refused = refusal(lambda: new_words(theory, member))
    assert (refused.code, "Surface seiche power" in refused.reason) == ("registered", True)
    seal(deadline=-2, opens=-1)
    new_words(Theory.objects.get(), member)


def test_a_theory_without_a_submitted_curve_for_it_is_not_registered(
    draft: Curve, member: User, seal: Seal
) -> None:
    seal(deadline=-1)
    new_words(draft.theory, member)
    assert Theory.objects.get().name == "Deep floor"
