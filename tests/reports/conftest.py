"""Made-up results and curves, for texts and pictures alike."""

import numpy as np
import pytest

from filmfit.reasons import reason
from filmfit.result import (
    Alternative,
    Curve,
    FitSummary,
    Layer,
    Nuisance,
    Provenance,
    Quantity,
    Result,
    Results,
)  # fmt: skip


def make_result(answer):
    depth = Quantity.between(251.3, 250.1, 252.5)
    results = Results(
        thickness_nm=depth, top_nm=depth, rate_nm_min=Quantity.normal(16.75, 0.04), index_550=Quantity.normal(1.912, 0.004),
        gap_tauc_lorentz_eV=Quantity.normal(3.31, 0.05), gap_direct_eV=Quantity.at_least(3.66),
        energy_at_1e4_eV=Quantity.normal(3.61, 0.006), plasma_energy_eV=Quantity.normal(1.701, 0.004),
        carrier_density_cm3=Quantity.between(7.3e20, 6.0e20, 8.9e20), resistivity_ohm_cm=Quantity.normal(2.9e-4, 6e-6),
    )  # fmt: skip
    layer = Layer(name="film", thickness_nm=depth, rate_nm_min=None, law="constant + drude",
                  parameters={"drude.plasma_eV": Quantity.normal(1.701, 0.004)})  # fmt: skip
    reasons = {
        "usable": (reason("no-linear-part", "gap_direct_eV"), reason("damping-not-determined", "mobility_cm2_Vs")),
        "check": (reason("rival-thickness", "thickness_nm", rival=398.04, delta_bic=4.2),),
        "unusable": (reason("poor-fit", rms=0.041),),
    }[answer]
    return Result(
        run="K2-0417", film="ITO", answer=answer, reasons=reasons,
        results=Results() if answer == "unusable" else results,
        layers=() if answer == "unusable" else (layer,),
        instrument={"scale_R": Nuisance(value=1.002, sigma=0.001, low=1.0, high=1.004, expected=1.0)},
        alternatives=() if answer == "usable" else (Alternative(thickness_nm=398.04, delta_bic=4.2),),
        assumptions=("film directly on the plate, smooth, the same at every depth",),
        limits={"thickness_nm": "within"} if answer == "usable" else {},
        fit=FitSummary(model="constant + drude", reduced_chi2=1.1, rms_R=0.0012, rms_T=0.0011, points=882, free=9, seconds=0.4),
        provenance=Provenance(filmfit="0.1.0", packages={}, run_file="sha256:0", files={}, tmm_difference=3e-9),
    )  # fmt: skip


@pytest.fixture
def made_up():
    return make_result


@pytest.fixture
def curves():
    x = np.linspace(350, 2000, 120)
    sigma = np.full(120, 0.001)
    wave = 0.1 * np.cos(4 * np.pi * 480 / x)
    return [
        Curve("T", "film", 0.0, True, x, 0.8 - wave, 0.8 - wave + 0.001, sigma),
        Curve("R", "film", 8.0, True, x, 0.12 + wave, 0.12 + wave, sigma),
        Curve("R", "substrate", 8.0, True, x, 0.10 + 0.5 * wave, 0.10 + 0.5 * wave, sigma),
        Curve("T", "film", 0.0, False, x, np.full(120, 0.91), np.full(120, 0.91), sigma),
    ]
