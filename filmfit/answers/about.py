"""What stands around the quantities: the instrument as found, assumptions, limits, how the fit went, what it rests on.

Knows the shape of the result; computes nothing but root mean squares.
"""

from collections.abc import Callable
from importlib.metadata import version

import numpy as np

from filmfit import __version__
from filmfit.answers.thickness import Found
from filmfit.fit.barrier import BARRIER_NM, moved_by_barrier
from filmfit.fit.build import Built
from filmfit.fit.choose import Outcome
from filmfit.fit.inputs import RunInput
from filmfit.fit.interval import Posterior
from filmfit.fit.scan import Reading
from filmfit.materials import Expectation
from filmfit.result import Curve, FitSummary, LimitState, Nuisance, Provenance, Quantity, Results
from filmfit.runfile.load import RunFile
from filmfit.stack import FloatArray

BARRIER_CARRIER = "soda-lime-glass"  # the glass that is sold with silica barriers
PACKAGES = ("lmfit", "numpy", "scipy", "tmm")


def nuisances(posterior: Posterior) -> dict[str, Nuisance]:
    """Return the instrument's and the plate's corrections beside what was expected."""
    solution = posterior.solution
    found = {}
    for index in solution.problem.free:
        p = solution.problem.parameters[index]
        scope = p.name.partition(".")[0]
        if scope in ("instrument", "plate", "run"):
            got = posterior.parameter(int(index))
            expected = p.expected if p.expected is not None else p.start
            inside = {"low": max(got.low or 0.0, p.low), "high": min(got.high or 0.0, p.high)}
            found[p.name.rpartition(".")[2]] = Nuisance(**{**got.model_dump(), **inside}, expected=expected)
    return found


def assumptions(
    file: RunFile, built: Built, outcome: Outcome, posterior: Posterior, mass: Expectation | None
) -> tuple[str, ...]:
    """Return what the answer takes for granted."""
    said = []
    plate = built.plates[0]
    if file.content.substrate.spectrum:
        said.append(f"plate: index of {plate.material} within {plate.index_shift_sigma:g}, absorption as measured")
    else:
        said.append(f"plate: {plate.material}, index within {plate.index_shift_sigma:g}")
    if file.content.substrate.back == "blackened" and any(one.quantity == "T" for one in file.content.spectrum):
        said.append("T was measured before the rear face was blackened")
    if outcome.structures:
        said.append(f"the data ask for: {', '.join(outcome.structures)}")
    if len(file.content.layer) == 1:
        alike = "" if outcome.structures else ", smooth, the same at every depth"
        said.append(f"film directly on the plate{alike}")
        if plate.material == BARRIER_CARRIER and built.film[0][1] == 0:
            said.append(_barrier(posterior))
    source = built.starting[0]
    if built.problem.index_expectations and source is not None and source.index_550 is not None:
        said.append(
            f"index at 550 nm expected {source.index_550.value:g} +- {source.index_550.sigma:g} ({source.name})"
        )
    if mass is not None:
        said.append(f"effective mass {mass.value:g} +- {mass.sigma:g} ({mass.reference})")
    return tuple(said)


def _barrier(posterior: Posterior) -> str:
    """Return what a barrier under the film that was not declared would have done to thickness and carriers."""
    found = Found(posterior, posterior.solution.problem.runs[0].layers[0])
    functions: dict[str, Callable[[FloatArray], float]] = {"thickness": found.layer.volume_nm}
    plasma = found.parameter("drude.plasma_eV")
    if plasma is not None:
        functions["carrier density"] = lambda values: float(values[plasma]) ** 2
    moved = moved_by_barrier(posterior, functions)
    told = ", ".join(f"{name} {100 * share:+.1f} %" for name, share in moved.items())
    return f"no barrier between plate and film: {BARRIER_NM:g} nm of silica there would move {told}"


def limits(file: RunFile, results: Results) -> dict[str, LimitState]:
    """Return for each plate limit whether the interval lies within it, outside it, or across it."""
    states: dict[str, LimitState] = {}
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


def summary(outcome: Outcome, film: int, fits: list[Reading], seconds: float) -> FitSummary:
    """Return how the fit went."""
    solution = outcome.solution
    rms: dict[str, float | None] = {}
    for quantity in ("R", "T"):
        parts = [fit.rms**2 for fit in fits if fit.scan.coated and fit.scan.beam.quantity == quantity]
        rms[quantity] = float(np.sqrt(np.mean(parts))) if parts else None
    chi2, points = sum(fit.chi2 for fit in fits), solution.problem.points
    layer = solution.problem.runs[0].layers[film]
    laws = dict.fromkeys(name.partition(".")[0] for name in layer.dispersion.names) if layer.dispersion else {}
    model = " + ".join(name for name in laws if name != "correction")
    said = (model, *outcome.structures, f"causal correction of about {100 * outcome.freedom.size:g} %")
    return FitSummary(
        model=" + ".join(said),
        reduced_chi2=chi2 / max(1, points - len(solution.problem.free)),
        rms_R=rms["R"],
        rms_T=rms["T"],
        points=solution.problem.points,
        free=len(solution.problem.free),
        seconds=round(seconds, 3),
    )


def provenance(file: RunFile, given: RunInput, difference: float | None) -> Provenance:
    """Return what the numbers rest on."""
    return Provenance(
        filmfit=__version__,
        packages={name: version(name) for name in PACKAGES},
        run_file=f"sha256:{file.sha256}",
        files={one.file: f"sha256:{one.sha256}" for one in (*given.coated, *given.bare)},
        tmm_difference=difference,
    )


def curve(fit: Reading) -> Curve:
    """Return a scan beside its fit."""
    scan = fit.scan
    return Curve(
        scan.beam.quantity, scan.beam.side, scan.beam.angle_deg, scan.coated,
        scan.wavelength_nm, scan.values, fit.fitted, scan.sigma,
    )  # fmt: skip
