"""The absorption edge of a layer under its three names: Tauc-Lorentz parameter, direct intercept, energy at 1e4 per cm.

Knows the fitted dielectric function inside the data's range; does not extrapolate beyond it.
"""

import numpy as np

from filmfit.answers.thickness import Found
from filmfit.quantities.gap import direct_gap, energy_at_absorption
from filmfit.result import Quantity
from filmfit.stack import FloatArray

STEP_EV = 0.005
LEVEL_CM = 1e4


def gaps(found: Found, lowest_eV: float, highest_eV: float) -> dict[str, Quantity | None]:
    """Return the layer's gaps by the names of the result; empty for a layer without an absorption edge.

    Args:
        found: the fitted layer.
        lowest_eV, highest_eV: photon energies between which the data say something of the film.

    Reference: quantities/gap.py.
    """
    gap = found.parameter("tauc-lorentz.gap_eV")
    if gap is None:
        return {}
    energy = np.arange(lowest_eV, highest_eV, STEP_EV)
    posterior = found.posterior

    def at_level(values: FloatArray) -> float:
        return float(energy_at_absorption(energy, found.absorption_cm(values, energy), LEVEL_CM))

    edge = posterior.plain(at_level) if np.isfinite(at_level(posterior.solution.values)) else None
    return {
        "gap_tauc_lorentz_eV": posterior.positive(lambda values: float(values[gap])),
        "energy_at_1e4_eV": edge,
        "gap_direct_eV": _direct(energy, found.absorption_cm(posterior.solution.values, energy), edge),
    }


def _direct(energy_eV: FloatArray, alpha_cm: FloatArray, edge: Quantity | None) -> Quantity | None:
    """Return the direct intercept, a lower bound where there is no linear part, None where there is no edge.

    Its uncertainty is the spread over neighbouring windows (uniform) and that of the edge itself.
    """
    read = direct_gap(energy_eV, alpha_cm)
    if read is None or edge is None or edge.sigma is None or not np.isfinite(read.intercept_eV):
        return None
    if not read.linear:
        return Quantity.at_least(read.intercept_eV)
    return Quantity.normal(read.intercept_eV, float(np.hypot(read.half_spread_eV / np.sqrt(3), edge.sigma)))
