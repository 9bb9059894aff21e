"""Addresses of collaborations and their people."""

from django.urls import path

from core.people.views import collaboration, invitations, people
from core.people.views.invitation import invitation
from core.people.views.permissions import permissions
from core.people.views.preferences import preferences

app_name = "people"
urlpatterns = [
    path("collaborations/new", collaboration.new_collaboration, name="new_collaboration"),
    path("collaborations/<int:pk>/edit", collaboration.edit_collaboration, name="edit_collaboration"),
    path("collaborations/<int:pk>/people", people.people, name="people"),
    path("collaborations/<int:pk>/people/<int:membership_pk>/role", people.change_role, name="change_role"),
    path("collaborations/<int:pk>/people/<int:membership_pk>/remove", people.remove_member, name="remove"),
    path("collaborations/<int:pk>/people/<int:membership_pk>/hand-over", people.hand_over, name="hand_over"),
    path("collaborations/<int:pk>/leave", people.leave, name="leave"),
    path("collaborations/<int:pk>/invitations/link", invitations.new_invitation, name="new_invitation"),
    path("collaborations/<int:pk>/invitations/mail", invitations.mail_invitation, name="mail_invitation"),
    path("invitations/<int:pk>/revoke", invitations.revoke_invitation, name="revoke_invitation"),
    path("i/<str:token>/", invitation, name="invitation"),
    path("permissions", permissions, name="permissions"),
    path("preferences", preferences, name="preferences"),
]
