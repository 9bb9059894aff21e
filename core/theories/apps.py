from django.apps import AppConfig


class TheoriesConfig(AppConfig):
    name = "core.theories"
    label = "theories"
