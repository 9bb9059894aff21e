"""Addresses of results, reports and share links."""

from django.urls import path

from fits.reports.views import assessment, features, report, shared
from fits.reports.views.explained import explained

app_name = "reports"
urlpatterns = [
    path("explained/", explained, name="explained"),
    path("assessments/<int:pk>/", assessment.assessment, name="assessment"),
    path("assessments/<int:pk>/charts/<slug:name>.<str:form>", assessment.chart, name="assessment_chart"),
    path("assessments/<int:pk>/result.json", assessment.result_json, name="assessment_json"),
    path("assessments/<int:pk>/ranking.csv", assessment.ranking_csv, name="assessment_csv"),
    path("assessments/<int:pk>/features", features.ask, name="ask_features"),
    path("assessments/<int:pk>/features/progress", features.progress, name="features_progress"),
    path("assessments/<int:pk>/features/cancel", features.cancel, name="cancel_features"),
    path("assessments/<int:pk>/features/<str:name>", assessment.features, name="assessment_features"),
    path("assessments/<int:pk>/report", assessment.new_report, name="new"),
    path("reports/<int:pk>/", report.report, name="report"),
    path("reports/<int:pk>/charts/<slug:name>.<str:form>", report.chart, name="report_chart"),
    path("reports/<int:pk>/result.json", report.result_json, name="report_json"),
    path("reports/<int:pk>/ranking.csv", report.ranking_csv, name="report_csv"),
    path("reports/<int:pk>/features/<str:name>", report.features, name="report_features"),
    path("reports/<int:pk>/links", report.new_link, name="new_link"),
    path("links/<int:pk>/revoke", report.revoke, name="revoke"),
    path("r/<str:token>/", shared.shared, name="shared"),
    path("r/<str:token>/charts/<slug:name>.<str:form>", shared.chart, name="shared_chart"),
    path("r/<str:token>/result.json", shared.result_json, name="shared_json"),
    path("r/<str:token>/ranking.csv", shared.ranking_csv, name="shared_csv"),
    path("r/<str:token>/features/<str:name>", shared.features, name="shared_features"),
]
