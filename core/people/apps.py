from django.apps import AppConfig


class PeopleConfig(AppConfig):
    name = "core.people"
    label = "people"
