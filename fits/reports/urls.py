"""Addresses of results, reports and share links."""

from django.urls import path

from fits.reports.views import assessment, draft, features, parts, printed, report, shared
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
    path("assessments/<int:pk>/report", draft.new_report, name="new"),
    path("collaborations/<int:pk>/reports/", report.reports, name="reports"),
    path("collaborations/<int:pk>/reports/new", draft.new_draft, name="new_draft"),
    # A draft.
    path("reports/<int:pk>/words", draft.words, name="words"),
    path("reports/<int:pk>/preview", draft.preview, name="preview"),
    path("reports/<int:pk>/parts", parts.add, name="add_part"),
    path("reports/<int:pk>/freeze", draft.freeze, name="freeze"),
    path("reports/<int:pk>/discard", draft.discard, name="discard"),
    path("report-parts/<int:pk>/", parts.part, name="part"),
    path("report-parts/<int:pk>/move", parts.move, name="move_part"),
    path("report-parts/<int:pk>/remove", parts.remove, name="remove_part"),
    path("report-parts/<int:pk>/renew", parts.renew, name="renew_part"),
    # A report; "?part=2" names one of its pages, also for the files.
    path("reports/<int:pk>/", report.report, name="report"),
    path("reports/<int:pk>/charts/<slug:name>.<str:form>", report.chart, name="report_chart"),
    path("reports/<int:pk>/result.json", report.result_json, name="report_json"),
    path("reports/<int:pk>/ranking.csv", report.ranking_csv, name="report_csv"),
    path("reports/<int:pk>/features/<str:name>", report.features, name="report_features"),
    path("reports/<int:pk>/print/<slug:paper>", printed.printed, name="print"),
    path("reports/<int:pk>/print/<slug:paper>/progress", printed.progress, name="print_progress"),
    path("reports/<int:pk>/later", draft.later, name="later"),
    path("reports/<int:pk>/links", report.new_link, name="new_link"),
    path("links/<int:pk>/revoke", report.revoke, name="revoke"),
    path("r/<str:token>/", shared.shared, name="shared"),
    path("r/<str:token>/charts/<slug:name>.<str:form>", shared.chart, name="shared_chart"),
    path("r/<str:token>/result.json", shared.result_json, name="shared_json"),
    path("r/<str:token>/ranking.csv", shared.ranking_csv, name="shared_csv"),
    path("r/<str:token>/features/<str:name>", shared.features, name="shared_features"),
    path("r/<str:token>/print/<slug:paper>", shared.printed, name="shared_print"),
    path("r/<str:token>/print/<slug:paper>/progress", shared.print_progress, name="shared_print_progress"),
]
