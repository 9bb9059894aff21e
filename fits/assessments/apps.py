from django.apps import AppConfig


class AssessmentsConfig(AppConfig):
    name = "fits.assessments"
    label = "assessments"
