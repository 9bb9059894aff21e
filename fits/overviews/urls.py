"""Addresses of the pages that are read."""

from django.urls import path

from fits.overviews import views

app_name = "overviews"
urlpatterns = [
    path("", views.home, name="home"),
    path("collaborations/<int:pk>/", views.collaboration, name="collaboration"),
    path("measurements/<int:pk>/", views.measurement, name="measurement"),
    path("theories/<int:pk>/", views.theory, name="theory"),
]
