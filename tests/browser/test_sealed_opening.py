"""A member submits to a sealed measurement, a lead looks early and opens it, and everybody sees what happened."""

import numpy as np
import pytest
from django.utils import timezone
from playwright.sync_api import FilePayload, Page, expect

from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Theory
from fits.assessments.models import Assessment
from tests.browser.conftest import Browsing
from tests.conftest import power

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def sealed(release: Release) -> Measurement:
    """A measurement whose release nobody has seen yet, to be opened by a lead's word."""
    measurement = release.measurement
    measurement.sealed_at = timezone.now()
    measurement.announced_x_min, measurement.announced_x_max = 0.5, 4.5
    measurement.save()
    return measurement


def submit_a_curve(page: Page, measurement: Measurement) -> None:
    """Upload a curve on the measurement's page and submit it."""
    page.goto(measurement.get_absolute_url())
    page.get_by_text("Submit a curve").click()
    page.get_by_role("link", name="of Parabolic floor").click()
    x = np.linspace(0.4, 4.6, 200)
    rows = "".join(f"{at:.6g},{value:.6g}\n" for at, value in zip(x, power(x), strict=True))
    file: FilePayload = {"name": "curve.csv", "mimeType": "text/csv", "buffer": f"x,y\n{rows}".encode()}
    page.get_by_label("Curve", exact=True).set_input_files(files=[file])
    page.get_by_role("button", name="Read it").click()
    # The curve alone: there are no data to see.
    expect(page.locator(".figure .scatterlayer .trace")).to_have_count(1)
    page.get_by_role("button", name="Submit").click()
    expect(page.get_by_role("status")).to_contain_text("Version 1 is submitted.")


def test_a_lead_opens_what_was_sealed(
    browsing: Browsing, sealed: Measurement, theory: Theory, lead: User, member: User
) -> None:
    members, leads = browsing.page(member), browsing.page(lead)
    submit_a_curve(members, sealed)
    members.goto(sealed.get_absolute_url())
    expect(members.get_by_role("heading", name="Sealed")).to_be_visible()
    expect(members.locator(".figure")).to_have_count(0)
    expect(members.locator("main")).not_to_contain_text("release 1")

    leads.goto(sealed.get_absolute_url())
    expect(leads.locator(".figure")).to_have_count(0)
    leads.get_by_role("button", name="Look at the data before it opens").click()
    expect(leads.locator(".figure .main-svg").first).to_be_visible()
    members.reload()
    expect(members.locator("main")).to_contain_text("Lin Lead")
    expect(members.locator(".figure")).to_have_count(0)

    leads.get_by_role("link", name="Open it").click()
    leads.get_by_role("button", name="Open").click()
    members.reload()
    expect(members.locator(".figure .main-svg").first).to_be_visible()
    expect(members.locator("main")).to_contain_text("release 1")
    members.get_by_role("link", name="Register of its curves").click()
    expect(members.locator("main")).to_contain_text("Mo Member")
    expect(members.locator("main")).to_contain_text("Lin Lead")
    # Its curves are assessed without anybody asking for it.
    assert Assessment.objects.get().is_automatic
