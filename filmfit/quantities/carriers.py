"""From Drude's two energies to carrier density, mobility, resistivity and sheet resistance.

Knows formulas and constants; does not know how an energy was found. Masses are in electron masses.
"""

from typing import Final

from filmfit.units import ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, PLANCK_J_S, VACUUM_PERMITTIVITY_F_M

HBAR_EV_S: Final = PLANCK_J_S / (2.0 * 3.141592653589793) / ELEMENTARY_CHARGE_C
CM3_PER_M3: Final = 1e-6
CM2_PER_M2: Final = 1e4
CM_PER_M: Final = 1e2
CM_PER_NM: Final = 1e-7


def carrier_density_cm3(plasma_eV: float, effective_mass: float) -> float:
    """Return the carrier density N = eps0 m (Ep / hbar e)^2 in 1/cm^3.

    Args:
        plasma_eV: unscreened plasma energy Ep.
        effective_mass: in electron masses.

    Reference: Drude, Ann. Phys. 306, 566 (1900), with CODATA constants; tests/published/test_carrier_values.py.
    """
    per_s2 = (plasma_eV / HBAR_EV_S) ** 2
    return VACUUM_PERMITTIVITY_F_M * effective_mass * ELECTRON_MASS_KG * per_s2 / ELEMENTARY_CHARGE_C**2 * CM3_PER_M3


def mobility_cm2_Vs(damping_eV: float, effective_mass: float) -> float:
    """Return the mobility mu = e hbar / (m G) in cm^2/(V s).

    Args:
        damping_eV: damping G at zero frequency.
        effective_mass: in electron masses.

    Reference: as carrier_density_cm3.
    """
    time_s = HBAR_EV_S / damping_eV
    return ELEMENTARY_CHARGE_C * time_s / (effective_mass * ELECTRON_MASS_KG) * CM2_PER_M2


def resistivity_ohm_cm(plasma_eV: float, damping_eV: float) -> float:
    """Return the resistivity rho = hbar G / (eps0 Ep^2) in ohm cm; it needs no mass.

    Args:
        plasma_eV: unscreened plasma energy Ep.
        damping_eV: damping G at zero frequency.

    Reference: as carrier_density_cm3.
    """
    return HBAR_EV_S * damping_eV / (VACUUM_PERMITTIVITY_F_M * plasma_eV**2) * CM_PER_M


def sheet_resistance_ohm(resistivity: float, thickness_nm: float) -> float:
    """Return the sheet resistance in ohm (per square) from the resistivity in ohm cm and the thickness in nm."""
    return resistivity / (thickness_nm * CM_PER_NM)
