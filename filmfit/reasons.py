"""The one table of reasons: code, sentence, what to do, and the best answer it still allows.

Knows the words; `verdict.py` decides which apply. A sentence's {fields} are filled by the caller.
"""

from typing import Any, NamedTuple

from filmfit.result import Answer, Reason


class Entry(NamedTuple):
    """A row of the table: the sentence, the next step, the best answer left once the reason applies."""

    text: str
    do: str
    allows: Answer


TABLE: dict[str, Entry] = {
    "residual-structure": Entry(
        "the fit misses the measurement by {times:.1f} times its noise, in a pattern: the model is not the film",
        "look at the residuals; declare the layers, roughness or barrier that are there",
        "check",
    ),
    "poor-fit": Entry(
        "the fit misses the measurement by {rms:.3f} rms: no film of this kind describes it",
        "check sample, side, units and the kind of film in the run file",
        "unusable",
    ),
    "rival-thickness": Entry(
        "{rival:.1f} nm describes the data nearly as well (delta BIC {delta_bic:.1f})",
        "measure to longer wavelengths, or state a thickness you can vouch for",
        "check",
    ),
    "at-a-bound": Entry(
        "{parameter} ended on its bound {bound:g}",
        "widen the bound if that is physical, or fix the parameter",
        "usable",
    ),
    "law-does-not-hold": Entry(
        "no law of the kind describes this film: its dielectric function was left nearly free, with narrow bands",
        "name the kind of film it is (like = ...), or confirm the thickness in another way",
        "check",
    ),
    "law-not-determined": Entry(
        "{parameter} lies where only a product of parameters is determined ({product} = {value:.4g})",
        "compare that product between runs, not the single parameters",
        "usable",
    ),
    "outside-material-range": Entry(
        "{material} is known for {low:.0f}-{high:.0f} nm only; points outside were left out",
        "measure the bare plate over the same range, or name a material that covers it",
        "usable",
    ),
    "substrate-mismatch": Entry(
        "the substrate absorbs or reflects unlike {material}: {what}",
        "measure the bare plate on the same instrument and name it in [[substrate.spectrum]]",
        "usable",
    ),
    "nuisance-far-off": Entry(
        "beyond what the instrument is trusted to: {nuisances}",
        "check reference, zero line and sample position; state the instrument's real uncertainty if it is larger",
        "check",
    ),
    "side-may-be-swapped": Entry(
        "the data fit better (delta BIC {delta_bic:.0f}) if R was measured from the other side of the sample",
        "check which side faced the light while R was measured",
        "check",
    ),
    "back-may-be-blackened": Entry(
        "the data fit better (delta BIC {delta_bic:.0f}) if the rear face was not as stated while R was measured",
        "check whether the rear face was blackened, roughened or bare",
        "check",
    ),
    "reference-may-be-a-plate": Entry(
        "the data fit better (delta BIC {delta_bic:.0f}) if T was measured against a bare plate",
        "check the 100 % line: the reference beam must be empty",
        "check",
    ),
    "reflectance-may-be-squared": Entry(
        "the data fit better (delta BIC {delta_bic:.0f}) if R met the sample twice",
        "check the reflectance accessory: some give R squared",
        "check",
    ),
    "sum-above-one": Entry(
        "R + T exceeds 1 by {excess:.3f} at {wavelength_nm:.0f} nm, more than the stated scale errors allow",
        "check the 100 % line and the R standard",
        "check",
    ),
    "nearly-opaque": Entry(
        "the film passes at most {transmittance:.2g} of the light: R and T hardly depend on its thickness",
        "use a thinner witness piece, or a step height",
        "unusable",
    ),
    "thickness-not-determined": Entry(
        "the data do not determine the thickness",
        "measure over a wider range, or a thicker piece",
        "unusable",
    ),
    "thickness-index-coupled": Entry(
        "thickness and index trade off in a film this thin: the index near 550 nm is held by an expectation of "
        "{index:.2f} +- {sigma:.2f}",
        "measure to longer wavelengths or on silica, or fit several thicknesses of one recipe together",
        "usable",
    ),
    "thickness-poorly-known": Entry(
        "the data know the thickness of this film to {percent:.0f} % only (one standard uncertainty)",
        "measure to longer wavelengths or on silica, or fit several thicknesses of one recipe together",
        "check",
    ),
    "carriers-not-determined": Entry(
        "the data end at {longest_nm:.0f} nm, before the free carriers of this film show",
        "measure further into the near infrared",
        "usable",
    ),
    "damping-not-determined": Entry(
        "the data do not determine the damping: mobility, resistivity and sheet resistance are left open",
        "measure further into the near infrared",
        "usable",
    ),
    "gap-not-determined": Entry(
        "the absorption edge lies outside the data",
        "measure further into the ultraviolet, on silica if need be",
        "usable",
    ),
    "no-linear-part": Entry(
        "no linear part of (alpha E)^2 inside the data: the direct gap is a lower bound",
        "measure further into the ultraviolet, on silica if need be",
        "usable",
    ),
    "rate-not-determined": Entry(
        "the run file states no deposition time: the rate is left open",
        "give time_s or time_min",
        "usable",
    ),
    "mass-not-known": Entry(
        "no effective mass is known well enough: carrier density and mobility are left open",
        "state effective_mass and effective_mass_sigma in [electrical]",
        "usable",
    ),
    "thickness-given": Entry(
        "the thickness was given, not measured",
        "leave thickness_nm out, or give it a sigma",
        "usable",
    ),
    "far-from-expected": Entry(
        "{parameter} = {value:.4g} lies {sigmas:.1f} sigma from what was expected of it",
        "check the expectation, and the layers that are declared",
        "check",
    ),
    "four-point-compared": Entry(
        "the four-point probe reads {probe:.4g} ohm, {sigmas:.1f} sigma from the optical value",
        "a higher probe value is usual where grain boundaries or a surface layer hinder direct current",
        "usable",
    ),
    "step-height-compared": Entry(
        "the measured step is {step_nm:.1f} nm, {percent:+.1f} % from the fitted outer surface",
        "beyond a few percent look for a rough or uneven film, or a step in another place",
        "usable",
    ),
    "hall-mass": Entry(
        "with the Hall density the optical plasma energy means an effective mass of {mass:.3f}",
        "compare it with the mass that was used",
        "usable",
    ),
    "not-a-continuous-film": Entry(
        "a silver film of {thickness_nm:.1f} nm may not be continuous: bulk constants do not hold",
        "take the number as a mass-equivalent thickness",
        "check",
    ),
    "not-crosschecked": Entry(
        "the independent transfer-matrix check differs by {difference:.1e}",
        "report this run file: the calculation is not to be trusted",
        "unusable",
    ),
    "foil-substrate": Entry(
        "a substrate of {thickness_mm:g} mm shows fringes of its own, {fringe_nm:.2g} nm apart at 550 nm, which the "
        "fit takes as averaged out",
        "measure with a wider slit",
        "check",
    ),
}

ORDER: tuple[Answer, ...] = ("usable", "check", "unusable")


def reason(code: str, quantity: str | None = None, **fields: Any) -> Reason:
    """Return a reason of the table with its sentence filled in.

    Args:
        code: a key of TABLE.
        quantity: the result it speaks of, if one.
        fields: the values that the sentence names.
    """
    entry = TABLE[code]
    return Reason(code=code, text=entry.text.format(**fields), do=entry.do, quantity=quantity)


def best_answer(codes: list[str]) -> Answer:
    """Return the best answer that all the reasons together still allow."""
    return max((TABLE[code].allows for code in codes), key=ORDER.index, default="usable")
