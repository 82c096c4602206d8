"""Make the spectra of this example: an invented oxide film on an invented glass, with an instrument's faults.

The film has two interband transitions, whose dispersion is integrated numerically from their absorption, and free
carriers: none of it is computed by filmfit. R and T come from the general-purpose package tmm. Run it again and the
same bytes come out, and the true values are printed:

    python make_data.py [FOLDER]

True values: thickness 212.0 nm, plasma energy 1.72 eV, damping 0.104 eV; with an effective mass of 0.35: carrier
density 7.509e20 /cm3, mobility 31.80 cm2/Vs; sheet resistance 12.33 ohm. Errors of the instrument: R reads 0.4 %
high, T 0.2 % low, wavelengths 0.2 nm short, noise 0.001.
"""

import sys
from pathlib import Path

import numpy as np
import tmm

HC_EV_NM = 1239.841984
THICKNESS_NM, PLASMA_EV, DAMPING_EV, MASS = 212.0, 1.72, 0.104, 0.35
# CODATA 2018: charge in C, electron mass in kg, vacuum permittivity in F/m, hbar in J s.
E_C, M_KG, EPSILON_0, HBAR = 1.602176634e-19, 9.1093837015e-31, 8.8541878128e-12, 1.054571817e-34
GLASS_NM = 1.1e6
SCALE_R, SCALE_T, OFFSET_NM, NOISE, SEED = 1.004, 0.998, 0.2, 0.001, 20260417


def interband_epsilon2(energy: np.ndarray) -> np.ndarray:
    """Return the absorption of two Tauc-Lorentz transitions (Jellison and Modine, Appl. Phys. Lett. 69, 371 (1996))."""
    total = np.zeros_like(energy)
    for amplitude, peak, width, gap in ((60.0, 5.9, 3.4, 3.30), (22.0, 4.6, 0.9, 3.45)):
        shape = amplitude * peak * width * (energy - gap) ** 2 / energy
        shape = shape / ((energy**2 - peak**2) ** 2 + (width * energy) ** 2)
        total += np.where(energy > gap, shape, 0.0)
    return total


def film_index(wavelength_nm: np.ndarray) -> np.ndarray:
    """Return n + ik of the invented film: a constant, interband absorption with its Kramers-Kronig partner, carriers.

    The Kramers-Kronig integral is a sum over every other point of a fine grid (Ohta and Ishida, Appl. Spectrosc. 42,
    952 (1988), Maclaurin's formula), so the pole lies between points.
    """
    energy = HC_EV_NM / wavelength_nm
    step = 0.004
    epsilon1 = np.empty_like(energy)
    for number, at in enumerate(energy):
        grid = at + step * (2 * np.arange(-int(at / step / 2) + 1, int(60 / step)) + 1)
        grid = grid[grid > 0]
        epsilon1[number] = 4 * step / np.pi * np.sum(grid * interband_epsilon2(grid) / (grid**2 - at**2))
    carriers = -(PLASMA_EV**2) / (energy**2 + 1j * energy * DAMPING_EV)
    return np.sqrt(1.95 + epsilon1 + 1j * interband_epsilon2(energy) + carriers)


def glass_index(wavelength_nm: np.ndarray) -> np.ndarray:
    """Return n + ik of the invented glass: a clear plate with an ultraviolet edge and a weak infrared band."""
    um = wavelength_nm / 1000
    n = 1.5125 - 0.0030 * um**2 + 0.0041 / um**2
    k = 2.0e-5 * np.exp(-(wavelength_nm - 310.0) / 9.0) + 2.5e-6 * np.exp(-(((um - 1.05) / 0.30) ** 2)) + 2.5e-7
    return n + 1j * k


def spectrum(quantity: str, wavelength_nm: np.ndarray, angle_deg: float, coated: bool) -> np.ndarray:
    """Return R or T as a perfect instrument would read it."""
    film, glass = film_index(wavelength_nm), glass_index(wavelength_nm)
    values = []
    for number, wavelength in enumerate(wavelength_nm):
        index = [1.0, film[number], glass[number], 1.0] if coated else [1.0, glass[number], 1.0]
        depth = [np.inf, THICKNESS_NM, GLASS_NM, np.inf] if coated else [np.inf, GLASS_NM, np.inf]
        kind = ["i", "c", "i", "i"] if coated else ["i", "i", "i"]
        both = [tmm.inc_tmm(p, index, depth, kind, np.radians(angle_deg), wavelength)[quantity] for p in "sp"]
        values.append(sum(both) / 2)
    return np.array(values)


def truth() -> dict[str, float]:
    """Return what an ideal fit would find, from the Drude model's plasma energy and damping."""
    density_m3 = (PLASMA_EV * E_C / HBAR) ** 2 * EPSILON_0 * MASS * M_KG / E_C**2
    mobility_m2 = HBAR / (DAMPING_EV * MASS * M_KG)
    return {
        "thickness_nm": THICKNESS_NM,
        "plasma_energy_eV": PLASMA_EV,
        "damping_eV": DAMPING_EV,
        "carrier_density_cm3": density_m3 * 1e-6,
        "mobility_cm2_Vs": mobility_m2 * 1e4,
        "sheet_resistance_ohm": 1 / (density_m3 * E_C * mobility_m2 * THICKNESS_NM * 1e-9),
    }


def main(folder: Path) -> None:
    """Write scan.csv and bare.csv; print what is true."""
    rng = np.random.default_rng(SEED)
    shown = np.arange(320.0, 2201.0, 5.0)
    for name, coated in (("scan.csv", True), ("bare.csv", False)):
        columns = [shown]
        for quantity, angle, scale in (("T", 0.0, SCALE_T), ("R", 8.0, SCALE_R)):
            ideal = spectrum(quantity, shown + OFFSET_NM, angle, coated)
            columns.append(100 * (scale * ideal + rng.normal(0.0, NOISE, shown.size)))
        lines = ["Wavelength (nm),T (%),R (%)"]
        lines += [f"{nm:.0f},{t:.3f},{r:.3f}" for nm, t, r in zip(*columns, strict=True)]
        (folder / name).write_text("\n".join(lines) + "\n", encoding="utf-8")
    for quantity, value in truth().items():
        print(f"{quantity} = {value:.4g}")


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
