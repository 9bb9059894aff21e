"""Small input files for the commands: an invented spectrum of a made-up lake."""

from pathlib import Path

import numpy as np

X = np.linspace(0.5, 4.5, 40)


def spectrum(x: np.ndarray) -> np.ndarray:
    """Two resonances on a falling background."""
    return np.asarray(np.exp(-(((x - 1.5) / 0.3) ** 2)) + 0.5 * np.exp(-(((x - 3.0) / 0.3) ** 2)) + 0.4 / x)


def write_table(path: Path, header: str, *columns: np.ndarray) -> str:
    """Write comma-separated columns; the path as the command takes it."""
    np.savetxt(path, np.column_stack(columns), delimiter=",", header=header, comments="")
    return str(path)


def write_data(folder: Path) -> str:
    """40 points with errors of 0.1."""
    noise = np.random.default_rng(1).normal(0.0, 0.1, X.size)
    return write_table(folder / "data.csv", "x,y,error", X, spectrum(X) + noise, np.full(X.size, 0.1))


def write_curve(folder: Path, name: str, *, offset: float = 0.0) -> str:
    """The true spectrum plus an offset, on a finer grid."""
    grid = np.linspace(0.4, 4.6, 300)
    return write_table(folder / f"{name}.csv", "x,y", grid, spectrum(grid) + offset)
