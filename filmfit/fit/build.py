"""From run files and their spectra to one problem: which parameters there are, where they begin, what is expected.

Knows run files, library and measured spectra; does not search. Parameter names are scope.object.parameter:
layer.<run>/<layer>.<parameter>, or material.<layer>.<parameter> where runs share a layer's constants,
instrument.<id>.<parameter>, run.<run>.wedge, plate.<run>.<parameter>.
"""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from filmfit.dispersion.compose import Dispersion
from filmfit.errors import Faults, FilmfitError, MaterialError, RunFileError, nearest
from filmfit.fit.depth import LayerModel
from filmfit.fit.inputs import RunInput, scan_of
from filmfit.fit.model import InstrumentModel, PlateModel, RunModel
from filmfit.fit.parameters import (
    STARTING_MODELS,
    free_starts,
    hint_nm,
    instrument_parameters,
    law_parameter,
    thickness_parameter,
)
from filmfit.fit.plate import PlateStart, plate_from_scans, plate_of_material
from filmfit.fit.problem import IndexExpectation, Parameter, Problem
from filmfit.fit.scan import Scan
from filmfit.materials import Material, material
from filmfit.runfile.keys import Layer
from filmfit.runfile.load import RunFile

GLASSES = ("soda-lime-glass", "fused-silica", "borosilicate-crown-517642")
# Iron and its state change the ultraviolet edge, the visible and the infrared band apart (common practice, no source).
FACTOR_KNOTS_NM = np.array([330.0, 380.0, 450.0, 600.0, 800.0, 1050.0, 1400.0, 2200.0])
TILT_SHARE = (
    0.5  # of the index shift: by how much glasses differ in dispersion to 390 and 1350 nm, as published ones do
)
PLATE_INDEX_LIMIT, PLATE_SHIFT_LIMIT, PLATE_FACTOR_HIGH = 0.1, 0.1, 10.0
FEWEST_POINTS = 10


@dataclass(frozen=True)
class Built:
    """A problem, two layers (run, layer) of each run, the hints for the search, and what was left out.

    `main` is the layer that the results speak of, `film` the one that is searched: the same, unless the user marked a
    layer that is held fixed.
    """

    problem: Problem
    main: tuple[tuple[int, int], ...]
    film: tuple[tuple[int, int], ...]
    hints_nm: tuple[float | None, ...]
    starting: tuple[Material | None, ...]  # where the main layer of each run came from
    plates: tuple[PlateStart, ...]
    left_out: tuple[tuple[str, float, float], ...]  # material, valid range, that cost points


def build_problem(runs: Sequence[RunInput], share_layers: bool = False) -> Built:
    """Return the joint problem of any number of runs.

    Args:
        runs: run files with their spectra.
        share_layers: layers of one name share their optical constants; each run keeps its own thickness.

    Raises:
        Faults: unknown materials, laws or parameters, each with its line.
    """
    builder = _Builder(share_layers)
    for one in runs:
        builder.add_run(one)
    if builder.faults:
        raise Faults(builder.faults)
    return Built(
        Problem(tuple(builder.parameters), tuple(builder.runs), tuple(builder.expectations)),
        tuple(builder.main), tuple(builder.film), tuple(builder.hints), tuple(builder.starting), tuple(builder.plates),
        tuple(builder.left_out),
    )  # fmt: skip


