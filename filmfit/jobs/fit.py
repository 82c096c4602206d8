"""The main job: from a run file to a result. Read, build, choose, ask, judge, check, tell.

Knows the order of the steps; each step stands in a room of its own.
"""

import time
from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path
from typing import Any

import numpy as np
from threadpoolctl import threadpool_limits

from filmfit import __version__
from filmfit.answers.carriers import carriers
from filmfit.answers.gap import gaps
from filmfit.answers.thickness import Found, index_550, rate, thickness
from filmfit.errors import Faults, FilmfitError
from filmfit.fit.build import Built, RunInput, build_problem
from filmfit.fit.choose import Outcome, choose
from filmfit.fit.crosscheck import tmm_difference
from filmfit.fit.interval import Posterior
from filmfit.materials import Expectation
from filmfit.result import (
    Alternative,
    Curve,
    FitSummary,
    Layer,
    Nuisance,
    Provenance,
    Quantity,
    Result,
    Results,
)  # fmt: skip
from filmfit.runfile.keys import as_record
from filmfit.runfile.load import RunFile, load_run_file
from filmfit.spectra.read import check_sum, read_spectrum
from filmfit.units import HC_EV_NM
from filmfit.verdict import Fit, judge

PACKAGES = ("lmfit", "numpy", "scipy", "tmm")


@dataclass(frozen=True)
class Fitted:
    """A fitted run: its result, its curves for the picture, and what the records keep of its conditions."""

    result: Result
    curves: tuple[Curve, ...]
    conditions: dict[str, Any]
    run_file_sha256: str


def fit_run(path: str | Path) -> Fitted:
    """Return the fit of one run file.

    Args:
        path: the run file; the spectra it names are read relative to it.

    Raises:
        Faults: everything that is wrong with the run file and its spectra, one sentence each.
    """
    started = time.perf_counter()
    file = load_run_file(path)
    given = read_run(file)
    built = build_problem([given])
    with threadpool_limits(limits=1, user_api="blas"):
        outcome = choose(built.problem, built.main[0], built.hints_nm[0])
        result, curves = _answer(file, given, built, outcome, started)
    return Fitted(result, curves, as_record(file.content), file.sha256)


def read_run(file: RunFile) -> RunInput:
    """Return a run file with its spectra.

    Raises:
        Faults: every spectrum that cannot be read, and R and T that cannot belong together.
    """
    faults: list[FilmfitError] = []
    content = file.content
    groups: list[list[Any]] = [[], []]
    for group, keys, name in (
        (groups[0], content.spectrum, ("spectrum",)),
        (groups[1], content.substrate.spectrum, ("substrate", "spectrum")),
    ):
        for number, one in enumerate(keys):
            try:
                where = file.where(*name, number, "file")
                group.append(read_spectrum(file.resolve(one.file), one.quantity, one.column, where))
            except FilmfitError as error:
                faults.append(error)
    if not faults:
        faults += _sum_faults(file, groups[0])
    if faults:
        raise Faults(faults)
    return RunInput(file, tuple(groups[0]), tuple(groups[1]))


def _sum_faults(file: RunFile, coated: list[Any]) -> list[FilmfitError]:
    """Return what is wrong with R and T of one side taken together."""
    pairs = list(zip(file.content.spectrum, coated, strict=True))
    reflected = [one for keys, one in pairs if keys.quantity == "R" and keys.side == "film"]
    transmitted = [one for keys, one in pairs if keys.quantity == "T"]
    if not reflected or not transmitted:
        return []
    try:
        check_sum(reflected[0], transmitted[0], file.where("spectrum"))
    except FilmfitError as error:
        return [error]
    return []


def _answer(
    file: RunFile, given: RunInput, built: Built, outcome: Outcome, started: float
) -> tuple[Result, tuple[Curve, ...]]:
    """Return the result and the curves of a chosen fit."""
    solution = outcome.solution
    run = solution.problem.runs[0]
    (seen,) = solution.problem.predict(solution.values)
    fits, start = [], 0
    for scan in run.scans:
        fits.append(Fit(scan, seen.values[start : start + scan.values.size]))
        start += scan.values.size
    posterior = Posterior.of(solution)
    mass = _mass(file, built)
    main = built.main[0][1]
    results = _results(file, built, posterior, main, mass)
    difference = tmm_difference(run, solution.values)
    reasons, answer = judge(file, built, outcome, fits, results, difference)
    alternatives = [Alternative(thickness_nm=r.thickness_nm, delta_bic=r.delta_bic) for r in outcome.rivals]
    if answer == "unusable":
        found = float(solution.values[outcome.thickness])
        alternatives.insert(0, Alternative(thickness_nm=found, delta_bic=0.0))
        results = Results()
    result = Result(
        run=run.run,
        film=file.content.run.film,
        answer=answer,
        reasons=tuple(reasons),
        results=results,
        layers=() if answer == "unusable" else _layers(file, posterior),
        instrument=_nuisances(posterior),
        alternatives=tuple(alternatives),
        assumptions=_assumptions(file, built, mass),
        limits=_limits(file, results),
        fit=_summary(outcome, fits, time.perf_counter() - started),
        provenance=_provenance(file, given, difference),
    )
    return result, tuple(_curve(fit) for fit in fits)


def _results(file: RunFile, built: Built, posterior: Posterior, main: int, mass: Expectation | None) -> Results:
    """Return the quantities of the main layer."""
    found = Found(posterior, posterior.solution.problem.runs[0].layers[main])
    keys = file.content.layer[main]
    depth = thickness(found)
    coated = [scan for scan in posterior.solution.problem.runs[0].scans if scan.coated]
    shortest = min(float(scan.wavelength_nm[0]) for scan in coated)
    longest = max(float(scan.wavelength_nm[-1]) for scan in coated)
    return Results(
        thickness_nm=depth,
        top_nm=depth if len(file.content.layer) == 1 else None,
        index_550=index_550(found) if shortest <= 550 <= longest else None,
        rate_nm_min=rate(depth, keys.time_s or file.content.run.time_s) if keys.deposited else None,
        **gaps(found, HC_EV_NM / longest, HC_EV_NM / shortest),
        **carriers(found, mass),
    )


