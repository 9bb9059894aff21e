"""The order of the curves, and which neighbours in it the data do not settle."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from fits.engine.data import FloatArray

# Normal quantile of 95 %, one-sided.
ONE_SIDED_95 = 1.645


@dataclass(frozen=True)
class Neighbours:
    """Two curves next to each other in rank, by index, and whether the data settle their order."""

    nearer: int
    farther: int
    settled: bool


@dataclass(frozen=True)
class Ranking:
    """order: indices of the curves, nearest first; neighbours: each pair that stands together in it."""

    order: tuple[int, ...]
    neighbours: tuple[Neighbours, ...]

    def is_settled(self, curve: int) -> bool:
        """Whether a curve's order against both neighbours is settled."""
        return all(pair.settled for pair in self.neighbours if curve in (pair.nearer, pair.farther))


def ranking_of(
    curves: Sequence[FloatArray], distances: Sequence[float], factors: FloatArray, variance: float
) -> Ranking:
    """Rank by distance; a pair is unsettled when |d_A² − d_B²| < 1.645 · 2 sqrt(v Σ λ_j² (β_Aj − β_Bj)²)."""
    order = tuple(int(i) for i in np.argsort(np.asarray(distances), kind="stable"))
    neighbours = []
    for nearer, farther in pairwise(order):
        weighted = factors * (curves[nearer] - curves[farther])
        noise = 2.0 * np.sqrt(variance * float(weighted @ weighted))
        difference = distances[farther] ** 2 - distances[nearer] ** 2
        # Two equal curves have no noise and no difference: nothing settles their order.
        neighbours.append(
            Neighbours(nearer, farther, bool(difference > 0.0 and difference >= ONE_SIDED_95 * noise))
        )
    return Ranking(order, tuple(neighbours))


def positions(differences: FloatArray) -> FloatArray:
    """Places of the curves in a plane, shape (curves, 2): exact distances, angles only a guide.

    differences  β_m − β̂, shape (curves, J). The angle is that of the projection on the first two principal
    directions of the differences; signs are fixed so that the same input gives the same picture.
    """
    _, _, directions = np.linalg.svd(differences, full_matrices=False)
    plane = np.zeros((2, differences.shape[1]))
    plane[: min(2, len(directions))] = directions[:2]
    largest = np.argmax(np.abs(plane), axis=1)
    signs = np.sign(plane[[0, 1], largest])
    projected = differences @ (plane * np.where(signs == 0.0, 1.0, signs)[:, None]).T
    lengths = np.hypot(projected[:, 0], projected[:, 1])
    distances = np.linalg.norm(differences, axis=1)
    flat = lengths == 0.0
    projected[flat] = (1.0, 0.0)
    return np.asarray(projected * (distances / np.where(flat, 1.0, lengths))[:, None])
