"""Addresses of collaborations and their people."""

from django.urls import path

from core.people import views

app_name = "people"
urlpatterns = [
    path("collaborations/new", views.new_collaboration, name="new_collaboration"),
    path("collaborations/<int:pk>/edit", views.edit_collaboration, name="edit_collaboration"),
    path("collaborations/<int:pk>/people", views.people, name="people"),
    path("collaborations/<int:pk>/people/<int:membership_pk>/role", views.change_role, name="change_role"),
    path("collaborations/<int:pk>/people/<int:membership_pk>/remove", views.remove_member, name="remove"),
]
