"""A measurement is sealed, its seal changed, looked behind and opened: what holds, and what is refused."""

from functools import partial

import pytest
from django.utils import timezone

from core.errors import UserError
from core.measurements import services
from core.measurements.models import EarlyLook, Measurement
from core.measurements.seal_terms import SealTerms
from core.measurements.services import draft as drafting
from core.measurements.services import open as opening
from core.measurements.signals import measurement_opened
from core.people.access import sees_data
from core.people.models import Collaboration, LogEntry, Membership, Role, User
from tests.meanwhile import meanwhile
from tests.measurements.sealing import DAY, TABLE, change, drafted, pass_time, published, seal, soon


@pytest.fixture
def second_lead(collaboration: Collaboration) -> User:
    user = User.objects.create_user("second@merrow.example", name="Sid Second")
    Membership.objects.create(user=user, collaboration=collaboration, role=Role.LEAD)
    return user


def code_of(refusal: pytest.ExceptionInfo[UserError]) -> str:
    return refusal.value.code


def deeds(measurement: Measurement) -> list[str]:
    return list(measurement.collaboration.log.order_by("pk").values_list("deed", flat=True))


def test_a_sealed_measurement_shows_its_data_to_nobody(
    measurement: Measurement, lead: User, member: User
) -> None:
    assert sees_data(member, measurement)
    seal(measurement, lead)
    assert measurement.is_sealed
    assert not any(sees_data(user, measurement) for user in (lead, member))
    entry = LogEntry.objects.get(deed="sealed")
    assert entry.who == lead
    assert entry.detail["opens"] == "by a lead’s word"


def test_what_has_been_published_cannot_be_sealed(measurement: Measurement, lead: User) -> None:
    release = published(measurement, lead)
    with pytest.raises(UserError) as refusal:
        seal(measurement, lead)
    assert code_of(refusal) == "data-known"
    services.withdraw_release(user=lead, release=release, reason="A wrong gauge.")
    with pytest.raises(UserError) as refusal:
        seal(measurement, lead)
    assert code_of(refusal) == "data-known"


def test_a_draft_is_no_hindrance_and_who_brought_it_has_seen_the_data(
    measurement: Measurement, lead: User, second_lead: User
) -> None:
    drafted(measurement, lead)
    seal(measurement, second_lead)
    look = EarlyLook.objects.get()
    assert (look.user, look.how) == (lead, "uploaded")


@pytest.mark.parametrize(
    ("terms", "code"),
    [
        ({"opens_at": soon(days=-1)}, "opening-past"),
        ({"curves_until": soon(days=-1)}, "deadline-past"),
        ({"opens_at": soon(days=1), "curves_until": soon(days=2)}, "curves-after-opening"),
        ({"announced_x_min": 1.0}, "half-a-range"),
        ({"announced_x_min": 2.0, "announced_x_max": 1.0}, "range-turned"),
    ],
)
def test_terms_that_do_not_go_together_are_refused(
    measurement: Measurement, lead: User, terms: dict[str, float], code: str
) -> None:
    with pytest.raises(UserError) as refusal:
        seal(measurement, lead, **terms)
    assert code_of(refusal) == code
    assert not Measurement.objects.get().was_sealed


def test_the_opening_is_moved_while_it_is_to_come_and_the_log_says_from_when(
    measurement: Measurement, lead: User
) -> None:
    first, second = soon(days=1), soon(days=2)
    seal(measurement, lead, opens_at=first)
    change(measurement, lead, opens_at=second)
    assert measurement.opens_at == second
    words = LogEntry.objects.get(deed="changed_seal").detail
    assert words == {"opens": f"{first:%Y-%m-%d %H:%M} UTC → {second:%Y-%m-%d %H:%M} UTC"}


