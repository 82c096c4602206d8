"""Small invented problems that several rooms are tested on."""

from dataclasses import replace

import numpy as np
import pytest

from filmfit.dispersion.compose import Dispersion
from filmfit.fit.depth import LayerModel
from filmfit.fit.model import InstrumentModel, PlateModel, RunModel
from filmfit.fit.problem import Parameter, Problem
from filmfit.fit.scan import Scan
from filmfit.stack import Beam

WAVELENGTH = np.linspace(360.0, 1500.0, 229)
TRUTH = {"constant.epsilon": 2.1, "tauc-lorentz.amplitude_eV": 85.0, "tauc-lorentz.peak_eV": 5.6,
         "tauc-lorentz.width_eV": 3.5, "tauc-lorentz.gap_eV": 3.3, "drude.plasma_eV": 1.5, "drude.damping_eV": 0.11}  # fmt: skip
SIGMA = 0.001


def make_problem(depths=(230.0,), share=True, noise_seed=None):
    """Return a problem of as many runs as depths, with data of the true parameters."""
    law = Dispersion(("constant", "tauc-lorentz", "drude"))
    parameters, places = [], {}

    def add(made):
        if made.name not in places:
            places[made.name] = len(parameters)
            parameters.append(made)
        return places[made.name]

    beams = (Beam("T", 0.0, "mean", "film", "bare"), Beam("R", 8.0, "mean", "film", "bare"))
    runs = []
    for number, depth in enumerate(depths):
        run = f"run{number}"
        owner = "material.film" if share else f"layer.{run}/film"
        thickness = add(Parameter(f"layer.{run}/film.thickness_nm", depth, 2.0, 3000.0))
        laws = [
            add(Parameter(f"{owner}.{name}", TRUTH[name], 0.3 * TRUTH[name], 3 * TRUTH[name])) for name in law.names
        ]
        plate = PlateModel(
            1.1, WAVELENGTH, np.full(WAVELENGTH.size, 1.52), np.full(WAVELENGTH.size, 0.01),
            add(Parameter(f"plate.{run}.index_shift", 0.0, -0.1, 0.1, 0.0, 0.003)),
            (
                add(Parameter(f"plate.{run}.index_blue", 0.0, -0.1, 0.1, 0.0, 0.002)),
                add(Parameter(f"plate.{run}.index_red", 0.0, -0.1, 0.1, 0.0, 0.002)),
            ),
            np.array([500.0, 900.0]),
            (
                add(Parameter(f"plate.{run}.absorbance_factor", 1.0, 0.0, 5.0, 1.0, 0.1)),
                add(Parameter(f"plate.{run}.absorbance_factor_900", 1.0, 0.0, 5.0, 1.0, 0.1)),
            ),
            add(Parameter(f"plate.{run}.absorbance_shift", 0.0, -0.1, 0.1, 0.0, 0.003, vary=False)),
            False,
        )  # fmt: skip
        tool = InstrumentModel(
            add(Parameter("instrument.a.scale_R", 1.0, 0.8, 1.2, 1.0, 0.006)),
            add(Parameter("instrument.a.scale_T", 1.0, 0.8, 1.2, 1.0, 0.003)),
            add(Parameter("instrument.a.offset_nm", 0.1, -3.0, 3.0, 0.0, 0.3)),
            add(Parameter("instrument.a.slit_nm", 2.0, 0.1, 8.0, 2.0, 1.5)),
            add(Parameter(f"run.{run}.wedge", 0.004, 1e-4, 0.1, 0.0, 0.01)),
            add(Parameter(f"run.{run}.haze_R", 0.01, 0.0, 0.5, 0.0, 0.03)),
            add(Parameter(f"run.{run}.haze_T", 0.005, 0.0, 0.5, 0.0, 0.03)),
        )
        scans = tuple(
            Scan(beam, WAVELENGTH, np.zeros(WAVELENGTH.size), np.full(WAVELENGTH.size, SIGMA)) for beam in beams
        )
        layer = LayerModel("film", thickness, law, np.array(laws))
        runs.append(RunModel(run, scans, (layer,), plate, tool))
    problem = Problem(tuple(parameters), tuple(runs))
    rng = np.random.default_rng(noise_seed) if noise_seed is not None else None
    filled = []
    for run, seen in zip(problem.runs, problem.predict(problem.start_values()), strict=True):
        values = seen.values if rng is None else seen.values + rng.normal(0.0, SIGMA, seen.values.size)
        parts = np.split(values, [WAVELENGTH.size])
        filled.append(replace(run, scans=tuple(replace(s, values=v) for s, v in zip(run.scans, parts, strict=True))))
    return replace(problem, runs=tuple(filled))


@pytest.fixture
def make():
    return make_problem
