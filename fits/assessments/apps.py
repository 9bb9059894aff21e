from django.apps import AppConfig


class AssessmentsConfig(AppConfig):
    name = "fits.assessments"
    label = "assessments"

    def ready(self) -> None:
        """Listen to what happens below."""
        from fits.assessments import receivers  # noqa: F401
