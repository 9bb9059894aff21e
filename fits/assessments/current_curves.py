"""The curves that stand for their theories: the newest submitted version of each."""

from datetime import datetime

from core.theories.models import Curve


def current_curves(measurement: int, *, until: datetime | None = None) -> list[Curve]:
    """Those for a measurement, at all desks, by the names of their theories; `until`: as they stood then. One query."""
    curves = Curve.objects.filter(measurement=measurement, state=Curve.State.SUBMITTED)
    if until is not None:
        curves = curves.filter(submitted_at__lte=until)
    newest: dict[int, Curve] = {}
    for curve in curves.select_related("theory__desk").defer("table").order_by("theory__name", "-version"):
        newest.setdefault(curve.theory_id, curve)
    return list(newest.values())
