"""Changes to measurements and releases, one function each."""

from core.measurements.services.discard import discard_release
from core.measurements.services.draft import draft_release
from core.measurements.services.map_columns import map_columns
from core.measurements.services.measurement import create_measurement, edit_measurement
from core.measurements.services.publish import publish_release

__all__ = [
    "create_measurement",
    "discard_release",
    "draft_release",
    "edit_measurement",
    "map_columns",
    "publish_release",
]
