"""The library of materials: one TOML file each, with values, valid range, reference and origin.

Knows how to read and check a material; does not know films or fits. A file without a reference does not load.

A file holds `name`, `kind` (fixed: known constants; starting: where a fit of such a film begins), `description`,
`valid_nm`, `reference`, `origin` (measured, handbook, memory); then `laws` with `[parameters]` by full name
({ value, low, high, sigma }; sigma where the value is expected), or `[[table]]` blocks (reference, wavelength_nm, n,
k), the first of which is the material, over all of `valid_nm`, and the others further published tables of it. Glasses
may add `index_sigma` (how far pieces of the kind stray in index), films `[index_550]` and `[effective_mass]` (value,
sigma, reference) and `continuous_above_nm`; a metal that is both fixed and a start gives its law under `[starting]`.
"""

import tomllib
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np
from scipy.interpolate import PchipInterpolator

from filmfit.dispersion.compose import Dispersion
from filmfit.dispersion.law import ComplexArray, FloatArray
from filmfit.errors import MaterialError, nearest
from filmfit.toml_values import TomlValues
from filmfit.units import HC_EV_NM

KINDS = ("fixed", "starting")
ORIGINS = ("measured", "handbook", "memory")
KEYS = (
    "name", "kind", "description", "valid_nm", "reference", "origin", "laws", "parameters", "table", "starting",
    "index_550", "effective_mass", "continuous_above_nm", "index_sigma",
)  # fmt: skip


@dataclass(frozen=True)
class Expectation:
    """A value expected beforehand, with its standard uncertainty and where it comes from."""

    value: float
    sigma: float
    reference: str


@dataclass(frozen=True)
class Start:
    """Where a law's parameter begins, its bounds, and how far it is expected from there (None: anywhere)."""

    value: float
    low: float
    high: float
    sigma: float | None = None


@dataclass(frozen=True)
class OpticalTable:
    """Published n and k against wavelength, ascending."""

    wavelength_nm: FloatArray
    n: FloatArray
    k: FloatArray
    reference: str

    @cached_property
    def _curves(self) -> tuple[PchipInterpolator, PchipInterpolator]:
        return PchipInterpolator(self.wavelength_nm, self.n), PchipInterpolator(self.wavelength_nm, self.k)

    def index(self, wavelength_nm: FloatArray) -> ComplexArray:
        """Return n + ik (W,), shape-preserving cubic between the points: no overshoot, k stays >= 0.

        Raises:
            ValueError: a wavelength beyond the ends of the table.

        Reference: Fritsch and Carlson, SIAM J. Numer. Anal. 17, 238 (1980).
        """
        low, high = self.wavelength_nm[0], self.wavelength_nm[-1]
        if not np.all((wavelength_nm >= low) & (wavelength_nm <= high)):
            raise ValueError(f"the table holds {low:.7g}-{high:.7g} nm only ({self.reference})")
        n, k = self._curves
        found: ComplexArray = n(wavelength_nm) + 1j * np.maximum(k(wavelength_nm), 0.0)
        return found


@dataclass(frozen=True)
class Material:
    """A material of the library or of a user's file.

    `laws` with `parameters` describe where a fit begins (kind starting, or a metal's [starting] block) or, for a
    fixed material without a table, the material itself.
    """

    name: str
    kind: str
    description: str
    valid_nm: tuple[float, float]
    reference: str
    origin: str
    laws: tuple[str, ...] = ()
    parameters: dict[str, Start] = field(default_factory=dict)
    tables: tuple[OpticalTable, ...] = ()
    index_550: Expectation | None = None
    effective_mass: Expectation | None = None
    continuous_above_nm: float | None = None
    index_sigma: float | None = None

    @cached_property
    def dispersion(self) -> Dispersion:
        """The sum of the material's laws."""
        return Dispersion(self.laws, self.name)

    def covers(self, wavelength_nm: FloatArray) -> np.ndarray:
        """Return for each wavelength (W,) whether the material is known there."""
        return (wavelength_nm >= self.valid_nm[0]) & (wavelength_nm <= self.valid_nm[1])

    def epsilon(self, wavelength_nm: FloatArray) -> ComplexArray:
        """Return the dielectric function (W,) of a material with known constants.

        Args:
            wavelength_nm: (W,), inside the valid range.

        Raises:
            ValueError: a wavelength outside the valid range.
        """
        if not np.all(self.covers(wavelength_nm)):
            raise ValueError(f"{self.name} is known for {self.valid_nm[0]:g}-{self.valid_nm[1]:g} nm only")
        if self.tables:
            return self.tables[0].index(wavelength_nm) ** 2
        values = np.array([self.parameters[name].value for name in self.dispersion.names])
        return self.dispersion.evaluate(HC_EV_NM / wavelength_nm, values)[0]


