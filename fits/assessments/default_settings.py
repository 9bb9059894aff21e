"""The settings of an assessment for which nobody has chosen any."""

from dataclasses import asdict
from typing import Any

from fits.engine.settings import Settings

DEFAULT_SEED = 1


def default_settings() -> dict[str, Any]:
    """The engine's defaults as an assessment's row keeps them."""
    settings = Settings()
    return asdict(settings) | {"levels": list(settings.levels), "shrinkage": settings.shrinkage.value}
