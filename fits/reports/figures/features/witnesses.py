"""The nearest curves that do with fewer peaks: the last number that is ruled out, and the first that is not."""

from collections.abc import Sequence

from fits.reports import numbers
from fits.reports.features.document import Features, Kind, Standing, Step
from fits.reports.figures import palette
from fits.reports.figures.features.over_data import data_and_fit, x_axis
from fits.reports.figures.figure import Axis, Cell, Dash, Figure, Layer, Line, Panel, Table, values
from fits.reports.snapshot import Snapshot


def witnesses(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """Drawn over data and fit, at the chosen level."""
    features = Features.of(snapshot)
    steps = features.steps(Kind.PEAK) if features else ()
    if features is None or not any(step.witness for step in steps):
        return None
    layers = data_and_fit(snapshot)
    drawn: dict[int, Step] = {}
    for key in features.levels:
        for step, is_ruled_out in _told(steps, features.radius(key)):
            if step.witness is not None and step.upper != 0.0:
                drawn[step.at_most] = step
                layers.append(_line(step, step.witness, key, is_ruled_out=is_ruled_out))
    rows: list[tuple[Cell, ...]] = []
    for step in steps:
        if step.witness is not None:
            pairs = zip(values(step.witness["x"]), values(step.witness["y"]), strict=True)
            rows += [(step.at_most, *pair) for pair in pairs]
    return Figure(
        name="witnesses",
        title="The nearest curves with fewer peaks",
        caption=(
            "Dashed: the nearest curve found with the largest number of peaks that the chosen level rules out; it "
            "shows what would have to give. Solid: the nearest one found with one peak more, which is not ruled out; "
            "where it is the fit itself, nothing more is drawn."
        ),
        x=x_axis(snapshot),
        panels=(Panel(Axis(snapshot.y_label)),),
        layers=tuple(layers),
        table=Table(("at most so many peaks", snapshot.x_label, snapshot.y_label), tuple(rows)),
        level=level,
        has_key=True,
        height=3.8,
    )


def _told(steps: Sequence[Step], radius: float) -> list[tuple[Step, bool]]:
    """The last step that is ruled out and the first that is not, each with whether it is."""
    ruled_out = [step for step in steps if step.standing(radius) is Standing.RULED_OUT]
    rest = [step for step in steps if step.standing(radius) is not Standing.RULED_OUT]
    return [*((step, True) for step in ruled_out[-1:]), *((step, False) for step in rest[:1])]


def _line(step: Step, witness: object, level: str, *, is_ruled_out: bool) -> Layer:
    assert isinstance(witness, dict)
    assert step.upper is not None
    number = f"at most {step.at_most} peak{'' if step.at_most == 1 else 's'}" if step.at_most else "no peak"
    return Line(
        label=f"{number}, {numbers.significant(step.upper)} from the fit",
        colour=palette.OUTSIDE if is_ruled_out else palette.INSIDE,
        level=level,
        x=values(witness["x"]),
        y=values(witness["y"]),
        dash=Dash.DASHED if is_ruled_out else Dash.SOLID,
        thickness=2.2,
    )
