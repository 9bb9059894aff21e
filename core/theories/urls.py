"""Addresses of theories and curves."""

from django.urls import path

from core.theories import batch_views, register_views, views

app_name = "theories"
urlpatterns = [
    path("collaborations/<int:pk>/theories/new", views.new_theory, name="new_theory"),
    path("theories/<int:pk>/edit", views.edit_theory, name="edit_theory"),
    path("theories/<int:pk>/curves/new", views.new_curve, name="new_curve"),
    path("measurements/<int:pk>/batches/new", batch_views.new_batch, name="new_batch"),
    path("batches/<int:pk>/", batch_views.batch, name="batch"),
    path("batches/<int:pk>/submit", batch_views.submit_batch, name="submit_batch"),
    path("batches/<int:pk>/discard", batch_views.discard_batch, name="discard_batch"),
    path("measurements/<int:pk>/register", register_views.register, name="register"),
    path("measurements/<int:pk>/register.csv", register_views.register_csv, name="register_csv"),
    path("curves/<int:pk>/", views.curve, name="curve"),
    path("curves/<int:pk>/submit", views.submit, name="submit"),
    path("curves/<int:pk>/discard", views.discard, name="discard"),
    path("curves/<int:pk>/table.csv", views.download, name="download"),
]
