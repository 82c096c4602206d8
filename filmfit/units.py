"""Units: how the trade's units become the one unit each quantity has inside, and the constants that link them.

Knows the suffixes a key may carry; does not know the keys. Inside: nm, eV, s, W, Pa, fractions of 1.
"""

from typing import Final, NamedTuple

# Exact by the 2019 SI: h = 6.62607015e-34 J s, c = 299792458 m/s, e = 1.602176634e-19 C (BIPM, The International
# System of Units, 9th ed., 2019, table 1).
PLANCK_J_S: Final = 6.62607015e-34
LIGHT_SPEED_M_S: Final = 299792458.0
ELEMENTARY_CHARGE_C: Final = 1.602176634e-19
HC_EV_NM: Final = PLANCK_J_S * LIGHT_SPEED_M_S / ELEMENTARY_CHARGE_C * 1e9

# CODATA 2022 (NIST, physics.nist.gov/constants; the values scipy.constants carries are the same to 1e-9).
ELECTRON_MASS_KG: Final = 9.1093837139e-31
VACUUM_PERMITTIVITY_F_M: Final = 8.8541878188e-12

PERCENT: Final = 0.01


class Unit(NamedTuple):
    """A unit that a key's suffix may name, and the factor to the unit used inside."""

    inside: str
    factor: float


SUFFIXES: Final[dict[str, Unit]] = {
    "nm": Unit("nm", 1.0),
    "um": Unit("nm", 1e3),
    "A": Unit("nm", 0.1),
    "s": Unit("s", 1.0),
    "min": Unit("s", 60.0),
    "Pa": Unit("Pa", 1.0),
    "mTorr": Unit("Pa", 101325.0 / 760.0 * 1e-3),
    "mbar": Unit("Pa", 100.0),
}
