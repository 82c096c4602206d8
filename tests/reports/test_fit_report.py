"""Printed answers compared whole with kept texts; pictures are the same bytes twice.

To keep a changed text: FILMFIT_KEEP=1 pytest tests/reports, then read the difference.
"""

import os
from pathlib import Path

import numpy as np
import pytest

from filmfit.reasons import reason
from filmfit.report.figures import draw_fit
from filmfit.report.text import fit_text, number, one_line, quantity
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

KEPT = Path(__file__).parent / "kept"


def made_up(answer):
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


@pytest.mark.parametrize("answer", ["usable", "check", "unusable"])
def test_printed_answer(answer):
    text = fit_text(made_up(answer), ["filed as fit 1 of run K2-0417, revision 1"]) + "\n"
    path = KEPT / f"fit-{answer}.txt"
    if os.environ.get("FILMFIT_KEEP"):
        path.write_text(text)
    assert text == path.read_text()


def test_an_unusable_answer_shows_no_result():
    text = fit_text(made_up("unusable"))
    assert "251.3" not in text
    assert "deposition rate" not in text


def test_one_line():
    assert one_line(made_up("check")) == "K2-0417: check, 251.30 nm   (95 %: 250.10 to 252.50); rival-thickness"
    assert one_line(made_up("unusable")) == "K2-0417: unusable, -; poor-fit"


@pytest.mark.parametrize(
    ("value", "sigma", "text"),
    [
        (251.3456, 0.61, "251.35"),
        (251.3456, 12.0, "251"),
        (251.3456, 130.0, "250"),
        (7.3123e20, 1.1e19, "7.31e+20"),
        (2.9134e-5, 6e-7, "2.913e-05"),
        (0.0021, 0.00034, "0.00210"),
        (3.66, None, "3.66"),
        (0.0, 0.1, "0.00"),
    ],
)
def test_digits_follow_the_uncertainty(value, sigma, text):
    assert number(value, sigma) == text


def test_bounds_and_gaps():
    assert quantity(Quantity.at_least(3.66), "eV") == "at least 3.66 eV"
    assert quantity(Quantity(value=None, sigma=None, low=None, high=8.0), "nm") == "at most 8 nm"
    assert quantity(None, "nm") == "-"


def curves():
    x = np.linspace(350, 2000, 120)
    wave = 0.1 * np.cos(4 * np.pi * 480 / x)
    return [
        Curve("T", "film", 0.0, True, x, 0.8 - wave, 0.8 - wave + 0.001, np.full(120, 0.001)),
        Curve("R", "film", 8.0, True, x, 0.12 + wave, 0.12 + wave, np.full(120, 0.001)),
        Curve("R", "substrate", 8.0, True, x, 0.10 + 0.5 * wave, 0.10 + 0.5 * wave, np.full(120, 0.001)),
        Curve("T", "film", 0.0, False, x, np.full(120, 0.91), np.full(120, 0.91), np.full(120, 0.001)),
    ]


@pytest.mark.parametrize("answer", ["usable", "unusable"])
def test_the_picture_is_the_same_bytes_twice(answer):
    first, second = (draw_fit(made_up(answer), curves()) for _ in range(2))
    assert first == second
    assert first.startswith(b"<?xml")
    assert b"K2-0417" in first or b"<path" in first


def test_the_picture_as_other_kinds():
    assert draw_fit(made_up("check"), curves(), "png").startswith(b"\x89PNG")
    assert draw_fit(made_up("check"), curves(), "pdf").startswith(b"%PDF")
