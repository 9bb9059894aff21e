"""Contour lines of a map of prices: where a peak can be, and how high, at one level."""

from dataclasses import dataclass

import contourpy
import numpy as np

from fits.reports.figures.figure import Values
from fits.reports.snapshot import Document

# A rim just outside the map, dearer than any radius, closes the lines at its edges.
RIM = 1e-6


@dataclass(frozen=True)
class Outline:
    """A line through locations and heights."""

    x: Values
    height: Values


def outlines(found: Document, radius: float) -> tuple[Outline, ...]:
    """Lines at which the price equals the radius; broken where the map has no number."""
    x, height = (np.asarray(found[key], dtype=np.float64) for key in ("x", "height"))
    price = np.array(
        [[np.nan if value is None else value for value in row] for row in found["price"]], dtype=np.float64
    )
    if radius <= 0.0 or min(price.shape) < 2 or x[-1] <= x[0] or height[-1] <= height[0]:
        return ()
    dear = 2.0 * max(radius, float(np.nanmax(price, initial=radius)))
    price = np.ma.masked_invalid(np.pad(price, 1, constant_values=dear))
    lines = contourpy.contour_generator(_rimmed(x), _rimmed(height), price).lines(radius)
    return tuple(
        Outline(tuple(line[:, 0].tolist()), tuple(line[:, 1].tolist()))
        for line in (np.asarray(line) for line in lines)
    )


def _rimmed(
    values: np.ndarray[tuple[int], np.dtype[np.float64]],
) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    rim = RIM * (values[-1] - values[0])
    return np.concatenate(([values[0] - rim], values, [values[-1] + rim]))