def test_a_seal_does_not_come_back_once_its_time_has_come(measurement: Measurement, lead: User) -> None:
    seal(measurement, lead, opens_at=soon(days=1))
    pass_time(measurement, opens_at=timezone.now())
    with pytest.raises(UserError) as refusal:
        change(measurement, lead, opens_at=soon(days=2))
    assert code_of(refusal) == "not-sealed"
    with pytest.raises(UserError) as refusal:
        seal(measurement, lead)
    assert code_of(refusal) == "sealed-already"


def test_a_deadline_is_moved_until_it_has_passed(measurement: Measurement, lead: User) -> None:
    seal(measurement, lead, curves_until=soon(days=1))
    change(measurement, lead, curves_until=soon(days=2))
    pass_time(measurement, curves_until=timezone.now())
    with pytest.raises(UserError) as refusal:
        change(measurement, lead, curves_until=soon(days=3))
    assert code_of(refusal) == "deadline-passed"
    # The opening may still be moved.
    change(measurement, lead, curves_until=measurement.curves_until, opens_at=soon(days=3))
    assert measurement.opens_at is not None


@pytest.mark.usefixtures("curve")
def test_the_announced_x_stays_once_a_curve_relies_on_it(measurement: Measurement, lead: User) -> None:
    seal(measurement, lead, announced_x_min=1.0, announced_x_max=10.0)
    with pytest.raises(UserError) as refusal:
        change(measurement, lead, announced_x_min=1.0, announced_x_max=20.0)
    assert code_of(refusal) == "range-relied-on"


def test_a_release_wider_than_announced_is_not_published_and_both_are_named(
    measurement: Measurement, lead: User
) -> None:
    seal(measurement, lead, announced_x_min=2.0, announced_x_max=9.0)
    draft = drafted(measurement, lead)
    with pytest.raises(UserError, match="reach from 1 to 10, and 2 to 9 is announced"):
        services.publish_release(draft, lead)
    change(measurement, lead, announced_x_min=1.0, announced_x_max=10.0)
    assert services.publish_release(draft, lead).number == 1


def test_whether_a_wide_release_is_there_is_told_to_those_alone_who_see_it(
    measurement: Measurement, lead: User, second_lead: User
) -> None:
    seal(measurement, lead)
    published(measurement, lead)
    with pytest.raises(UserError, match="reach from 1 to 10"):
        change(measurement, lead, announced_x_min=2.0, announced_x_max=9.0)
    change(measurement, second_lead, announced_x_min=2.0, announced_x_max=9.0)
    assert measurement.announced_x_min == 2.0


def test_the_axis_of_a_sealed_measurement_is_settled_whether_anything_is_published_or_not(
    measurement: Measurement, lead: User
) -> None:
    words = {"name": "Seiches", "about": "", "x_name": "f", "x_unit": "", "y_name": "P", "y_unit": ""}
    seal(measurement, lead)
    for publish in (False, True):
        if publish:
            published(measurement, lead)
        with pytest.raises(UserError, match="measurement is sealed"):
            services.edit_measurement(
                user=lead, measurement=measurement, seen=measurement.revision, axis="log", **words
            )


def test_a_lead_who_looks_sees_the_data_and_everybody_can_read_so(
    measurement: Measurement, lead: User, second_lead: User
) -> None:
    seal(measurement, lead)
    for _ in range(2):
        services.look_early(user=lead, measurement=measurement)
    assert sees_data(lead, measurement)
    assert not sees_data(second_lead, measurement)
    assert EarlyLook.objects.get().how == "looked"
    assert LogEntry.objects.get(deed="looked_early").hidden_with is None


def test_who_uploads_sealed_data_has_seen_them(measurement: Measurement, lead: User) -> None:
    seal(measurement, lead)
    with pytest.raises(UserError):
        drafted(measurement, lead, TABLE.replace("3,9,0.1", "3,nine,0.1"))
    assert not EarlyLook.objects.exists()
    drafted(measurement, lead)
    assert EarlyLook.objects.get().how == "uploaded"


def test_nothing_is_to_be_looked_at_early_once_it_is_open(measurement: Measurement, lead: User) -> None:
    with pytest.raises(UserError, match="open to all"):
        services.look_early(user=lead, measurement=measurement)


