"""Addresses of measurements and releases."""

from django.urls import path

from core.measurements import seal_views, views

app_name = "measurements"
urlpatterns = [
    path("collaborations/<int:pk>/measurements/new", views.new_measurement, name="new_measurement"),
    path("measurements/<int:pk>/edit", views.edit_measurement, name="edit_measurement"),
    path("measurements/<int:pk>/seal", seal_views.seal, name="seal"),
    path("measurements/<int:pk>/open", seal_views.open_, name="open"),
    path("measurements/<int:pk>/look", seal_views.look, name="look"),
    path("measurements/<int:pk>/releases/new", views.upload, name="upload"),
    path("releases/<int:pk>/", views.release, name="release"),
    path("releases/<int:pk>/publish", views.publish, name="publish"),
    path("releases/<int:pk>/discard", views.discard, name="discard"),
    path("releases/<int:pk>/withdraw", seal_views.withdraw, name="withdraw"),
    path("releases/<int:pk>/table.csv", views.download, name="download"),
]
