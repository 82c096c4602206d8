"""From a fit's outcome to reasons and an answer: usable, check or unusable.

Knows the limits beyond which a person must look; the words stand in reasons.py, the numbers in the fit.
"""

from collections.abc import Sequence

import numpy as np

from filmfit.fit.blunders import Suspicion
from filmfit.fit.build import Built
from filmfit.fit.choose import Outcome
from filmfit.fit.problem import Parameter
from filmfit.fit.scan import Reading, Scan
from filmfit.fit.solve import Solution
from filmfit.quantities.carriers import carrier_density_cm3
from filmfit.reasons import ORDER, TABLE, best_answer, reason
from filmfit.result import Answer, Quantity, Reason, Results
from filmfit.runfile.load import RunFile

RIVAL_BIC = 10.0  # evidence above it is decisive: Kass and Raftery, J. Am. Stat. Assoc. 90, 773 (1995), table p. 777
NUISANCE_SIGMAS = 3.0
WATCHED = ("scale_R", "scale_T", "offset_nm", "index_shift", "absorbance_factor", "absorbance_shift")
STRUCTURE_GROWTH = 2.0  # chi2 per point that noise and a free law cannot explain
POOR_RMS = 0.02
OPAQUE_TRANSMITTANCE = 0.005
COUPLED_RELATIVE_SIGMA = 0.02
POOR_RELATIVE_SIGMA = 0.2
LOOSE_RELATIVE_SIGMA, UNLIKELY_SIGMAS = 0.015, 1.5
SUM_SIGMAS = 3.0
NEAR_NORMAL_DEG = 15.0
THIN_SUBSTRATE_MM, FRINGE_AT_NM, FRINGE_PER_SLIT = 0.2, 550.0, 0.2
BOUND_SHARE = 1e-3
LARGEST_TMM_DIFFERENCE = 1e-6


def judge(
    file: RunFile,
    built: Built,
    outcome: Outcome,
    blunders: Sequence[Suspicion],
    fits: list[Reading],
    results: Results,
    difference: float | None,
) -> tuple[list[Reason], Answer]:
    """Return all reasons, the gravest first, and the best answer that they leave.

    Args:
        file: the run file.
        built: what was fitted.
        outcome: the chosen fit and its rivals.
        blunders: readings of the data that would fit better.
        fits: each scan beside its fit.
        results: quantities of the main layer.
        difference: largest difference to the independent code, None where not compared.
    """
    scans = [fit.scan for fit in fits]
    source = built.starting[0]
    reasons = fit_reasons(outcome, fits)
    reasons += [reason(one.code, delta_bic=one.delta_bic) for one in blunders]
    reasons += parameter_reasons(outcome.solution)
    reasons += scan_reasons(scans, float(np.hypot(*_scale_sigmas(file))))
    expectation = source.index_550 if source is not None and built.problem.index_expectations else None
    expected = (expectation.value, expectation.sigma) if expectation else None
    reasons += thickness_reasons(results.thickness_nm, expected, scans)
    reasons += index_reasons(results.thickness_nm, results.index_550, expected)
    reasons += quantity_reasons(results, outcome.solution.problem.runs[0].layers[built.main[0][1]].law_names, scans)
    for name, low, high in built.left_out:
        reasons.append(reason("outside-material-range", material=name, low=low, high=high))
    reasons += foil_reasons(file, built)
    reasons += comparison_reasons(file, results)
    depth = results.thickness_nm
    if depth is not None and depth.low == depth.high:
        reasons.append(reason("thickness-given", "thickness_nm"))
    if depth is not None and results.rate_nm_min is None and file.content.layer[built.main[0][1]].deposited:
        reasons.append(reason("rate-not-determined", "rate_nm_min"))
    limit_nm = source.continuous_above_nm if source is not None else None
    if limit_nm is not None and depth is not None and depth.value is not None and depth.value < limit_nm:
        reasons.append(reason("not-a-continuous-film", "thickness_nm", thickness_nm=depth.value))
    if difference is not None and difference > LARGEST_TMM_DIFFERENCE:
        reasons.append(reason("not-crosschecked", difference=difference))
    reasons.sort(key=lambda one: -ORDER.index(TABLE[one.code].allows))
    return reasons, best_answer([one.code for one in reasons])


def foil_reasons(file: RunFile, built: Built) -> list[Reason]:
    """Return that the plate is so thin, or the slit so narrow, that its own fringes are seen."""
    thickness_mm, slit_nm = file.content.substrate.thickness_mm, file.content.instrument.slit_nm
    plate = built.plates[0]
    index = float(np.interp(FRINGE_AT_NM, plate.wavelength_nm, plate.index))
    fringe_nm = FRINGE_AT_NM**2 / (2e6 * index * thickness_mm)
    if thickness_mm >= THIN_SUBSTRATE_MM and (slit_nm is None or fringe_nm <= FRINGE_PER_SLIT * slit_nm):
        return []
    return [reason("foil-substrate", thickness_mm=thickness_mm, fringe_nm=fringe_nm)]


