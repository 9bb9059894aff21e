"""The NIST StRD set Gauss1, kept as NIST publishes it.

Source: NIST/ITL Statistical Reference Datasets, nonlinear regression, Gauss1.dat (B. Rust, NIST, 1996): 250
generated observations with normal noise of variance 6.25, and certified parameters of the model
b1 exp(−b2 x) + b3 exp(−(x−b4)²/b5²) + b6 exp(−(x−b7)²/b8²).
"""

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from fits.engine.data import FloatArray

FILE = Path(__file__).parent / "data" / "Gauss1.dat"
# "normally distributed zero-mean noise with variance = 6.25", by the file's own description.
STANDARD_ERROR = 2.5
FIRST_PARAMETER_LINE, FIRST_DATA_LINE = 41, 61


@dataclass(frozen=True, eq=False)
class Gauss1:
    """Data and certified parameters."""

    x: FloatArray
    y: FloatArray
    certified: FloatArray

    def curve(self, *, second_height: float = 1.0) -> FloatArray:
        """The certified curve at the data, its second Gaussian's height times a factor."""
        b1, b2, b3, b4, b5, b6, b7, b8 = self.certified
        first = b3 * np.exp(-((self.x - b4) ** 2) / b5**2)
        second = second_height * b6 * np.exp(-((self.x - b7) ** 2) / b8**2)
        return np.asarray(b1 * np.exp(-b2 * self.x) + first + second)


def gauss1() -> Gauss1:
    """Read the file."""
    lines = FILE.read_text().splitlines()
    parameters = [line.split() for line in lines[FIRST_PARAMETER_LINE - 1 : FIRST_PARAMETER_LINE + 7]]
    data = np.array([line.split() for line in lines[FIRST_DATA_LINE - 1 :] if line.strip()], dtype=float)
    return Gauss1(x=data[:, 1], y=data[:, 0], certified=np.array([float(words[4]) for words in parameters]))
