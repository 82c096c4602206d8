"""Made measurements with known truth: a case for every seed, written as a user's run file and spectra."""

from dataclasses import dataclass, field

import numpy as np

from tests.recovery.bench import Bench
from tests.recovery.films import MASS, LawFilm, glass, published

# forty in a row hold every kind once; a blunder, a metal and so on differ from row to row
KINDS = (
    "table", "law", "thin-table", "table", "glass-side", "law", "table", "law", "barrier", "table",
    "dielectric", "law", "thin-law", "table", "metal", "law", "table", "blunder", "law", "graded",
    "table", "law", "thin-table", "table", "glass-side", "law", "table", "law", "barrier", "table",
    "dielectric", "law", "thin-law", "table", "metal", "wrong-glass", "haze", "blunder", "thin-law", "thin-table",
)  # fmt: skip
FILMS = ("ito-a", "ito-b", "azo", "ito-c", "ito-d", "ito-e")
DIELECTRICS = ("nitride-a", "niobia", "tantala", "alumina", "nitride-b", "titania", "hafnia", "aluminium-nitride")
SILVERS = ("silver-a", "silver-b", "silver-c", "silver-d", "silver-e", "silver-f")
BLUNDERS = ("side", "back", "reference", "squared")


@dataclass(frozen=True)
class Case:
    """What is true of a made measurement."""

    name: str
    kind: str
    thickness_nm: float
    law: bool
    truths: dict = field(default_factory=dict)

    @property
    def group(self):
        """Return which figures count it."""
        if self.kind in ("metal", "blunder"):
            return self.kind
        return "thin" if self.thickness_nm < 50 else "clear"


def make_case(folder, seed):
    """Write one made measurement into a folder and return its truth."""
    rng = np.random.default_rng([20261202, seed])
    kind, row = KINDS[seed % len(KINDS)], seed // len(KINDS)
    name, depth, layers, (low, high), film = _film(rng, kind, row, seed)
    plate_kind = "silica" if rng.random() < 0.45 and kind != "wrong-glass" else "soda-lime"
    bare = kind != "wrong-glass" and rng.random() < 0.7
    measured = {"silica": "silica", "soda-lime": "any" if bare else "soda-lime"}
    plate = glass(rng, "strange" if kind == "wrong-glass" else measured[plate_kind], high)
    plate_mm = float(rng.choice([0.7, 1.1, 2.0, 3.0]))
    bench = Bench.drawn(rng, rng.uniform(0.01, 0.04) if kind == "haze" else 0.0)
    nm = np.arange(max(low, 330.0) if plate_kind == "soda-lime" else low, high, 5.0 if high > 1200 else 2.5)
    blunder = BLUNDERS[(row * 2 + (seed % len(KINDS) > 20)) % 4] if kind == "blunder" else ""
    _scan(folder, rng, nm, bench, layers, plate, plate_mm, kind, blunder)
    if bare:
        _write(folder / "bare.csv", nm, _both(rng, nm, bench, [], plate, plate_mm))
    barrier = layers[0][1] + rng.normal(0, 2) if kind == "barrier" else None
    (folder / "run.toml").write_text(_run_file(seed, kind, plate_mm, plate_kind, bare, barrier, film is not None))
    label = f"{seed} {name} {plate_kind}{'' if bare else ', no bare scan'}{' ' + blunder if blunder else ''}"
    return Case(label, kind, depth, film is not None, film.truths(depth) if film and kind != "graded" else {})


def _film(rng, kind, row, seed):
    """Return name, thickness, layers, range and, for a law's film, the film."""
    depth = float(np.exp(rng.uniform(np.log(55), np.log(1400))))
    if kind.startswith("thin"):
        depth = float(rng.uniform(12, 49))
    if kind == "dielectric":
        index, *span = published(DIELECTRICS[(2 * row + (seed % len(KINDS) > 20)) % len(DIELECTRICS)])
        return kind, depth, [(index, depth)], span, None
    if kind == "metal":
        depth = float(rng.uniform(13, 50))
        index, *span = published(SILVERS[(2 * row + (seed % len(KINDS) > 20)) % len(SILVERS)])
        return kind, depth, [(index, depth)], span, None
    if kind == "graded":
        return _graded(rng, row)
    if kind.endswith("law") or (kind in ("glass-side", "haze") and rng.random() < 0.5):
        film = LawFilm(rng)
        return kind, depth, [(film.index, depth)], (310.0, rng.choice([1600.0, 2400.0])), film
    which = FILMS[seed % len(FILMS)] if kind != "wrong-glass" else "ito-b"
    index, *span = published(which)
    layers = [(index, depth)]
    if kind == "barrier":
        layers.insert(0, (glass(rng, "silica"), float(rng.uniform(20, 60))))
    return f"{kind} {which}", depth, layers, span, None


