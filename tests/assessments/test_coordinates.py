"""What a resolution comes to is shown while it is chosen, and refused there as it would be on submit."""

from collections.abc import Callable

import numpy as np
import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.coordinates_form import CoordinatesForm
from fits.assessments.forms import AssessmentForm, submitted_curves
from tests.conftest import npy

SignedIn = Callable[[User], Client]
DEFAULT = {"resolution_choice": "default", "draws": "2000"}


def sentence(release: Release, **chosen: str) -> str:
    form = CoordinatesForm(DEFAULT | chosen, release=release)
    assert form.is_valid(), form.errors
    return form.sentence


def test_the_default_is_half_as_many_functions_as_points(release: Release) -> None:
    assert sentence(release) == "J = 20 functions: features wider than 0.4 cycles per hour; 40 points."


def test_a_number_of_functions_makes_a_width(release: Release) -> None:
    assert sentence(release, resolution_choice="number", resolution="32").startswith(
        "J = 32 functions: features wider than 0.25 cycles per hour"
    )


def test_a_width_makes_a_number_of_functions(release: Release) -> None:
    assert sentence(release, resolution_choice="width", feature_width="0.5").startswith("J = 16 functions")


def test_even_an_absurd_width_makes_no_more_functions_than_points(release: Release) -> None:
    assert sentence(release, resolution_choice="width", feature_width="1e-320").startswith("J = 40 functions")


def test_full_says_what_it_costs(release: Release) -> None:
    assert sentence(release, resolution_choice="full") == (
        "J = 40 functions: features wider than 0.2 cycles per hour; 40 points; nothing is left over to check the "
        "errors by."
    )


def test_on_a_log_axis_a_width_is_a_factor(release: Release) -> None:
    Measurement.objects.update(axis="log")
    release.refresh_from_db()
    # x from 0.5 to 4.5: 2 ln 9/20 = ln 1.246
    assert "features wider than a factor of 1.25 in frequency" in sentence(release)


def test_bins_are_looked_at_to_their_outer_edges(release: Release) -> None:
    edges = np.linspace(0.0, 4.0, 41)
    table = np.column_stack([edges[:-1], edges[1:], np.ones(40), np.full(40, 0.1)])
    release.table = npy(table)
    release.columns = [{"header": role, "role": role} for role in ("lo", "hi", "y", "error")]
    assert "wider than 0.4 cycles per hour" in sentence(release)


@pytest.mark.parametrize(
    "chosen",
    [
        {"resolution_choice": "number"},
        {"resolution_choice": "number", "resolution": "3"},
        {"resolution_choice": "width", "feature_width": "-1"},
        {"resolution_choice": "width", "feature_width": "inf"},
        {"resolution_choice": "nonsense"},
        {"draws": "50"},
        {"draws": ""},
    ],
)
def test_bad_values_are_refused_as_on_submit(
    signed_in: SignedIn, member: User, release: Release, curve: Curve, chosen: dict[str, str]
) -> None:
    chosen = DEFAULT | chosen
    rest = {"curves": [curve.pk], "levels": "95", "shrinkage": "monotone", "radius": "calibrated", "seed": 1}
    form = AssessmentForm(chosen | rest, release=release, curves=submitted_curves(release))
    faults = [str(fault) for faults in form.errors.values() for fault in faults]
    address = reverse("assessments:coordinates", args=[release.pk])
    page = signed_in(member).get(address, chosen).content.decode()
    assert faults
    for fault in faults:
        assert fault in page
    assert "J =" not in page


def test_more_draws_than_fit_into_a_worker_are_refused(release: Release) -> None:
    release.points = 3000
    chosen = {"resolution_choice": "full", "draws": "100000"}
    assert "too many" in str(CoordinatesForm(chosen, release=release).errors["draws"])


def test_estimated_errors_need_something_left_over(release: Release) -> None:
    release.error_source = "estimate"
    form = CoordinatesForm(DEFAULT | {"resolution_choice": "number", "resolution": "31"}, release=release)
    assert "10 are needed" in str(form.errors["resolution"])
    assert "J = 30" in sentence(release, resolution_choice="number", resolution="30")


def test_the_line_is_on_the_page_at_once(
    signed_in: SignedIn, member: User, release: Release, curve: Curve
) -> None:
    page = signed_in(member).get(reverse("assessments:new", args=[release.pk])).content.decode()
    assert "J = 20 functions" in page
    assert reverse("assessments:coordinates", args=[release.pk]) in page
    assert "Axis: linear" in page


def test_without_scripts_the_line_comes_with_the_refusal_of_something_else(
    signed_in: SignedIn, member: User, release: Release, curve: Curve
) -> None:
    chosen = DEFAULT | {"resolution_choice": "number", "resolution": "32"}
    page = signed_in(member).post(reverse("assessments:new", args=[release.pk]), chosen).content.decode()
    assert "J = 32 functions" in page


def test_the_covariance_is_not_fetched_for_it(signed_in: SignedIn, member: User, release: Release) -> None:
    client = signed_in(member)
    with CaptureQueriesContext(
        connection,
    ) as queries:
        client.get(reverse("assessments:coordinates", args=[release.pk]), DEFAULT)
    assert not any('"covariance"' in query["sql"] for query in queries)


def test_strangers_visitors_and_drafts_get_no_line(
    signed_in: SignedIn, stranger: User, lead: User, release: Release, client: Client
) -> None:
    address = reverse("assessments:coordinates", args=[release.pk])
    assert signed_in(lead).get(address, DEFAULT).status_code == 200
    assert signed_in(stranger).get(address, DEFAULT).status_code == 404
    assert client.get(address, DEFAULT).status_code == 302
    Release.objects.update(state=Release.State.DRAFT, number=None)
    assert signed_in(lead).get(address, DEFAULT).status_code == 404
