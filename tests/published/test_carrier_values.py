"""Carrier formulas against values from CODATA constants (scipy.constants), formulas of Drude, Ann. Phys. 306, 566 (1900)."""

import pytest

from filmfit.quantities.carriers import carrier_density_cm3, mobility_cm2_Vs, resistivity_ohm_cm, sheet_resistance_ohm


@pytest.mark.parametrize(
    ("plasma", "damping_meV", "mass", "density", "mobility", "resistivity", "sheet"),
    [
        (1.80, 120, 0.35, 8.224291e20, 27.56372, 2.753298e-4, 18.35532),
        (1.50, 100, 0.35, 5.711313e20, 33.07647, 3.303958e-4, 22.02639),
        (1.00, 80, 0.28, 2.030689e20, 51.68198, 5.947124e-4, 39.64750),
        (2.20, 150, 0.40, 1.404076e21, 19.29461, 2.303896e-4, 15.35931),
    ],
)
def test_carriers(plasma, damping_meV, mass, density, mobility, resistivity, sheet):
    damping = damping_meV * 1e-3
    assert carrier_density_cm3(plasma, mass) == pytest.approx(density, rel=1e-6)
    assert mobility_cm2_Vs(damping, mass) == pytest.approx(mobility, rel=1e-6)
    assert resistivity_ohm_cm(plasma, damping) == pytest.approx(resistivity, rel=1e-6)
    assert sheet_resistance_ohm(resistivity_ohm_cm(plasma, damping), 150.0) == pytest.approx(sheet, rel=1e-6)
