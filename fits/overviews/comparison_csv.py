"""The comparison as a table for other programmes."""

from fits.overviews.comparison import Comparison, MatrixCell, MatrixRow
from fits.reports.exports import csv_text
from fits.reports.figures.figure import Cell

OF_THEORY = (
    "theory",
    "level",
    "measurements judged",
    "joint verdict",
    "settled",
    "joint p-value",
    "joint entry level",
)
OF_MEASUREMENT = (
    "release",
    "assessment",
    "verdict",
    "rank",
    "judged together",
    "distance",
    "radius at 95 %",
    "entry level",
    "p-value",
)


def comparison_csv(comparison: Comparison) -> str:
    """One row a theory, in the order and with the measurements that were chosen."""
    columns = [f"{column.name}: {name}" for column in comparison.columns for name in OF_MEASUREMENT]
    level = comparison.choice.level_number
    return csv_text((*OF_THEORY, *columns), [_row(row, level, comparison) for row in comparison.rows])


def _row(row: MatrixRow, level: float, comparison: Comparison) -> list[Cell]:
    cells = [
        value
        for column, cell in zip(comparison.columns, row.cells, strict=True)
        for value in (column.release.number, *_cell(cell))
    ]
    joint = row.joint
    if joint is None:
        return [row.name, level, 0, "not judged", None, None, None, *cells]
    return [
        row.name,
        level,
        joint.measurements,
        "inside" if joint.is_inside else "outside",
        "yes" if joint.is_settled else "no",
        joint.p_value,
        joint.entry_level,
        *cells,
    ]


def _cell(cell: MatrixCell) -> tuple[Cell, ...]:
    standing = cell.standing
    if standing is None:
        return (None, cell.word, *[None] * 6)
    return (
        standing.assessment,
        cell.word,
        standing.rank,
        standing.of,
        standing.distance,
        standing.radius,
        standing.entry_level,
        standing.p_value,
    )
