"""A curve's row turned back into its table."""

from core.measurements.reading.stored import from_bytes
from core.theories.models import Curve
from fits.engine.data import CurveTable, validated_curve


def table_of(curve: Curve) -> CurveTable:
    """The curve as it was uploaded, sorted by x."""
    table = from_bytes(curve.table)
    return validated_curve(str(curve), table[:, 0], table[:, 1])
