"""Addresses of the pages that are read."""

from django.urls import path

from fits.overviews import comparison_views, desk_views, views

app_name = "overviews"
urlpatterns = [
    path("", views.home, name="home"),
    path("collaborations/<int:pk>/", views.collaboration, name="collaboration"),
    path("collaborations/<int:pk>/comparison", comparison_views.comparison, name="comparison"),
    path("collaborations/<int:pk>/comparison.csv", comparison_views.comparison_table, name="comparison_csv"),
    path("collaborations/<int:pk>/comparison/pair", comparison_views.separation, name="separation"),
    path("collaborations/<int:pk>/desks", desk_views.desks, name="desks"),
    path("collaborations/<int:pk>/desks.csv", desk_views.desks_table, name="desks_csv"),
    path("measurements/<int:pk>/", views.measurement, name="measurement"),
    path("measurements/<int:pk>/history/<slug:name>.<str:form>", views.history_chart, name="history_chart"),
    path("measurements/<int:pk>/pairs", comparison_views.pairs, name="pairs"),
    path("theories/<int:pk>/", views.theory, name="theory"),
]
