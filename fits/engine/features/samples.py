"""Curves drawn uniformly from the ball: to look at, never to take extremes from.

β̂ + s u^{1/J} g/‖g‖ with u uniform and g standard normal. In J dimensions nearly all of them lie near the surface, in
directions that move no single feature far: the exact extremes are out of their reach.
"""

import numpy as np

from fits.engine.data import FloatArray


def samples(centre: FloatArray, radius: float, *, count: int, rng: np.random.Generator) -> FloatArray:
    """Coordinates of `count` curves, shape (count, J)."""
    directions = rng.standard_normal((count, centre.size))
    directions /= np.linalg.norm(directions, axis=1, keepdims=True)
    return np.asarray(centre + radius * rng.random((count, 1)) ** (1.0 / centre.size) * directions)
