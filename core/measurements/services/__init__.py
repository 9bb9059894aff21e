"""Changes to measurements and releases, one function each."""

from core.measurements.services.discard import discard_release
from core.measurements.services.draft import draft_release
from core.measurements.services.look import look_early
from core.measurements.services.map_columns import map_columns
from core.measurements.services.measurement import create_measurement, edit_measurement
from core.measurements.services.open import note_openings, open_measurement
from core.measurements.services.publish import publish_release
from core.measurements.services.seal import change_seal, seal_measurement
from core.measurements.services.withdraw import withdraw_release

__all__ = [
    "change_seal",
    "create_measurement",
    "discard_release",
    "draft_release",
    "edit_measurement",
    "look_early",
    "map_columns",
    "note_openings",
    "open_measurement",
    "publish_release",
    "seal_measurement",
    "withdraw_release",
]
