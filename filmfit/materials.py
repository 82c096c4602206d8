"""The library of materials: one TOML file each, with values, valid range, reference and origin.

Knows how to read and check a material; does not know films or fits. A file without a reference does not load.

A file holds `name`, `kind` (fixed: known constants; starting: where a fit of such a film begins), `description`,
`valid_nm`, `reference`, `origin` (measured, handbook, memory); then `laws` with `[parameters]` by full name
({ value, low, high, sigma }; sigma where the value is expected), or `[[table]]` blocks (reference, wavelength_nm, n,
k), the first of which is the material and the others further published tables of it. Films may add `[index_550]` and
`[effective_mass]` (value, sigma, reference) and `continuous_above_nm`; a metal that is both gives its law under
`[starting]`.
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
from filmfit.units import HC_EV_NM

KINDS = ("fixed", "starting")
ORIGINS = ("measured", "handbook", "memory")
KEYS = (
    "name", "kind", "description", "valid_nm", "reference", "origin", "laws", "parameters", "table", "starting",
    "index_550", "effective_mass", "continuous_above_nm",
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

        Reference: Fritsch and Carlson, SIAM J. Numer. Anal. 17, 238 (1980).
        """
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
        hint = nearest(name, library())
        raise MaterialError(where, f"unknown material '{name}'", do=hint or "see 'filmfit materials list'")
    return load(_folder() / f"{name}.toml")


def load(path: Path) -> Material:
    """Return the material that a file describes.

    Raises:
        MaterialError: the file is not TOML, or a key is missing, unknown or of the wrong kind.
    """
    try:
        content = tomllib.loads(path.read_text(encoding="utf-8"))
    except (tomllib.TOMLDecodeError, UnicodeDecodeError, OSError) as error:
        raise MaterialError(str(path), f"not a readable TOML file ({error})") from error
    return _Reader(path.name).material(content)


class _Reader:
    """Checks and converts one material file; every fault names the file and the key."""

    def __init__(self, file: str) -> None:
        self.file = file

    def fault(self, key: str, found: str, allowed: str = "") -> MaterialError:
        return MaterialError(f"{self.file}: {key}", found, allowed)

    def material(self, content: dict[str, Any]) -> Material:
        for key in content:
            if key not in KEYS:
                raise self.fault(key, "unknown key", ", ".join(KEYS))
        kind = self.word(content, "kind", KINDS)
        law_block = content.get("starting", content)
        laws = tuple(law_block.get("laws", ()))
        tables = tuple(self.table(number, block) for number, block in enumerate(content.get("table", ())))
        if not laws and not tables:
            raise self.fault("laws", "neither laws nor a table")
        parameters = {name: self.start(name, block) for name, block in law_block.get("parameters", {}).items()}
        expected = set(Dispersion(laws, self.file).names)
        if expected != set(parameters):
            odd = ", ".join(sorted(expected ^ set(parameters)))
            raise self.fault("parameters", f"missing or not of these laws: {odd}")
        low, high = self.pair(content, "valid_nm")
        continuous = content.get("continuous_above_nm")
        return Material(
            name=self.text(content, "name"),
            kind=kind,
            description=self.text(content, "description"),
            valid_nm=(low, high),
            reference=self.text(content, "reference"),
            origin=self.word(content, "origin", ORIGINS),
            laws=laws,
            parameters=parameters,
            tables=tables,
            index_550=self.expectation(content, "index_550"),
            effective_mass=self.expectation(content, "effective_mass"),
            continuous_above_nm=None if continuous is None else self.number("continuous_above_nm", continuous),
        )

    def text(self, content: dict[str, Any], key: str) -> str:
        value = content.get(key)
        if not isinstance(value, str) or not value.strip():
            raise self.fault(key, "missing or empty", "a text")
        return value

    def word(self, content: dict[str, Any], key: str, words: tuple[str, ...]) -> str:
        value = self.text(content, key)
        if value not in words:
            raise self.fault(key, f"'{value}'", ", ".join(words))
        return value

    def number(self, key: str, value: object) -> float:
        if isinstance(value, bool) or not isinstance(value, int | float) or not np.isfinite(value):
            raise self.fault(key, f"{value!r}", "a finite number")
        return float(value)

    def pair(self, content: dict[str, Any], key: str) -> tuple[float, float]:
        value = content.get(key)
        if not isinstance(value, list) or len(value) != 2:
            raise self.fault(key, "missing or not a pair", "[shortest, longest]")
        low, high = self.number(key, value[0]), self.number(key, value[1])
        if not 0 < low < high:
            raise self.fault(key, f"{low:g}, {high:g}", "two ascending positive numbers")
        return low, high

    def start(self, name: str, block: dict[str, Any]) -> Start:
        value = self.number(name, block.get("value"))
        low = self.number(name, block.get("low", value))
        high = self.number(name, block.get("high", value))
        if not low <= value <= high:
            raise self.fault(name, f"{value:g} outside {low:g}..{high:g}")
        sigma = block.get("sigma")
        return Start(value, low, high, None if sigma is None else self.number(name, sigma))

    def expectation(self, content: dict[str, Any], key: str) -> Expectation | None:
        block = content.get(key)
        if block is None:
            return None
        return Expectation(
            self.number(key, block.get("value")), self.number(key, block.get("sigma")), self.text(block, "reference")
        )

    def table(self, number: int, block: dict[str, Any]) -> OpticalTable:
        key = f"table[{number}]"
        columns = []
        for name in ("wavelength_nm", "n", "k"):
            values = block.get(name)
            if not isinstance(values, list) or len(values) < 2:
                raise self.fault(f"{key}.{name}", "missing or too short", "a list of numbers")
            columns.append(np.array([self.number(f"{key}.{name}", value) for value in values]))
        wavelength, n, k = columns
        if not wavelength.size == n.size == k.size:
            raise self.fault(key, "columns of different length")
        if np.any(np.diff(wavelength) <= 0):
            raise self.fault(f"{key}.wavelength_nm", "not ascending")
        if np.any(k < 0):
            raise self.fault(f"{key}.k", "negative", "k >= 0")
        return OpticalTable(wavelength, n, k, self.text(block, "reference"))
