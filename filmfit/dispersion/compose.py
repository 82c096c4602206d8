"""Laws added up to one dielectric function: epsilon = (sum of index laws)^2 + sum of epsilon laws.

Knows names and order of all parameters of a sum; does not know their values.
"""

from collections.abc import Sequence

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter
from filmfit.dispersion.table import LAWS
from filmfit.errors import MaterialError, nearest


class Dispersion:
    """A sum of laws.

    Args:
        laws: names of the table; a second one of a kind is written with its number, "tauc-lorentz-2".
        where: what to name in an error.

    Raises:
        MaterialError: a law that is not in the table.
    """

    def __init__(self, laws: Sequence[str], where: str = "laws") -> None:
        self.laws = tuple(laws)
        self._terms: list[tuple[Law, slice]] = []
        names: list[str] = []
        parameters: list[Parameter] = []
        for given in self.laws:
            law = _law(given, where)
            self._terms.append((law, slice(len(names), len(names) + len(law.parameters))))
            names += [f"{given}.{parameter.name}" for parameter in law.parameters]
            parameters += law.parameters
        self.names = tuple(names)
        self.parameters = tuple(parameters)

    def evaluate(self, energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Return the dielectric function and its derivatives.

        Args:
            energy_eV: (E,).
            values: all parameters in the order of `names`, (P,) or (P, ..., 1).

        Returns:
            epsilon (..., E) and derivatives (P, ..., E), complex.

        Reference: the laws' own; tests/identities/test_laws.py.
        """
        found = [(law, part, *law.evaluate(energy_eV, values[part])) for law, part in self._terms]
        index = sum(value for law, _, value, _ in found if law.contributes == "index")
        epsilon = index**2 + sum(value for law, _, value, _ in found if law.contributes == "epsilon")
        epsilon = np.asarray(epsilon, complex)
        gradient = np.empty((len(self.names), *epsilon.shape), complex)
        for law, part, _, slopes in found:
            gradient[part] = slopes if law.contributes == "epsilon" else 2.0 * index * slopes
        return epsilon, gradient


def index_from_epsilon(epsilon: ComplexArray) -> ComplexArray:
    """Return n + ik of a dielectric function, k >= 0."""
    index = np.sqrt(epsilon)
    upright: ComplexArray = np.where(index.imag < 0, -index, index)
    return upright


def _law(given: str, where: str) -> Law:
    """Return the law of a name, its number taken off."""
    stem, _, number = given.rpartition("-")
    name = stem if number.isdigit() and stem in LAWS else given
    if name not in LAWS:
        raise MaterialError(where, f"unknown law '{given}'", ", ".join(sorted(LAWS)), nearest(given, LAWS))
    return LAWS[name]
