from django.apps import AppConfig


class TalkConfig(AppConfig):
    name = "fits.talk"
    label = "talk"
