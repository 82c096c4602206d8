"""A bare plate from its own scans."""

import numpy as np
import pytest

from filmfit.fit.plate import internal_transmittance, plate_from_scans, plate_of_material
from filmfit.fit.scan import Scan
from filmfit.materials import material
from filmfit.optics.thick import plate
from filmfit.stack import Beam

WAVELENGTH = np.arange(320.0, 1700.0, 4.0)


def bare(index, sigma, rng):
    scans = []
    for quantity, angle in (("T", 0.0), ("R", 8.0)):
        (seen,) = plate(quantity, WAVELENGTH, np.empty((0, WAVELENGTH.size), complex), np.empty(0), index**2, 2e6,
                        angle, "mean", "film", "bare")  # fmt: skip
        beam = Beam(quantity, angle, "mean", "film", "bare")
        scans.append(Scan(beam, WAVELENGTH, seen.value + rng.normal(0, sigma, WAVELENGTH.size),
                          np.full(WAVELENGTH.size, sigma), False))  # fmt: skip
    return scans


def test_internal_transmittance_inverts_the_slab():
    # check value of tests/published: index 1.52, tau 0.95 gives T 0.8722476568
    face = ((1.52 - 1) / (1.52 + 1)) ** 2
    assert internal_transmittance(np.array([0.8722476568]), np.array([face]))[0] == pytest.approx(0.95, abs=1e-9)


@pytest.mark.parametrize("name", ["soda-lime-glass", "fused-silica"])
def test_glass_is_recognised_and_its_absorption_smoothed(name):
    rng = np.random.default_rng(3)
    index = np.sqrt(material(name).epsilon(WAVELENGTH))
    glasses = [material(one) for one in ("soda-lime-glass", "fused-silica", "borosilicate-crown-517642")]
    found = plate_from_scans(bare(index, 0.001, rng), glasses, 2.0)
    assert np.max(np.abs(found.index - index.real)) < 0.012
    true = 4 * np.pi * index.imag * 2e6 / WAVELENGTH
    clear = true < 0.5
    error = found.absorbance[clear] - true[clear]
    # smoothed: well below the noise of one point, edge included
    assert np.sqrt(np.mean(error**2)) < 0.001
    assert np.all(found.absorbance >= 0)


def test_a_plate_of_a_material_knows_what_it_does_not_know():
    glass = plate_of_material(material("soda-lime-glass"), WAVELENGTH, 1.1)
    silica = plate_of_material(material("fused-silica"), WAVELENGTH, 1.1)
    assert glass.absorbance_factor_sigma > 0
    assert silica.absorbance_factor_sigma == 0
    assert np.all(silica.absorbance == 0)


@pytest.mark.parametrize("file", ["bare-3.0mm.csv", "bare-5.7mm.csv"])
def test_measured_plates_are_described_within_half_a_percent(measured, file):
    from filmfit.spectra.read import read_spectrum

    transmitted = read_spectrum(measured / file, "T", "T")
    reflected = read_spectrum(measured / file, "R", "R_front")
    thickness = float(file[5:8])
    scans = [
        Scan(
            Beam(s.quantity, 0.0, "mean", "film", "bare"),
            s.wavelength_nm,
            s.values,
            np.full(s.values.size, 5e-4),
            False,
        )
        for s in (transmitted, reflected)
    ]
    keep = scans[0].wavelength_nm >= 312
    scans = [scan.masked(keep) for scan in scans]
    found = plate_from_scans(scans, [material("soda-lime-glass")], thickness)
    face = ((found.index - 1) / (found.index + 1)) ** 2
    tau = np.exp(-found.absorbance)
    T = (1 - face) ** 2 * tau / (1 - face**2 * tau**2)
    assert np.sqrt(np.mean((T - scans[0].values) ** 2)) < 0.005