def _scale_sigmas(file: RunFile) -> tuple[float, float]:
    """Return the trusted scale errors of R and T."""
    return file.content.instrument.scale_sigma_R, file.content.instrument.scale_sigma_T


def quantity_reasons(results: Results, laws: tuple[str, ...], scans: list[Scan]) -> list[Reason]:
    """Return why a quantity that the film's law could give is left open."""
    reasons = []
    longest = max(float(scan.wavelength_nm[-1]) for scan in scans if scan.coated)
    if "drude" in laws:
        if results.plasma_energy_eV is None:
            reasons.append(reason("carriers-not-determined", "plasma_energy_eV", longest_nm=longest))
        elif results.resistivity_ohm_cm is None:
            reasons.append(reason("damping-not-determined", "resistivity_ohm_cm"))
    if results.plasma_energy_eV is not None and results.carrier_density_cm3 is None:
        reasons.append(reason("mass-not-known", "carrier_density_cm3"))
    for name in ("energy_at_1e4_eV", "gap_direct_eV"):
        if "tauc-lorentz" in laws and getattr(results, name) is None:
            reasons.append(reason("gap-not-determined", name))
    if results.gap_direct_eV is not None and results.gap_direct_eV.value is None:
        reasons.append(reason("no-linear-part", "gap_direct_eV"))
    return reasons


def comparison_reasons(file: RunFile, results: Results) -> list[Reason]:
    """Return what other measurements of the run say beside the optical ones."""
    reasons = []
    probes, step_nm = file.content.electrical, file.content.run.step_nm
    optical = results.sheet_resistance_ohm
    if probes.sheet_resistance_ohm is not None and optical is not None and optical.value and optical.sigma:
        spread = float(np.hypot(optical.sigma, probes.sheet_resistance_sigma or 0.0))
        sigmas = abs(probes.sheet_resistance_ohm - optical.value) / spread
        reasons.append(
            reason("four-point-compared", "sheet_resistance_ohm", probe=probes.sheet_resistance_ohm, sigmas=sigmas)
        )
    top = results.top_nm
    if step_nm is not None and top is not None and top.value:
        reasons.append(
            reason("step-height-compared", "top_nm", step_nm=step_nm, percent=100 * (step_nm / top.value - 1))
        )
    plasma = results.plasma_energy_eV
    if probes.hall_density_cm3 is not None and plasma is not None and plasma.value:
        mass = probes.hall_density_cm3 / carrier_density_cm3(plasma.value, 1.0)
        reasons.append(reason("hall-mass", "carrier_density_cm3", mass=mass))
    return reasons


def fit_reasons(outcome: Outcome, fits: list[Reading]) -> list[Reason]:
    """Return what the fit's quality and its rivals say."""
    reasons = []
    worst = max(fits, key=lambda fit: fit.rms)
    chi2_per_point = sum(fit.chi2 for fit in fits) / sum(fit.fitted.size for fit in fits)
    if worst.rms > POOR_RMS:
        reasons.append(reason("poor-fit", rms=worst.rms))
    elif chi2_per_point > STRUCTURE_GROWTH:
        reasons.append(reason("residual-structure", times=chi2_per_point**0.5))
    if outcome.freedom.bands and outcome.freedom.size >= 1.0:
        reasons.append(reason("law-does-not-hold"))
    for rival in outcome.rivals:
        if rival.delta_bic < RIVAL_BIC:
            reasons.append(
                reason("rival-thickness", "thickness_nm", rival=rival.thickness_nm, delta_bic=rival.delta_bic)
            )
    return reasons


def parameter_reasons(solution: Solution) -> list[Reason]:
    """Return what single parameters say: nuisances far from what is trusted, laws on a bound."""
    instrument: list[str] = []
    plate: list[str] = []
    reasons: list[Reason] = []
    for index in solution.problem.free:
        p, value = solution.problem.parameters[index], float(solution.values[index])
        scope, name = p.name.partition(".")[0], p.name.rpartition(".")[2]
        if name.startswith(WATCHED) and p.sigma is not None:
            expected = p.expected if p.expected is not None else p.start
            sigmas = abs(value - expected) / p.sigma
            if sigmas > NUISANCE_SIGMAS:
                (instrument if scope == "instrument" else plate).append(f"{name} = {value:.4g} ({sigmas:.1f} sigma)")
        elif scope in ("layer", "material") and ".correction." not in p.name:
            label = p.name.partition("/")[2] or p.name
            expected = p.expected if p.expected is not None else p.start
            sigmas = abs(value - expected) / p.sigma if p.sigma else 0.0
            if sigmas > NUISANCE_SIGMAS:
                reasons.append(reason("far-from-expected", parameter=label, value=value, sigmas=sigmas))
            if _on_bound(p, value):
                bound = p.low if value - p.low < p.high - value else p.high
                reasons.append(reason("at-a-bound", parameter=label, bound=bound))
    reasons += product_reasons(solution)
    if instrument:
        reasons.append(reason("nuisance-far-off", nuisances=", ".join(instrument)))
    if plate:
        reasons.append(reason("substrate-mismatch", material="what was declared", what=", ".join(plate)))
    return reasons


