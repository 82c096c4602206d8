"""Urbach's exponential absorption tail below an edge: k = k0 exp((E - edge) / width).

Knows the tail; does not know the absorption above the edge.
"""

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter, stacked


def urbach(energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return i k of an exponential tail and its derivatives.

    k = k0 exp((E - edge) / width); its absorption coefficient alpha = 4 pi k / lambda is Urbach's exponential times
    E / edge, alpha(edge) = 4 pi k0 edge / hc.

    Args:
        energy_eV: (E,).
        values: k0, edge_eV, width_eV, (3,) or (3, ..., 1).

    Reference: Urbach, Phys. Rev. 92, 1324 (1953); tests/published/test_dispersion_values.py.

    Holds when: the energies lie below the edge; above it the exponential goes on growing.
    """
    k0, edge, width = values
    reduced = (energy_eV - edge) / width
    tail = np.exp(reduced)
    index = 1j * k0 * tail
    return index, stacked(index.shape, 1j * tail, -index / width, -index * reduced / width)


URBACH = Law(
    "urbach",
    "index",
    (
        Parameter("k0", 0.0, np.inf, "extinction coefficient at the edge"),
        Parameter("edge_eV", 0.0, np.inf, "energy at which k = k0"),
        Parameter("width_eV", 1e-3, np.inf, "energy over which the tail falls to 1/e"),
    ),
    urbach,
    causal=False,
    reference="Urbach, Phys. Rev. 92, 1324 (1953)",
)
