from django.apps import AppConfig


class MeasurementsConfig(AppConfig):
    name = "core.measurements"
    label = "measurements"