def product_reasons(solution: Solution) -> list[Reason]:
    """Return that an oscillator wider than twice its energy is known by its strength alone."""
    reasons = []
    for layer in solution.problem.runs[0].layers:
        stem = f"layer.{solution.problem.runs[0].run}/{layer.name}.tauc-lorentz"
        if stem + ".width_eV" in solution.problem.names:
            amplitude, peak, width = (solution.value(f"{stem}.{n}_eV") for n in ("amplitude", "peak", "width"))
            if width > 2.0 * peak:
                label = f"{layer.name}.tauc-lorentz"
                reasons.append(
                    reason(
                        "law-not-determined", parameter=label, product="amplitude x peak, eV2", value=amplitude * peak
                    )
                )
    return reasons


def _on_bound(parameter: Parameter, value: float) -> bool:
    """Say whether a value ended on one of its bounds."""
    span = parameter.high - parameter.low
    return bool(np.isfinite(span)) and min(value - parameter.low, parameter.high - value) < BOUND_SHARE * span


def scan_reasons(scans: list[Scan], scale_sigma: float) -> list[Reason]:
    """Return what the measured numbers say by themselves: R + T above 1, an opaque film."""
    reasons = []
    coated = [scan for scan in scans if scan.coated and scan.beam.angle_deg <= NEAR_NORMAL_DEG]
    transmitted = [scan for scan in coated if scan.beam.quantity == "T"]
    reflected = [scan for scan in coated if scan.beam.quantity == "R" and scan.beam.side == "film"]
    for t in transmitted[:1]:
        for r in reflected[:1]:
            common = t.wavelength_nm[(t.wavelength_nm >= r.wavelength_nm[0]) & (t.wavelength_nm <= r.wavelength_nm[-1])]
            total = np.interp(common, t.wavelength_nm, t.values) + np.interp(common, r.wavelength_nm, r.values)
            noise = float(np.hypot(t.sigma[0], r.sigma[0]))
            excess = total - 1 - SUM_SIGMAS * (scale_sigma + noise)
            if common.size and excess.max() > 0:
                at = int(np.argmax(excess))
                reasons.append(reason("sum-above-one", excess=float(total[at] - 1), wavelength_nm=float(common[at])))
    return reasons


def thickness_reasons(
    thickness: Quantity | None, expectation: tuple[float, float] | None, scans: list[Scan]
) -> list[Reason]:
    """Return what the thickness's own interval says."""
    reasons = []
    transmitted = [scan for scan in scans if scan.coated and scan.beam.quantity == "T"]
    if transmitted:
        highest = max(float(np.max(scan.values)) for scan in transmitted)
        if highest < OPAQUE_TRANSMITTANCE:
            reasons.append(reason("nearly-opaque", "thickness_nm", transmittance=max(highest, 1e-4)))
    if thickness is None:
        reasons.append(reason("thickness-not-determined", "thickness_nm"))
    elif expectation is not None and (thickness.sigma or 0.0) > COUPLED_RELATIVE_SIGMA * (thickness.value or 1.0):
        reasons.append(reason("thickness-index-coupled", "thickness_nm", index=expectation[0], sigma=expectation[1]))
    if thickness is not None and thickness.value and (thickness.sigma or 0.0) > POOR_RELATIVE_SIGMA * thickness.value:
        percent = 100 * (thickness.sigma or 0.0) / thickness.value
        reasons.append(reason("thickness-poorly-known", "thickness_nm", percent=percent))
    return reasons


def index_reasons(
    thickness: Quantity | None, index_550: Quantity | None, expectation: tuple[float, float] | None
) -> list[Reason]:
    """Return that the film's index ended far from what its material leads one to expect.

    Where index and thickness trade off, an unlikely index is an unlikely thickness: less of it is borne.
    """
    if index_550 is None or index_550.value is None or expectation is None:
        return []
    sigmas = abs(index_550.value - expectation[0]) / expectation[1]
    loose = thickness is not None and (thickness.sigma or 0.0) > LOOSE_RELATIVE_SIGMA * (thickness.value or 1.0)
    if sigmas <= (UNLIKELY_SIGMAS if loose else NUISANCE_SIGMAS):
        return []
    return [reason("far-from-expected", "index_550", parameter="index at 550 nm", value=index_550.value, sigmas=sigmas)]
