"""What a dispersion law is: a name, its parameters with units and bounds, and an array function with derivatives.

Knows the form that all laws share; does not know any law.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Evaluate = Callable[[FloatArray, FloatArray], tuple[ComplexArray, ComplexArray]]


@dataclass(frozen=True)
class Parameter:
    """A parameter of a law: its name with unit, hard physical bounds, what it means."""

    name: str
    low: float
    high: float
    meaning: str


@dataclass(frozen=True)
class Law:
    """A dispersion law.

    Args:
        name: as run files and materials spell it.
        contributes: "epsilon" where it adds to the dielectric function, "index" where it adds to n + ik.
        parameters: in the order of the values.
        evaluate: (energy_eV (E,), values (P,) or (P, ..., 1)) -> contribution (..., E) and derivatives (P, ..., E).
        causal: True where real and imaginary part are each other's Kramers-Kronig partners.
        reference: where it was published.
    """

    name: str
    contributes: Literal["epsilon", "index"]
    parameters: tuple[Parameter, ...]
    evaluate: Evaluate
    causal: bool
    reference: str


def stacked(shape: tuple[int, ...], *rows: ComplexArray | FloatArray | float) -> ComplexArray:
    """Return derivative rows broadcast to one array (P, *shape)."""
    gradient = np.empty((len(rows), *shape), complex)
    for number, row in enumerate(rows):
        gradient[number] = row
    return gradient
