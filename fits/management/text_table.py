"""Columns for a terminal."""


def aligned(rows: list[list[str]]) -> list[str]:
    """Rows of equal length as lines with their columns under each other."""
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in rows
    ]
