"""The table of laws: a new law is one file and one row here.

Knows every law by name; does not add them up (compose.py does).
"""

from collections.abc import Mapping
from types import MappingProxyType

from filmfit.dispersion.cauchy import CAUCHY
from filmfit.dispersion.constant import CONSTANT
from filmfit.dispersion.drude import DRUDE
from filmfit.dispersion.law import Law
from filmfit.dispersion.lorentz import LORENTZ
from filmfit.dispersion.sellmeier import SELLMEIER
from filmfit.dispersion.tauc_lorentz import TAUC_LORENTZ
from filmfit.dispersion.urbach import URBACH

LAWS: Mapping[str, Law] = MappingProxyType(
    {law.name: law for law in (CONSTANT, CAUCHY, URBACH, SELLMEIER, LORENTZ, TAUC_LORENTZ, DRUDE)}
)
