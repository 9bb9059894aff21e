"""Addresses of the site, one line an app."""

from django.urls import include, path

from core.health import health

urlpatterns = [
    path("health", health),
    path("accounts/", include("allauth.account.urls")),
    path("", include("fits.overviews.urls")),
    path("", include("core.people.urls")),
    path("", include("core.measurements.urls")),
    path("", include("core.theories.urls")),
    path("", include("fits.assessments.urls")),
    path("", include("fits.reports.urls")),
]
