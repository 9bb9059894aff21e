"""Charts that show whether the fit can be trusted: shrinkage factors, estimated risk, leftover quantiles."""

from fits.reports.figures import palette
from fits.reports.figures.figure import (
    NARROW,
    Axis,
    Dash,
    Figure,
    Line,
    Marker,
    Panel,
    Points,
    Table,
    log_axis,
    values,
)
from fits.reports.snapshot import Snapshot


def shrinkage(snapshot: Snapshot, *, level: str, curve: str) -> Figure:
    """The factors λ_j by which the coordinates of the data are multiplied."""
    factors = values(snapshot.detail["coordinates"]["shrinkage"])
    z = values(snapshot.detail["coordinates"]["z"])
    index = tuple(float(j) for j in range(len(factors)))
    return Figure(
        name="shrinkage",
        title="Shrinkage factors",
        caption=(
            "How much of each coordinate of the data the fit keeps, from broad features (left) to fine ones: "
            "1 keeps it whole, 0 drops it. Their sum is the effective number of parameters."
        ),
        x=Axis("coordinate j"),
        panels=(Panel(Axis("factor λ", range=(-0.05, 1.05))),),
        layers=(
            Line(
                label="shrinkage factor",
                colour=palette.CURVES[0],
                x=index,
                y=factors,
                marker=Marker.DOT,
                thickness=1.2,
            ),
        ),
        table=Table(
            ("j", "coordinate of the data Z", "shrinkage factor"),
            tuple((j, *row) for j, row in enumerate(zip(z, factors, strict=True))),
        ),
        level=level,
        width=NARROW,
        height=2.8,
    )


def risk(snapshot: Snapshot, *, level: str, curve: str) -> Figure:
    """Estimated risk of keeping the first k coordinates whole."""
    kept = values(snapshot.detail["risk_curve"]["functions"])
    risks = values(snapshot.detail["risk_curve"]["risk"])
    chosen = float(snapshot.result["fit"]["risk"])
    can_be_log = all(value > 0.0 for value in (*risks, chosen))
    return Figure(
        name="risk",
        title="Estimated risk",
        caption=(
            "Estimated mean squared distance of the fit from the truth when the first k coordinates are kept and "
            "the others dropped; the dotted line is the risk of the fit that was used. A risk still falling at the "
            "right edge means that the resolution is too coarse for these data."
        ),
        x=Axis("coordinates kept, k"),
        panels=(Panel(log_axis("estimated risk", risks) if can_be_log else Axis("estimated risk")),),
        layers=(
            Line(
                label="risk of keeping k",
                colour=palette.CURVES[0],
                x=kept,
                y=risks,
                marker=Marker.DOT,
                thickness=1.2,
            ),
            Line(
                label="risk of the fit used",
                colour=palette.INK,
                x=(kept[0], kept[-1]),
                y=(chosen, chosen),
                dash=Dash.DOTTED,
            ),
        ),
        table=Table(("coordinates kept", "estimated risk"), tuple(zip(kept, risks, strict=True))),
        level=level,
        width=NARROW,
        height=2.8,
    )


def quantiles(snapshot: Snapshot, *, level: str, curve: str) -> Figure | None:
    """Leftover against normal quantiles; none where nothing is left over."""
    found = snapshot.detail["leftover_quantiles"]
    if found is None:
        return None
    expected, observed = values(found["expected"]), values(found["observed"])
    ends = (min(*expected, *observed), max(*expected, *observed))
    return Figure(
        name="quantiles",
        title="Quantiles of the leftover",
        caption=(
            "What the judged features leave over, in error bars, sorted, against what normal errors would give. "
            "Points on the line: as stated. Steeper than the line: errors understated, or finer structure; flatter: "
            "errors overstated. Bent ends: outliers."
        ),
        x=Axis("expected of normal errors"),
        panels=(Panel(Axis("found")),),
        layers=(
            Line(label="as stated", colour=palette.GUIDE, x=ends, y=ends, dash=Dash.DOTTED),
            Points(label="leftover", colour=palette.CURVES[0], x=expected, y=observed, size=3.6),
        ),
        table=Table(("expected", "found"), tuple(zip(expected, observed, strict=True))),
        level=level,
        width=NARROW,
        height=3.0,
    )
