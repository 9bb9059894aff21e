"""Addresses of comments and of the log."""

from django.urls import path

from fits.talk.views import comments, log

app_name = "talk"
urlpatterns = [
    path("theories/<int:pk>/comments", comments.comment_theory, name="comment_theory"),
    path("assessments/<int:pk>/comments", comments.comment_assessment, name="comment_assessment"),
    path("comments/<int:pk>/remove", comments.remove, name="remove"),
    path("collaborations/<int:pk>/log", log.log, name="log"),
    path("collaborations/<int:pk>/log.csv", log.log_csv, name="log_csv"),
]
