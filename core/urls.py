"""Addresses of the site, one line an app."""

from django.urls import include, path, re_path
from django.views.generic import RedirectView

from core.health import health

urlpatterns = [
    path("health", health),
    # People are known by the address they were added with: allauth's pages that change or confirm one stay shut.
    re_path("^accounts/(?:confirm-)?email/", RedirectView.as_view(pattern_name="account_change_password")),
    path("accounts/", include("allauth.account.urls")),
    path("", include("fits.overviews.urls")),
    path("", include("core.people.urls")),
    path("", include("core.measurements.urls")),
    path("", include("core.theories.urls")),
    path("", include("fits.assessments.urls")),
    path("", include("fits.reports.urls")),
    path("", include("fits.talk.urls")),
]