def _folder() -> Path:
    """Return the folder of the library: inside the installed package, else in the checkout."""
    here = Path(__file__).resolve().parent
    installed = here / "_data" / "materials"
    return installed if installed.is_dir() else here.parent / "materials"


def library() -> tuple[str, ...]:
    """Return the names of all materials of the library, sorted."""
    return tuple(sorted(path.stem for path in _folder().glob("*.toml")))


def material(name: str, base: Path | None = None, where: str = "material") -> Material:
    """Return a material of the library, or of a user's file.

    Args:
        name: a name of the library, or a path that ends in .toml.
        base: what a relative path is relative to.
        where: what to name in an error: the run file's line and key.

    Raises:
        MaterialError: unknown name, missing file, or a file that is not complete.
    """
    if name.endswith(".toml"):
        path = (base or Path()) / name
        if not path.is_file():
            raise MaterialError(where, f"no file '{name}'", do="give a path relative to the run file")
        return load(path)
    if name not in library():
        folded = {one.casefold(): one for one in library()}
        hint = nearest(folded.get(name.casefold(), name), library())
        raise MaterialError(where, f"unknown material '{name}'", do=hint or "see 'filmfit materials list'")
    return load(_folder() / f"{name}.toml")


def load(path: Path) -> Material:
    """Return the material that a file describes.

    Raises:
        MaterialError: the file is not TOML, or a key is missing, unknown or of the wrong kind.
    """
    try:
        content = tomllib.loads(path.read_text(encoding="utf-8"))
    except (ValueError, RecursionError, OSError) as error:
        raise MaterialError(str(path), f"not a readable TOML file ({error})") from error
    return _Reader(path.name).material(content)