def test_opening_is_for_good(measurement: Measurement, lead: User, second_lead: User, member: User) -> None:
    seal(measurement, lead)
    services.open_measurement(user=lead, measurement=measurement)
    assert sees_data(member, measurement)
    assert measurement.opened_by == lead
    with pytest.raises(UserError, match="was opened by Lin Lead"):
        services.open_measurement(user=second_lead, measurement=measurement)
    with pytest.raises(UserError):
        seal(measurement, lead)
    assert deeds(measurement) == ["sealed", "opened"]


def test_it_is_open_from_its_time_on_though_no_job_has_run(
    measurement: Measurement, lead: User, member: User
) -> None:
    seal(measurement, lead, opens_at=soon(days=1))
    assert not sees_data(member, measurement)
    pass_time(measurement, opens_at=timezone.now())
    assert sees_data(member, measurement)
    assert measurement.opened == measurement.opens_at
    with pytest.raises(UserError, match="at its time"):
        services.open_measurement(user=lead, measurement=measurement)


def test_an_opening_at_its_time_is_noted_once(measurement: Measurement, lead: User) -> None:
    seal(measurement, lead, opens_at=soon(days=1))
    assert services.note_openings() == []
    pass_time(measurement, opens_at=timezone.now() - DAY)
    assert services.note_openings() == [measurement.pk]
    assert services.note_openings() == []
    measurement.refresh_from_db()
    assert (measurement.opened_at, measurement.opened_by) == (measurement.opens_at, None)
    assert LogEntry.objects.get(deed="opened").who is None


def test_an_opening_that_cannot_be_noted_keeps_no_other_from_it(
    measurement: Measurement, lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    later = Measurement.objects.create(
        collaboration=measurement.collaboration, name="Inflow", x_name="t", y_name="q", created_by=lead
    )
    for sealed, days in ((measurement, 2), (later, 1)):
        seal(sealed, lead, opens_at=soon(days=1))
        pass_time(sealed, opens_at=timezone.now() - days * DAY)

    def faulty(*, measurement: Measurement, **_: object) -> None:
        if measurement.pk != later.pk:
            raise ValueError("its data cannot be read")

    monkeypatch.setattr(measurement_opened, "send", faulty)
    assert services.note_openings() == [later.pk]
    monkeypatch.undo()
    assert services.note_openings() == [measurement.pk]


def test_a_seal_that_somebody_else_has_changed_is_not_overwritten(
    measurement: Measurement, lead: User, second_lead: User
) -> None:
    seal(measurement, lead)
    seen = measurement.revision
    change(measurement, lead, opens_at=soon(days=1))
    with pytest.raises(UserError) as refusal:
        services.change_seal(
            user=second_lead,
            measurement=measurement,
            seen=seen,
            terms=SealTerms(opens_at=soon(days=2)),
        )
    assert code_of(refusal) == "changed-meanwhile"


@pytest.mark.django_db(transaction=True)
def test_of_two_who_open_it_at_once_one_is_told_that_it_is_open(
    measurement: Measurement, lead: User, second_lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    seal(measurement, lead)
    other = partial(
        services.open_measurement,
        user=second_lead,
        measurement=Measurement.objects.get(),
    )
    with meanwhile(monkeypatch, opening, "record", other) as refusals:
        services.open_measurement(user=lead, measurement=measurement)
    assert refusals == ["not-sealed"]
    assert Measurement.objects.get().opened_by == lead
    assert LogEntry.objects.filter(deed="opened").count() == 1


@pytest.mark.django_db(transaction=True)
def test_who_uploads_while_it_is_sealed_has_seen_the_data_all_the_same(
    measurement: Measurement, lead: User, second_lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    with meanwhile(monkeypatch, drafting, "record", partial(seal, Measurement.objects.get(), second_lead)):
        drafted(measurement, lead)
    assert Measurement.objects.get().is_sealed
    assert EarlyLook.objects.get().user == lead