def _graded(rng, row):
    """Return a film whose constants go from one set to another through its depth."""
    depth = float(rng.uniform(120, 500))
    slices = 40
    at = (np.arange(slices) + 0.5) / slices
    if row % 2:
        film = LawFilm(rng)
        ends = film.plasma * np.sqrt(1 + np.array([-1, 1]) * rng.uniform(0.15, 0.5))
        plasmas = np.sqrt(ends[0] ** 2 + (ends[1] ** 2 - ends[0] ** 2) * at)
        layers = [(lambda nm, p=p: film.index(nm, p), depth / slices) for p in plasmas]
        return "graded carriers", depth, layers, (310.0, 1900.0), film
    (bottom, *span), (top, *_) = published("ito-c"), published("ito-d")
    if rng.random() < 0.5:
        bottom, top = top, bottom

    def mixed(share):
        return lambda nm: np.sqrt((1 - share) * bottom(nm) ** 2 + share * top(nm) ** 2)

    return "graded tables", depth, [(mixed(share), depth / slices) for share in at], span, None


def _both(rng, nm, bench, layers, plate, plate_mm, **how):
    return [
        bench.scan(rng, nm, layers, plate, plate_mm, quantity, angle, **(how if quantity == "R" else {}))
        for quantity, angle in (("T", 0.0), ("R", 8.0))
    ]


def _scan(folder, rng, nm, bench, layers, plate, plate_mm, kind, blunder):
    """Write the coated plate's scan, as the kind and the blunder want it."""
    how = {"side": "substrate"} if (kind == "glass-side") != (blunder == "side") else {}
    how |= {"back": "blackened"} if blunder == "back" else {}
    T, R = _both(rng, nm, bench, layers, plate, plate_mm, **how)
    if blunder == "reference":
        clean = Bench(bench.noise, 1.0, 1.0, bench.offset_nm, 0.0, 0.0)
        T = T / clean.scan(rng, nm, [], plate, plate_mm, "T", 0.0)
    if blunder == "squared":
        R = R**2
    _write(folder / "scan.csv", nm, (T, R))


def _write(path, nm, columns):
    rows = [",".join(f"{v:.6f}" for v in row) for row in zip(nm, *columns, strict=True)]
    path.write_text("nm,T,R\n" + "\n".join(rows))


def _run_file(seed, kind, plate_mm, plate_kind, bare, barrier, law):
    text = f'format = 1\n[run]\nid = "made-{seed}"\ndate = 2026-01-01\nfilm = "made"\n'
    text += f"[substrate]\nthickness_mm = {plate_mm}\n"
    if not bare:
        text += f'material = "{"fused-silica" if plate_kind == "silica" else "soda-lime-glass"}"\n'
    spectrum = '[[{0}spectrum]]\nfile = "{1}.csv"\nquantity = "{2}"\ncolumn = "{2}"\nangle_deg = {3}\n'
    if bare:
        text += spectrum.format("substrate.", "bare", "T", 0) + spectrum.format("substrate.", "bare", "R", 8)
    if barrier is not None:
        text += '[[layer]]\nname = "barrier"\nmaterial = "fused-silica"\ndeposited = false\n'
        text += f"thickness_nm = {{ value = {barrier:.1f}, sigma = 2 }}\n"
    model = {"dielectric": 'model = "dielectric"', "metal": 'like = "silver"'}.get(kind, 'model = "tco"')
    text += f'[[layer]]\nname = "film"\n{model}\n'
    text += spectrum.format("", "scan", "T", 0)
    text += spectrum.format("", "scan", "R", 8) + ('side = "substrate"\n' if kind == "glass-side" else "")
    return text + (f"[electrical]\neffective_mass = {MASS}\n" if law else "")
