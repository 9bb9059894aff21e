from django.apps import AppConfig


class ReportsConfig(AppConfig):
    name = "fits.reports"
    label = "reports"
