from django.apps import AppConfig


class FitsConfig(AppConfig):
    name = "fits"
    label = "fits"