class _Reader(TomlValues):
    """Makes a material of the content of one file."""

    def material(self, content: dict[str, Any]) -> Material:
        self.known("", content, KEYS)
        kind = self.word("kind", content.get("kind"), KINDS)
        blocks = content.get("table", [])
        if not isinstance(blocks, list):
            raise self.fault("table", "not a list", "[[table]] blocks")
        tables = tuple(self.table(f"table[{number}]", block) for number, block in enumerate(blocks))
        laws, parameters = self.law(content, kind, bool(tables))
        continuous = content.get("continuous_above_nm")
        return Material(
            name=self.text("name", content.get("name")),
            kind=kind,
            description=self.text("description", content.get("description")),
            valid_nm=self.valid(content, tables),
            reference=self.text("reference", content.get("reference")),
            origin=self.word("origin", content.get("origin"), ORIGINS),
            laws=laws,
            parameters=parameters,
            tables=tables,
            index_550=self.expectation(content, "index_550"),
            effective_mass=self.expectation(content, "effective_mass"),
            index_sigma=self.positive("index_sigma", content["index_sigma"]) if "index_sigma" in content else None,
            continuous_above_nm=None if continuous is None else self.positive("continuous_above_nm", continuous),
        )

    def law(self, content: dict[str, Any], kind: str, tabled: bool) -> tuple[tuple[str, ...], dict[str, Start]]:
        """Return the laws and where their parameters begin: of a fixed table under [starting], else from the top."""
        apart = tabled and kind == "fixed"
        for key in ("laws", "parameters") if apart else ("starting",):
            if key in content:
                raise self.fault(key, "out of place", "[starting] with the laws of a fixed table, else laws at the top")
        block = self.block("starting", content.get("starting", {})) if apart else content
        self.known("starting.", block if apart else (), ("laws", "parameters"))
        laws = block.get("laws", [])
        if not isinstance(laws, list) or not all(isinstance(one, str) for one in laws):
            raise self.fault("laws", f"{laws!r}", "a list of names")
        if not laws and not apart:
            raise self.fault("laws", "neither laws nor a table" if kind == "fixed" else "missing", "a list of names")
        given = self.block("parameters", block.get("parameters", {}))
        sums = Dispersion(laws, self.file)
        if set(sums.names) != set(given):
            odd = ", ".join(sorted(set(sums.names) ^ set(given)))
            raise self.fault("parameters", f"missing or not of these laws: {odd}")
        hard = {name: (one.low, one.high) for name, one in zip(sums.names, sums.parameters, strict=True)}
        begins = apart or kind == "starting"
        return tuple(laws), {name: self.start(name, given[name], hard[name], begins) for name in given}

    def start(self, name: str, given: object, hard: tuple[float, float], begins: bool) -> Start:
        """Return where a parameter begins, inside the hard bounds of its law."""
        block = self.block(name, given)
        self.known(f"{name}.", block, ("value", "low", "high", "sigma"))
        value = self.number(name, block.get("value"))
        low = self.number(name, block.get("low", value))
        high = self.number(name, block.get("high", value))
        if not low <= value <= high:
            raise self.fault(name, f"{value:g} outside {low:g}..{high:g}")
        if low < hard[0] or high > hard[1]:
            raise self.fault(name, f"{low:g}..{high:g}", f"inside {hard[0]:g}..{hard[1]:g}, the bounds of the law")
        if begins and low == high:
            raise self.fault(name, f"no room between {low:g} and {high:g}", "low < high where a fit begins")
        return Start(value, low, high, self.positive(f"{name}.sigma", block["sigma"]) if "sigma" in block else None)

    def table(self, key: str, given: object) -> OpticalTable:
        block = self.block(key, given)
        names, columns = ("wavelength_nm", "n", "k"), []
        self.known(f"{key}.", block, ("reference", *names))
        for name in names:
            values = block.get(name)
            if not isinstance(values, list) or len(values) < 2:
                raise self.fault(f"{key}.{name}", "missing or too short", "a list of numbers")
            columns.append(np.array([self.number(f"{key}.{name}", value) for value in values]))
        wavelength, n, k = columns
        if not wavelength.size == n.size == k.size:
            raise self.fault(key, "columns of different length")
        if np.any(np.diff(wavelength) <= 0):
            raise self.fault(f"{key}.wavelength_nm", "not ascending")
        for name, column in zip(names, columns, strict=True):
            if np.any(column < 0):
                raise self.fault(f"{key}.{name}", "negative", f"{name} >= 0")
        return OpticalTable(wavelength, n, k, self.text(f"{key}.reference", block.get("reference")))

    def valid(self, content: dict[str, Any], tables: tuple[OpticalTable, ...]) -> tuple[float, float]:
        """Return the valid range; a table, where there is one, reaches over all of it."""
        value = content.get("valid_nm")
        if not isinstance(value, list) or len(value) != 2:
            raise self.fault("valid_nm", "missing or not a pair", "[shortest, longest]")
        low, high = self.number("valid_nm", value[0]), self.number("valid_nm", value[1])
        if not 0 < low < high:
            raise self.fault("valid_nm", f"{low:g}, {high:g}", "two ascending positive numbers")
        first, last = tables[0].wavelength_nm[[0, -1]] if tables else (low, high)
        if low < first or high > last:
            allowed = f"inside {first:.7g}-{last:.7g}, the range of table[0]"
            raise self.fault("valid_nm", f"{low:.7g}, {high:.7g}", allowed)
        return low, high

    def expectation(self, content: dict[str, Any], key: str) -> Expectation | None:
        if key not in content:
            return None
        block = self.block(key, content[key])
        self.known(f"{key}.", block, ("value", "sigma", "reference"))
        value, sigma = (self.positive(f"{key}.{name}", block.get(name)) for name in ("value", "sigma"))
        return Expectation(value, sigma, self.text(f"{key}.reference", block.get("reference")))
