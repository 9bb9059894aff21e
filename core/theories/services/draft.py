"""Read an upload into a draft curve."""

import hashlib

import numpy as np

from core.errors import UserError
from core.measurements.models import Measurement
from core.measurements.reading.apart import read_curve_apart
from core.measurements.reading.names import safe_name
from core.measurements.reading.stored import to_bytes
from core.people.models import User
from core.theories.models import Curve, Theory
from core.theories.rules import refuse_closed, refuse_short


def draft_curve(
    *, user: User, theory: Theory, measurement: Measurement, content: bytes, file_name: str, note: str = ""
) -> Curve:
    """A draft to look at before it counts. A UserError for what cannot be read; nothing is kept then."""
    if measurement.collaboration_id != theory.collaboration_id:
        raise UserError(
            "wrong-measurement", f"{measurement} belongs to another collaboration", "Choose one of this one"
        )
    refuse_closed(measurement)
    table = read_curve_apart(content, file_name, theory.name)
    refuse_short(measurement, float(table.x[0]), float(table.x[-1]))
    return Curve.objects.create(
        theory=theory,
        measurement=measurement,
        note=note,
        table=to_bytes(np.column_stack([table.x, table.y])),
        file_name=safe_name(file_name),
        file_sha256=hashlib.sha256(content).hexdigest(),
        points=table.x.size,
        x_min=float(table.x[0]),
        x_max=float(table.x[-1]),
        submitted_by=user,
    )
