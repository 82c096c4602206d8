"""Free carriers of a layer as optics knows them: plasma energy, density, mobility, resistivity, sheet resistance.

Knows the Drude law's parameters and the effective mass; does not judge whether the data reach far enough (it returns
None where they do not determine a quantity).
"""

from filmfit.answers.thickness import Found
from filmfit.materials import Expectation
from filmfit.quantities import carriers as formulas
from filmfit.result import Quantity


def carriers(found: Found, mass: Expectation | None) -> dict[str, Quantity | None]:
    """Return the carrier quantities of a layer by the names of the result.

    Args:
        found: the fitted layer; without a Drude law the answer is empty.
        mass: effective mass in electron masses, with its sigma, where known.

    Reference: quantities/carriers.py.
    """
    plasma, damping = found.parameter("drude.plasma_eV"), found.parameter("drude.damping_eV")
    if plasma is None or damping is None:
        return {}
    posterior, volume_nm = found.posterior, found.layer.volume_nm
    quantities = {
        "plasma_energy_eV": posterior.positive(lambda v: float(v[plasma])),
        "resistivity_ohm_cm": posterior.positive(lambda v: float(formulas.resistivity_ohm_cm(v[plasma], v[damping]))),
        "sheet_resistance_ohm": posterior.positive(
            lambda v: float(
                formulas.sheet_resistance_ohm(formulas.resistivity_ohm_cm(v[plasma], v[damping]), volume_nm(v))
            )
        ),
    }
    if mass is not None:
        share = mass.sigma / mass.value
        quantities["carrier_density_cm3"] = posterior.positive(
            lambda v: float(formulas.carrier_density_cm3(v[plasma], mass.value)), share
        )
        quantities["mobility_cm2_Vs"] = posterior.positive(
            lambda v: float(formulas.mobility_cm2_Vs(v[damping], mass.value)), share
        )
    return quantities
