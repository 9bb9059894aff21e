"""Colours. Those of the curves stay apart for colour-blind readers (after M. Okabe and K. Ito's set) and in grey.

Colour says which curve; solid with circles or dashed with crosses says inside or outside.
"""

CURVES = (
    "#0072b2",
    "#d55e00",
    "#007a5a",
    "#b0568c",
    "#c98a00",
    "#3f9bd1",
    "#5a3d99",
    "#7a5c3e",
)
INK = "#1b1f24"
DATA = "#4a5058"
ERROR = "#9aa1a9"
BAND = "#7d93a8"
PEAK = "#0b5563"
DIP = "#8a4b14"
INSIDE = "#175c8f"
OUTSIDE = "#a8450b"
GUIDE = "#8a9199"
GRID = "#e3e6e9"


def curve_colour(index: int) -> str:
    """The colour of the curve at this place in the ranking, from 0."""
    return CURVES[index % len(CURVES)]
