"""Thickness, index and deposition rate of a layer, with intervals.

Knows the fitted layer and the run's time; does not judge whether the fit may be used.
"""

from dataclasses import dataclass

import numpy as np

from filmfit.dispersion.compose import index_from_epsilon
from filmfit.fit.depth import LayerModel
from filmfit.fit.interval import Posterior
from filmfit.rates.rate import rate_nm_min
from filmfit.result import Quantity
from filmfit.stack import ComplexArray, FloatArray
from filmfit.units import HC_EV_NM

INDEX_AT_NM = 550.0


@dataclass(frozen=True)
class Found:
    """A fitted layer as the answers ask for it."""

    posterior: Posterior
    layer: LayerModel

    def parameter(self, name: str) -> int | None:
        """Return the index of a law's parameter among all parameters, None where the layer has none such."""
        if self.layer.dispersion is None or name not in self.layer.dispersion.names:
            return None
        return int(self.layer.laws[self.layer.dispersion.names.index(name)])

    def epsilon(self, values: FloatArray, energy_eV: FloatArray) -> ComplexArray:
        """Return the layer's dielectric function (E,) for given parameters (P,)."""
        if self.layer.dispersion is None:
            assert self.layer.material is not None
            return self.layer.material.epsilon(HC_EV_NM / energy_eV)
        return self.layer.dispersion.evaluate(energy_eV, values[self.layer.laws][:, None])[0]

    def absorption_cm(self, values: FloatArray, energy_eV: FloatArray) -> FloatArray:
        """Return the absorption coefficient (E,) in 1/cm, alpha = 4 pi k / lambda."""
        k = index_from_epsilon(self.epsilon(values, energy_eV)).imag
        alpha: FloatArray = 4 * np.pi * k * energy_eV / HC_EV_NM * 1e7
        return alpha


def thickness(found: Found) -> Quantity | None:
    """Return the layer's volume-equivalent thickness in nm; None where the data do not determine it."""
    if found.layer.rough is None:
        return found.posterior.thickness(found.layer.thickness)
    return found.posterior.positive(found.layer.volume_nm)


def index_550(found: Found) -> Quantity | None:
    """Return the layer's refractive index at 550 nm."""
    energy = np.array([HC_EV_NM / INDEX_AT_NM])
    return found.posterior.positive(lambda values: float(index_from_epsilon(found.epsilon(values, energy)).real[0]))


def rate(found: Quantity | None, time_s: float | None) -> Quantity | None:
    """Return the deposition rate in nm/min, None without a time or a thickness."""
    if found is None or time_s is None:
        return None
    return rate_nm_min(found, time_s)
