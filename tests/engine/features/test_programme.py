import clarabel
import numpy as np
import pytest
import scipy.sparse
from hypothesis import given, settings
from hypothesis import strategies as st

from fits.engine.data import FloatArray
from fits.engine.features.programme import Outcome, Programme


def price_by_cones(equal: FloatArray, b: FloatArray, below: FloatArray, h: FloatArray) -> float:
    """The same programme by Clarabel, a conic interior-point solver (reference library from PyPI)."""
    functions = below.shape[1]
    options = clarabel.DefaultSettings()
    options.verbose = False
    options.tol_gap_abs = options.tol_gap_rel = options.tol_feas = 1e-10
    solver = clarabel.DefaultSolver(
        scipy.sparse.csc_matrix(np.eye(functions)),
        np.zeros(functions),
        scipy.sparse.csc_matrix(np.vstack([equal, below])),
        np.concatenate([b, h]),
        [clarabel.ZeroConeT(b.size), clarabel.NonnegativeConeT(h.size)],
        options,
    )
    return float(np.linalg.norm(solver.solve().x))


@settings(max_examples=100, deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    functions=st.integers(5, 40),
    equalities=st.integers(0, 3),
    inequalities=st.integers(1, 80),
)
def test_prices_are_those_of_a_conic_solver(
    seed: int, functions: int, equalities: int, inequalities: int
) -> None:
    rng = np.random.default_rng(seed)
    equal, below = rng.normal(size=(equalities, functions)), rng.normal(size=(inequalities, functions))
    inside = rng.normal(size=functions)
    b = equal @ inside
    h = below @ inside + rng.exponential(size=inequalities)
    found = Programme(equal, below).solve(b, h)
    assert found.outcome is Outcome.SOLVED
    assert found.price == pytest.approx(price_by_cones(equal, b, below, h), rel=1e-5, abs=1e-5)


def test_a_fit_that_satisfies_the_statement_pays_nothing() -> None:
    found = Programme(np.empty((0, 3)), np.eye(3)).solve(np.empty(0), np.ones(3))
    assert (found.outcome, found.price) == (Outcome.SOLVED, 0.0)


def test_a_contradiction_is_impossible_and_not_a_number() -> None:
    below = np.array([[1.0, 0.0], [-1.0, 0.0]])
    found = Programme(np.empty((0, 2)), below).solve(np.empty(0), np.array([-1.0, -1.0]))
    assert (found.outcome, found.price) == (Outcome.IMPOSSIBLE, np.inf)


def test_an_answer_that_breaks_a_constraint_is_unsolved_and_never_impossible(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    programme = Programme(np.empty((0, 2)), np.array([[1.0, 0.0]]))
    honest = programme._run
    monkeypatch.setattr(programme, "_run", lambda b, h: (honest(b, h)[0], np.zeros(2)))
    found = programme.solve(np.empty(0), np.array([-1.0]))
    assert found.outcome is Outcome.UNSOLVED
    assert np.isnan(found.price)


def test_a_family_of_programmes_gives_the_answers_of_single_ones() -> None:
    rng = np.random.default_rng(1)
    equal, below = rng.normal(size=(1, 10)), rng.normal(size=(30, 10))
    family = Programme(equal, below)
    for scale in (0.5, 1.0, 3.0):
        b, h = np.array([scale]), scale * rng.normal(size=30) + 2.0
        single = Programme(equal, below).solve(b, h)
        assert family.solve(b, h).price == pytest.approx(single.price, rel=1e-6)


def test_the_unit_of_the_curve_does_not_matter() -> None:
    rng = np.random.default_rng(2)
    below, h = rng.normal(size=(30, 10)), rng.normal(size=30)
    small, large = (
        Programme(np.empty((0, 10)), below).solve(np.empty(0), unit * h).price / unit for unit in (1e-6, 1e6)
    )
    assert small == pytest.approx(large, rel=1e-6)