def _mass(file: RunFile, built: Built) -> Expectation | None:
    """Return the effective mass that the run file or the main layer's material states."""
    stated, source = file.content.electrical, built.starting[0]
    library = source.effective_mass if source is not None else None
    if stated.effective_mass is None:
        return library
    sigma = stated.effective_mass_sigma
    if sigma is None:
        sigma = 0.0
    return Expectation(stated.effective_mass, sigma, "run file")


def _layers(file: RunFile, posterior: Posterior) -> tuple[Layer, ...]:
    """Return every layer with its thickness, rate, law and parameters."""
    layers = []
    for keys, model in zip(file.content.layer, posterior.solution.problem.runs[0].layers, strict=True):
        found = Found(posterior, model)
        depth = thickness(found)
        parameters: dict[str, Quantity] = {}
        if model.dispersion is not None:
            for name, index in zip(model.dispersion.names, model.laws, strict=True):
                if not name.startswith("correction."):
                    parameters[name] = posterior.parameter(int(index))
        time_s = keys.time_s or file.content.run.time_s
        laws = [name.partition(".")[0] for name in parameters]
        layers.append(
            Layer(
                name=keys.name,
                thickness_nm=depth,
                rate_nm_min=rate(depth, time_s) if keys.deposited else None,
                law=" + ".join(dict.fromkeys(laws)) or (keys.material or ""),
                parameters=parameters,
            )
        )
    return tuple(layers)


def _nuisances(posterior: Posterior) -> dict[str, Nuisance]:
    """Return the instrument's and the plate's corrections beside what was expected."""
    solution = posterior.solution
    found = {}
    for index in solution.problem.free:
        p = solution.problem.parameters[index]
        scope = p.name.partition(".")[0]
        if scope in ("instrument", "plate", "run"):
            got = posterior.parameter(int(index))
            expected = p.expected if p.expected is not None else p.start
            found[p.name.rpartition(".")[2]] = Nuisance(**got.model_dump(), expected=expected)
    return found


def _assumptions(file: RunFile, built: Built, mass: Expectation | None) -> tuple[str, ...]:
    """Return what the answer takes for granted."""
    said = []
    plate = built.plates[0]
    if file.content.substrate.spectrum:
        said.append(f"plate: index of {plate.material} within {plate.index_shift_sigma:g}, absorption as measured")
    else:
        said.append(f"plate: {plate.material}, index within {plate.index_shift_sigma:g}")
    if len(file.content.layer) == 1:
        said.append("film directly on the plate, smooth, the same at every depth")
    source = built.starting[0]
    if built.problem.index_expectations and source is not None and source.index_550 is not None:
        said.append(
            f"index at 550 nm expected {source.index_550.value:g} +- {source.index_550.sigma:g} ({source.name})"
        )
    if mass is not None:
        said.append(f"effective mass {mass.value:g} +- {mass.sigma:g} ({mass.reference})")
    return tuple(said)


def _limits(file: RunFile, results: Results) -> dict[str, Any]:
    """Return for each plate limit whether the interval lies within it, outside it, or across it."""
    states = {}
    for name, limit in file.content.limits.items():
        got: Quantity | None = getattr(results, name)
        low = -np.inf if limit.low is None else limit.low
        high = np.inf if limit.high is None else limit.high
        if got is None or got.low is None or got.high is None:
            states[name] = "undecided"
        elif low <= got.low and got.high <= high:
            states[name] = "within"
        elif got.high < low or got.low > high:
            states[name] = "outside"
        else:
            states[name] = "undecided"
    return states


def _summary(outcome: Outcome, fits: list[Fit], seconds: float) -> FitSummary:
    """Return how the fit went."""
    solution = outcome.solution
    rms: dict[str, float | None] = {}
    for quantity in ("R", "T"):
        parts = [fit.rms**2 for fit in fits if fit.scan.coated and fit.scan.beam.quantity == quantity]
        rms[quantity] = float(np.sqrt(np.mean(parts))) if parts else None
    layer = solution.problem.runs[0].layers[-1]
    laws = dict.fromkeys(name.partition(".")[0] for name in layer.dispersion.names) if layer.dispersion else {}
    model = " + ".join(name for name in laws if name != "correction")
    return FitSummary(
        model=f"{model} + causal correction of about {100 * outcome.freedom.size:g} %",
        reduced_chi2=solution.reduced_chi2,
        rms_R=rms["R"],
        rms_T=rms["T"],
        points=solution.problem.points,
        free=len(solution.problem.free),
        seconds=round(seconds, 3),
    )


def _provenance(file: RunFile, given: RunInput, difference: float | None) -> Provenance:
    """Return what the numbers rest on."""
    return Provenance(
        filmfit=__version__,
        packages={name: version(name) for name in PACKAGES},
        run_file=f"sha256:{file.sha256}",
        files={one.file: f"sha256:{one.sha256}" for one in (*given.coated, *given.bare)},
        tmm_difference=difference,
    )


def _curve(fit: Fit) -> Curve:
    """Return a scan beside its fit."""
    scan = fit.scan
    return Curve(
        scan.beam.quantity, scan.beam.side, scan.beam.angle_deg, scan.coated,
        scan.wavelength_nm, scan.values, fit.fitted, scan.sigma,
    )  # fmt: skip