@dataclass
class _Builder:
    """The problem while it grows, run by run."""

    share_layers: bool
    parameters: list[Parameter] = field(default_factory=list)
    places: dict[str, int] = field(default_factory=dict)
    runs: list[RunModel] = field(default_factory=list)
    expectations: list[IndexExpectation] = field(default_factory=list)
    main: list[tuple[int, int]] = field(default_factory=list)
    film: list[tuple[int, int]] = field(default_factory=list)
    hints: list[float | None] = field(default_factory=list)
    starting: list[Material | None] = field(default_factory=list)
    plates: list[PlateStart] = field(default_factory=list)
    left_out: list[tuple[str, float, float]] = field(default_factory=list)
    faults: list[FilmfitError] = field(default_factory=list)

    def parameter(self, made: Parameter) -> int:
        """Return a parameter's index; one that another run already made is shared."""
        if made.name not in self.places:
            self.places[made.name] = len(self.parameters)
            self.parameters.append(made)
        return self.places[made.name]

    def add_run(self, given: RunInput) -> None:
        """Add one run's layers, plate, instrument and scans, or its faults."""
        content, run_id = given.file.content, given.file.content.run.id
        before = len(self.faults)
        number = len(self.runs)
        sources = [self.source(given.file, at, layer) for at, layer in enumerate(content.layer)]
        plate_material = self.plate_material(given.file)
        if len(self.faults) > before:
            return
        fixed = [found for keys, found in zip(content.layer, sources, strict=True) if keys.material and found]
        scans = self.scans(given, [*fixed, plate_material] if plate_material else fixed)
        if len(self.faults) > before:
            return
        layers = tuple(
            self.layer(given.file, at, layer, found)
            for at, (layer, found) in enumerate(zip(content.layer, sources, strict=True))
        )
        if len(self.faults) > before:
            return
        plate = self.plate(run_id, content.substrate.thickness_mm, plate_material, scans)
        errors = instrument_parameters(run_id, content.instrument)
        instrument = InstrumentModel(*(self.parameter(one) for one in errors))
        self.runs.append(RunModel(run_id, scans, layers, plate, instrument))
        fitted = [at for at, layer in enumerate(layers) if layer.dispersion is not None]
        marked = [at for at, layer in enumerate(content.layer) if layer.main]
        if len(fitted) > 1 and not marked:
            names = " and ".join(f"'{layers[at].name}'" for at in fitted)
            self.faults.append(
                RunFileError(given.file.where("layer"), f"{names} are fitted", "one main layer", "give one main = true")
            )
            return
        main = (marked or fitted or [len(layers) - 1])[-1]
        film = main if main in fitted or not fitted else fitted[-1]
        self.main.append((number, main))
        self.film.append((number, film))
        self.starting.append(sources[main])
        self.hints.append(hint_nm(content.layer[film]))
        source = sources[main]
        if source is not None and source.index_550 is not None and layers[main].dispersion is not None:
            self.expectations.append(
                IndexExpectation(number, main, 550.0, source.index_550.value, source.index_550.sigma)
            )

    def source(self, file: RunFile, at: int, layer: Layer) -> Material | None:
        """Return the library material that a layer names; None for a free choice of laws."""
        if layer.laws is not None:
            return None
        key = "material" if layer.material else "like" if layer.like else "model"
        name = layer.material or layer.like or STARTING_MODELS[layer.model or ""]
        where = file.where("layer", at, key)
        try:
            found = material(name, file.path.parent, where)
        except MaterialError as error:
            self.faults.append(error)
            return None
        if key == "material" and found.kind != "fixed":
            self.faults.append(
                MaterialError(where, f"'{name}' is where a fit begins, not a known material", do=f'use like = "{name}"')
            )
        elif key != "material" and not (found.laws and (found.kind == "starting" or found.tables)):
            self.faults.append(
                MaterialError(where, f"'{name}' has no law to fit", do=f'use material = "{name}" to hold it fixed')
            )
        return found

    def plate_material(self, file: RunFile) -> Material | None:
        """Return the substrate's material, None where only its spectra are given."""
        name = file.content.substrate.material
        if name is None:
            return None
        where = file.where("substrate", "material")
        try:
            found = material(name, file.path.parent, where)
        except MaterialError as error:
            self.faults.append(error)
            return None
        if found.kind != "fixed":
            self.faults.append(MaterialError(where, f"'{name}' is where a fit begins, not a known material",
                                             do="name a glass: see 'filmfit materials list'"))  # fmt: skip
        return found

    def scans(self, given: RunInput, fixed: Sequence[Material]) -> tuple[Scan, ...]:
        """Return the run's scans inside the range of every material that is held fixed."""
        content = given.file.content
        scans = []
        for keys, measured in zip(content.spectrum, given.coated, strict=True):
            scans.append(scan_of(keys, measured, keys.side, content.substrate.back, True))
        for bare, measured in zip(content.substrate.spectrum, given.bare, strict=True):
            scans.append(scan_of(bare, measured, "film", "bare", False))
        kept = []
        bare_t = [scan for scan in scans if not scan.coated and scan.beam.quantity == "T"]
        for scan in scans:
            keep = np.ones(scan.wavelength_nm.size, bool)
            for one in fixed:
                inside = one.covers(scan.wavelength_nm)
                if not inside.all() and (one.name, *one.valid_nm) not in self.left_out:
                    self.left_out.append((one.name, *one.valid_nm))
                keep &= inside
            if content.substrate.material is None and bare_t:
                keep &= (scan.wavelength_nm >= bare_t[0].wavelength_nm[0]) & (
                    scan.wavelength_nm <= bare_t[0].wavelength_nm[-1]
                )
            if scan.coated and keep.sum() < FEWEST_POINTS:
                self.faults.append(
                    RunFileError(
                        given.file.where("spectrum"),
                        f"{int(keep.sum())} points lie where plate and layers are known",
                        f"at least {FEWEST_POINTS}",
                        "measure the bare plate over the same range",
                    )
                )
            kept.append(scan.masked(keep))
        return tuple(kept)

    def layer(self, file: RunFile, at: int, keys: Layer, source: Material | None) -> LayerModel:
        """Return a layer's model and note its parameters."""
        run_id = file.content.run.id
        stem = f"layer.{run_id}/{keys.name}"
        try:
            thickness = self.parameter(thickness_parameter(f"{stem}.thickness_nm", keys))
        except ValueError as error:
            self.faults.append(RunFileError(file.where("layer", at, "thickness_nm"), str(error)))
            return LayerModel(keys.name, 0)
        if keys.material is not None:
            return LayerModel(keys.name, thickness, material=source)
        try:
            laws = keys.laws if keys.laws is not None else source.laws if source is not None else ()
            dispersion = Dispersion(laws, file.where("layer", at, "laws"))
        except MaterialError as error:
            self.faults.append(error)
            return LayerModel(keys.name, thickness)
        for name in keys.parameters:
            if name not in dispersion.names:
                hint = nearest(name, dispersion.names)
                self.faults.append(
                    RunFileError(
                        file.where("layer", at, "parameters", name),
                        "no such parameter of this layer",
                        ", ".join(dispersion.names),
                        hint,
                    )
                )
        owner = f"material.{keys.name}" if self.share_layers else stem
        begins = source.parameters if source is not None else free_starts(dispersion)
        indices = []
        for name, legal in zip(dispersion.names, dispersion.parameters, strict=True):
            try:
                made = law_parameter(f"{owner}.{name}", begins[name], keys.parameters.get(name), legal)
            except ValueError as error:
                self.faults.append(RunFileError(file.where("layer", at, "parameters", name), str(error)))
                continue
            indices.append(self.parameter(made))
        return LayerModel(keys.name, thickness, dispersion, np.array(indices, dtype=np.intp))

    def plate(self, run_id: str, thickness_mm: float, found: Material | None, scans: Sequence[Scan]) -> PlateModel:
        """Return the plate's model and note its corrections."""
        bare = [scan for scan in scans if not scan.coated]
        measured = any(scan.beam.quantity == "T" for scan in bare)
        if measured:
            glasses = [found] if found is not None else [material(name) for name in GLASSES]
            start = plate_from_scans(bare, glasses, thickness_mm)
        else:
            assert found is not None
            grid = np.unique(np.concatenate([scan.wavelength_nm for scan in scans]))
            start = plate_of_material(found, grid, thickness_mm)
        self.plates.append(start)
        stem = f"plate.{run_id}"
        factor, shift = start.absorbance_factor_sigma, start.absorbance_shift_sigma
        knots = np.array([0.0]) if factor == 0 or measured else FACTOR_KNOTS_NM
        factors = tuple(
            self.parameter(Parameter(f"{stem}.{name}", 1.0, 0.0, PLATE_FACTOR_HIGH, 1.0, factor or None, factor > 0))
            for name in ("absorbance_factor", *(f"absorbance_factor_{nm:.0f}" for nm in knots[1:]))
        )
        index_shift = Parameter(
            f"{stem}.index_shift", 0.0, -PLATE_INDEX_LIMIT, PLATE_INDEX_LIMIT, 0.0, start.index_shift_sigma
        )
        tilt_sigma = TILT_SHARE * start.index_shift_sigma
        tilts = tuple(
            self.parameter(
                Parameter(f"{stem}.index_{end}", 0.0, -PLATE_INDEX_LIMIT, PLATE_INDEX_LIMIT, 0.0, tilt_sigma)
            )
            for end in ("blue", "red")
        )
        absorbance_shift = Parameter(
            f"{stem}.absorbance_shift", 0.0, 0.0, PLATE_SHIFT_LIMIT, 0.0, shift, shift is not None
        )
        return PlateModel(
            thickness_mm, start.wavelength_nm, start.index, start.absorbance, self.parameter(index_shift),
            (tilts[0], tilts[1]), knots, factors, self.parameter(absorbance_shift), measured,
        )  # fmt: skip
