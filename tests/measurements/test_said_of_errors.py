"""What a lead says of the errors: from upload over the draft to the published release."""

import re
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from django.core.files.uploadedfile import SimpleUploadedFile
from django.db import IntegrityError
from django.test import Client
from django.urls import reverse

from core.errors import UserError
from core.measurements import services
from core.measurements.models import Measurement, Release
from core.measurements.reading.stored import to_bytes
from core.measurements.said_of_errors import SENTENCES, SaidOfErrors
from core.measurements.stored_release import data_of, said_of
from core.people.models import User
from fits.engine.data import ErrorSource

SignedIn = Callable[[User], Client]
N = 80
X = np.arange(float(N))
NOISE = np.random.default_rng(8).normal(size=N)
Y = 50.0 + 10.0 * np.sin(X / 9.0) + 2.0 * NOISE


def table(**columns: Any) -> bytes:
    """A file with these columns."""
    rows = zip(*(np.broadcast_to(column, N).tolist() for column in columns.values()), strict=True)
    names = ",".join(name.replace("_", ":") for name in columns)
    return "\n".join([names, *(",".join(map(repr, row)) for row in rows)]).encode()


PLAIN = table(x=X, y=Y)
GIVEN = table(x=X, y=Y, error=0.5)
COUNTS = table(x=X, y=np.round(Y))


def drafted(measurement: Measurement, user: User, content: bytes = GIVEN, **more: Any) -> Release:
    return services.draft_release(
        user=user, measurement=measurement, content=content, file_name="tank.csv", **more
    )


def send(client: Client, measurement: Measurement, content: bytes = GIVEN, **more: Any) -> Any:
    address = reverse("measurements:upload", args=[measurement.pk])
    return client.post(address, {"table": SimpleUploadedFile("tank.csv", content), **more})


def page_of(release: Release, client: Client) -> str:
    return str(client.get(release.get_absolute_url()).content.decode())


def role_fields(*roles: str) -> dict[str, str]:
    return {f"role_{index}": role for index, role in enumerate(roles)}


