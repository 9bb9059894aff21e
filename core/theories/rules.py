"""When a curve is taken for a measurement, and when a theory's words stand still. Each rule refuses with its reason."""

from django.utils import timezone

from core.errors import UserError
from core.measurements.models import Measurement
from core.theories.doubts import ROUNDING, stretch
from core.theories.models import Curve, Theory


def refuse_closed(measurement: Measurement) -> None:
    """Refuse what comes between the deadline and the opening of a sealed measurement."""
    if measurement.takes_curves:
        return
    assert measurement.curves_until is not None
    reason = f"curves for {measurement} were taken until {measurement.curves_until:%d %B %Y, %H:%M} UTC"
    raise UserError("curves-closed", reason, "Curves are taken again once the measurement is open")


def refuse_short(measurement: Measurement, x_min: float, x_max: float) -> None:
    """Refuse a curve that does not reach over the stretch that was announced, as long as the data are hidden."""
    if not measurement.is_sealed:
        return
    low, high = measurement.announced_x_min, measurement.announced_x_max
    slack = ROUNDING * (high - low) if low is not None and high is not None else 0.0
    missing = []
    if low is not None and x_min > low + slack:
        missing.append(stretch(low, x_min) if high is None or x_min <= high else _announced(low, high))
    if high is not None and x_max < high - slack:
        missing.append(stretch(x_max, high) if low is None or x_max >= low else _announced(low, high))
    if missing:
        raise UserError(
            "announced-range-not-covered",
            f"the curve covers {stretch(x_min, x_max)}, and {_announced(low, high)} is announced: "
            f"missing stretch {' and '.join(dict.fromkeys(missing))}",
            f"Give the curve over all of it; check the unit of {measurement.x_name}",
        )


def refuse_registered(theory: Theory) -> None:
    """Refuse other words for a theory that has a curve in the register of a sealed measurement past its deadline."""
    passed = Measurement.objects.filter(
        curves__theory=theory, curves__state=Curve.State.SUBMITTED, sealed_at__isnull=False
    )
    for measurement in passed.filter(curves_until__lte=timezone.now()).distinct():
        if measurement.is_sealed:
            raise UserError(
                "registered",
                f"a curve of this theory is registered for {measurement}, whose deadline has passed",
                "Its words can be changed again once that measurement is open",
            )


def _announced(low: float | None, high: float | None) -> str:
    if low is None:
        return f"all up to {high:.6g}"
    return f"all from {low:.6g}" if high is None else stretch(low, high)
