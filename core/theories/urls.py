"""Addresses of theories and curves."""

from django.urls import path

from core.theories import views

app_name = "theories"
urlpatterns = [
    path("collaborations/<int:pk>/theories/new", views.new_theory, name="new_theory"),
    path("theories/<int:pk>/edit", views.edit_theory, name="edit_theory"),
    path("theories/<int:pk>/curves/new", views.new_curve, name="new_curve"),
    path("curves/<int:pk>/", views.curve, name="curve"),
    path("curves/<int:pk>/submit", views.submit, name="submit"),
    path("curves/<int:pk>/discard", views.discard, name="discard"),
    path("curves/<int:pk>/table.csv", views.download, name="download"),
]