def test_each_way_of_giving_errors_is_offered_in_one_sentence(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    page = signed_in(lead).get(reverse("measurements:upload", args=[measurement.pk])).content.decode()
    assert [words for words in SENTENCES.values() if words not in page] == []


@pytest.mark.parametrize(
    ("said", "content"),
    [
        (SaidOfErrors.COLUMN, GIVEN),
        (SaidOfErrors.ONE_SIZE, PLAIN),
        (SaidOfErrors.RELATIVE, GIVEN),
        (SaidOfErrors.COUNTS, COUNTS),
        (SaidOfErrors.PROFILE, PLAIN),
    ],
)
def test_what_was_said_at_the_upload_stands_on_the_draft(
    said: SaidOfErrors, content: bytes, measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    assert send(client, measurement, content, errors_from=said.value).status_code == 302
    draft = Release.objects.get()
    assert said_of(draft) is said
    assert re.search(rf'value="{said.value}"[^>]* checked', page_of(draft, client))


def test_an_upload_without_a_word_is_read_as_before(measurement: Measurement, lead: User) -> None:
    assert said_of(drafted(measurement, lead)) is SaidOfErrors.COLUMN
    with_covariance = drafted(
        measurement, lead, PLAIN, covariance_content=to_bytes(np.eye(N)), covariance_name="c.npy"
    )
    assert said_of(with_covariance) is SaidOfErrors.COVARIANCE


def test_a_covariance_that_is_spoken_of_and_not_there_is_asked_for(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    answer = send(signed_in(lead), measurement, PLAIN, errors_from="covariance")
    assert answer.status_code == 400
    page = answer.content.decode()
    assert "Choose the file that holds it." in page
    assert '<details class="more" open>' in page


@pytest.mark.parametrize("said", ["one-size", "counts", "profile"])
def test_an_error_column_that_says_nothing_is_not_used_and_that_is_said(
    said: str, measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    send(client, measurement, table(x=X, y=np.round(Y), sigma=0.5), errors_from=said)
    draft = Release.objects.get()
    assert [column["role"] for column in draft.columns] == ["x", "y", ""]
    assert "The column “sigma” is not used" in page_of(draft, client)


def test_a_table_without_errors_waits_for_a_word_on_them(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    assert send(client, measurement, PLAIN, errors_from="column").status_code == 302
    draft = Release.objects.get()
    page = page_of(draft, client)
    assert "No errors are given" in page
    assert "have them estimated" in page
    assert reverse("measurements:publish", args=[draft.pk]) not in page
    answer = client.post(draft.get_absolute_url(), role_fields("x", "y") | {"errors_from": "one-size"})
    assert answer.status_code == 302
    assert reverse("measurements:publish", args=[draft.pk]) in page_of(draft, client)


def test_a_table_without_errors_keeps_every_other_rule(measurement: Measurement, lead: User) -> None:
    with pytest.raises(UserError, match="at least 8"):
        drafted(measurement, lead, b"x,y\n1,2\n2,3\n")
    assert not Release.objects.exists()


@pytest.mark.parametrize(
    ("content", "more", "reason"),
    [
        (table(x=X, y=np.round(Y), shared_gain=0.5), {"said": SaidOfErrors.COUNTS}, "no place on the scale"),
        (table(x=X, y=Y), {"said": SaidOfErrors.COUNTS}, "is not a count"),
        (
            PLAIN,
            {"said": SaidOfErrors.PROFILE, "covariance_content": to_bytes(np.eye(N))},
            "would be ignored",
        ),
        (
            COUNTS,
            {"said": SaidOfErrors.COUNTS, "covariance_content": to_bytes(np.eye(N))},
            "would be ignored",
        ),
        (PLAIN, {"said": SaidOfErrors.ONE_SIZE, "covariance_content": to_bytes(np.eye(N))}, "without use"),
        (PLAIN, {"said": SaidOfErrors.COVARIANCE}, "no covariance"),
        (GIVEN, {"calibration": 1.0}, "no fraction"),
        (
            b"x,y\n" + b"".join(b"%d,%d\n" % (i, i) for i in range(18)),
            {"said": SaidOfErrors.ONE_SIZE},
            "19 are needed",
        ),
        (
            b"x,y\n" + b"".join(b"%d,%d\n" % (i, i) for i in range(59)),
            {"said": SaidOfErrors.PROFILE},
            "60 are needed",
        ),
        (
            table(lo=X, hi=X + 1, y=Y, error=1.0),
            {"windows_content": to_bytes(np.vstack([X, np.eye(N)]))},
            "bins as well",
        ),
        (GIVEN, {"windows_content": to_bytes(np.eye(N))}, "has shape 80 × 80 for 80 points"),
    ],
)
def test_what_contradicts_itself_is_refused_with_a_remedy_and_nothing_is_kept(
    content: bytes, more: dict[str, Any], reason: str, measurement: Measurement, lead: User
) -> None:
    with pytest.raises(UserError, match=f"(?i){reason}") as refusal:
        drafted(measurement, lead, content, **more)
    assert refusal.value.remedy
    assert not Release.objects.exists()


@pytest.mark.parametrize("percent", ["5 %", "100", "-1", "nan", "inf"])
def test_a_calibration_that_is_no_percentage_below_100_is_refused_beside_its_field(
    percent: str, measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    answer = send(signed_in(lead), measurement, scale_percent=percent)
    assert answer.status_code == 400
    assert "id_scale_percent_error" in answer.content.decode()
    assert not Release.objects.exists()


def test_a_calibration_is_asked_for_in_percent_and_kept_as_a_fraction(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    send(client, measurement, scale_percent="2.5")
    draft = Release.objects.get()
    assert draft.calibration == 0.025
    page = page_of(draft, client)
    assert "a scale known to 2.5 %" in page
    assert 'value="2.5"' in page


def test_a_calibration_that_is_no_fraction_is_not_stored(release: Release) -> None:
    with pytest.raises(IntegrityError):
        Release.objects.filter(pk=release.pk).update(calibration=5.0)


def test_windows_are_kept_with_name_and_hash(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    matrix = np.vstack([X, np.eye(N)])
    send(client, measurement, windows=SimpleUploadedFile("../slit.npy", to_bytes(matrix)))
    draft = Release.objects.get()
    assert (draft.windows_name, len(draft.windows_sha256)) == ("slit.npy", 64)
    found = data_of(draft).windows
    assert found is not None
    assert np.array_equal(found.weights, np.eye(N))
    assert "through windows on 80 values of x" in page_of(draft, client)
    published = services.publish_release(draft, lead)
    assert published.windows_sha256 in page_of(published, client)


def test_windows_stay_in_the_database_until_they_are_asked_for(measurement: Measurement, lead: User) -> None:
    drafted(measurement, lead, windows_content=to_bytes(np.vstack([X, np.eye(N)])), windows_name="slit.npy")
    assert "windows" in Release.objects.get().get_deferred_fields()


def test_columns_and_errors_are_changed_together(measurement: Measurement, lead: User) -> None:
    draft = drafted(measurement, lead)
    services.map_columns(draft, ["x", "y", ""], user=lead, said=SaidOfErrors.PROFILE, calibration=0.1)
    draft.refresh_from_db()
    data = data_of(draft)
    assert (data.source, data.calibration, data.errors) == (ErrorSource.PROFILE, 0.1, None)


@pytest.mark.parametrize(
    ("roles", "said", "reason"),
    [
        (["x", "y", "error"], SaidOfErrors.ONE_SIZE, "the error column without use"),
        (["x", "y", "error"], SaidOfErrors.COUNTS, "the error column would be ignored"),
        (["x", "y", "error"], SaidOfErrors.PROFILE, "the error column would be ignored"),
        (["x", "y", ""], SaidOfErrors.RELATIVE, "no column is marked as relative errors"),
        (["x", "y", ""], SaidOfErrors.COLUMN, "no errors are given"),
        (["x", "y", "error"], SaidOfErrors.COVARIANCE, "there is no covariance"),
    ],
)
def test_columns_and_words_that_contradict_each_other_change_nothing(
    roles: list[str], said: SaidOfErrors, reason: str, measurement: Measurement, lead: User
) -> None:
    draft = drafted(measurement, lead, table(x=X, y=np.round(Y), error=0.5))
    with pytest.raises(UserError, match=f"(?i){reason}") as refusal:
        services.map_columns(draft, roles, user=lead, said=said)
    assert refusal.value.remedy
    draft.refresh_from_db()
    assert said_of(draft) is SaidOfErrors.COLUMN


def test_what_is_said_of_a_published_release_stays(release: Release, lead: User) -> None:
    with pytest.raises(UserError, match="draft no more"):
        services.map_columns(release, ["x", "y", "error"], user=lead, said=SaidOfErrors.RELATIVE)
    with pytest.raises(TypeError):
        release.save()


def test_errors_that_cannot_be_estimated_are_not_published(measurement: Measurement, lead: User) -> None:
    draft = drafted(measurement, lead, table(x=X, y=1.0), said=SaidOfErrors.ONE_SIZE)
    with pytest.raises(UserError, match="no scatter"):
        services.publish_release(draft, lead)


def test_the_preview_shows_three_estimates_with_their_errors(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    page = page_of(drafted(measurement, lead, PLAIN, said=SaidOfErrors.ONE_SIZE), signed_in(lead))
    for words in ("leftover", "first differences", "second differences", "standard error"):
        assert words in page
    assert "estimates-disagree" not in page


def test_the_preview_warns_of_shared_errors_above_those_of_the_points(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    content = table(x=X, y=Y, error=0.5, shared_baseline=2.0)
    page = page_of(drafted(measurement, lead, content), signed_in(lead))
    assert f"{reverse('reports:explained')}#shared-larger" in page
    assert "2 against 0.5" in page


def test_the_preview_says_how_counts_are_judged(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    page = page_of(drafted(measurement, lead, COUNTS, said=SaidOfErrors.COUNTS), signed_in(lead))
    assert "2√(v + 3/8)" in page
    assert "the errors of counts" in page


def test_bins_are_drawn_as_horizontal_bars(measurement: Measurement, lead: User, signed_in: SignedIn) -> None:
    draft = drafted(measurement, lead, table(lo=X, hi=X + 1.0, y=Y, error=0.5))
    answer = signed_in(lead).get(draft.get_absolute_url())
    bars = answer.context["figure"]["data"][0]["error_x"]
    assert bars["array"] == bars["arrayminus"] == [0.5] * N
    assert "mean over its horizontal bar" in answer.content.decode()


def test_the_profile_is_drawn_as_error_bars(
    measurement: Measurement, lead: User, signed_in: SignedIn
) -> None:
    content = table(x=X, y=50.0 + 0.5 * np.exp(X / 40.0) * NOISE)
    draft = drafted(measurement, lead, content, said=SaidOfErrors.PROFILE)
    bars = signed_in(lead).get(draft.get_absolute_url()).context["figure"]["data"][0]["error_y"]["array"]
    assert bars[-1] > 2.0 * bars[0]


def test_a_quiet_release_says_nothing_of_its_errors_beyond_where_they_come_from(
    release: Release, member: User, signed_in: SignedIn
) -> None:
    page = page_of(release, signed_in(member))
    assert "an error for each point" in page
    assert "What the errors come to" not in page


def test_a_member_and_a_stranger_do_not_change_what_is_said(
    measurement: Measurement, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    draft = drafted(measurement, lead)
    said = role_fields("x", "y", "error") | {"errors_from": "relative"}
    assert signed_in(member).post(draft.get_absolute_url(), said).status_code == 403
    assert signed_in(stranger).post(draft.get_absolute_url(), said).status_code == 404
    draft.refresh_from_db()
    assert draft.error_source == "given"
