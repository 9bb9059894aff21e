from django.apps import AppConfig


class OverviewsConfig(AppConfig):
    name = "fits.overviews"
    label = "overviews"
