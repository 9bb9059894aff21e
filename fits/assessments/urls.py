"""Addresses of what is done with assessments; their page is that of their result, in fits.reports."""

from django.urls import path

from fits.assessments import views

app_name = "assessments"
urlpatterns = [
    path("releases/<int:pk>/assess", views.new_assessment, name="new"),
    path("releases/<int:pk>/assess/coordinates", views.coordinates, name="coordinates"),
    path("assessments/<int:pk>/progress", views.progress, name="progress"),
    path("assessments/<int:pk>/cancel", views.cancel, name="cancel"),
]
