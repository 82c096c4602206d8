"""Single parameters: what a run file says of one, laid over where its material begins.

Knows fixed, expected, bounded and hinted values; does not know where in the problem a parameter stands.
"""

import numpy as np

from filmfit.dispersion.compose import Dispersion
from filmfit.dispersion.law import Parameter as Legal
from filmfit.fit.problem import Parameter
from filmfit.materials import Start, material
from filmfit.runfile.keys import Instrument, Layer, Value

STARTING_MODELS = {"tco": "generic-tco", "dielectric": "generic-dielectric", "metal": "generic-metal"}
LARGEST_PARAMETER = 1e5
SCALE_LOW, SCALE_HIGH = 0.8, 1.2
OFFSET_LIMIT_NM = 3.0
# Errors that no run file states: typical values of the trade (common practice, no source).
SLIT_NM, SLIT_SIGMA_NM, SLIT_LOW_NM, SLIT_HIGH_NM = 2.0, 1.5, 0.05, 10.0
SLIT_STATED_SHARE = 0.2
WEDGE_START, WEDGE_SIGMA, WEDGE_LOW, WEDGE_HIGH = 0.005, 0.01, 1e-4, 0.1
HAZE_SIGMA, HAZE_HIGH = 0.03, 0.5  # free only where the data ask for it (choose.py)
FREE_LAW_BOUNDS = 1e3
THICKNESS_START_NM, THICKNESS_LOW_NM, THICKNESS_HIGH_NM = 100.0, 2.0, 3500.0


# Laws that no generic material uses: ranges of clear films (common practice, no source).
PLAIN_STARTS = {
    "cauchy.a": Start(1.8, 1.0, 4.0),
    "cauchy.b_um2": Start(0.01, -0.1, 0.3),
    "cauchy.c_um4": Start(0.0005, -0.02, 0.05),
    "urbach.k0": Start(0.001, 0.0, 1.0),
    "urbach.edge_eV": Start(3.5, 1.0, 9.0),
    "urbach.width_eV": Start(0.3, 0.03, 3.0),
    "sellmeier.b1": Start(1.0, 0.0, 20.0),
    "sellmeier.b2": Start(0.4, 0.0, 20.0),
    "sellmeier.b3": Start(0.8, 0.0, 20.0),
    "sellmeier.c1_um": Start(0.08, 0.0, 0.25),
    "sellmeier.c2_um": Start(0.12, 0.0, 0.25),
    "sellmeier.c3_um": Start(10.0, 6.0, 60.0),
}


def thickness_parameter(name: str, keys: Layer) -> Parameter:
    """Return a layer's thickness: expected, bounded, fixed, or free with a hint for the search."""
    given = keys.thickness_nm
    free = Start(THICKNESS_START_NM, THICKNESS_LOW_NM, THICKNESS_HIGH_NM)
    if given is None or isinstance(given, float | int):
        hint = THICKNESS_START_NM if given is None else float(given)
        if not free.low <= hint <= free.high and keys.material is None:
            raise ValueError(f"{hint:g} nm is outside {free.low:g} to {free.high:g} nm")
        held = keys.material is not None and given is not None
        return Parameter(name, hint, 0.0 if held else free.low, free.high, vary=not held)
    return law_parameter(name, Start(free.value, 0.0 if given.sigma else free.low, free.high), given)


def law_parameter(name: str, begins: Start, given: float | Value | None, legal: Legal | None = None) -> Parameter:
    """Return a parameter with what the run file says of it over where its law begins.

    Raises:
        ValueError: what the run file says leaves no room.
    """
    if legal is not None and given is not None:
        _refuse_illegal(given, legal)
    if given is None:
        return Parameter(name, begins.value, begins.low, begins.high, begins.value, begins.sigma)
    if isinstance(given, float | int):
        return Parameter(name, float(given), float(given) - 1.0, float(given) + 1.0, vary=False)
    low = begins.low if given.low is None else given.low
    high = begins.high if given.high is None else given.high
    if given.value is not None and given.sigma is None:
        return Parameter(name, given.value, given.value - 1.0, given.value + 1.0, vary=False)
    if low >= high:
        raise ValueError(f"no room between {low:g} and {high:g}")
    start = given.start if given.start is not None else given.value if given.value is not None else begins.value
    inside = float(np.clip(start, low + 1e-6 * (high - low), high - 1e-6 * (high - low)))
    return Parameter(name, inside, low, high, given.value, given.sigma)


def _refuse_illegal(given: float | Value, legal: Legal) -> None:
    """Refuse a number that the law itself does not allow.

    Raises:
        ValueError: with the number and what is allowed.
    """
    stated = [given] if isinstance(given, float | int) else [given.value, given.low, given.high, given.start]
    for number in stated:
        if number is not None and not legal.low <= number <= min(legal.high, LARGEST_PARAMETER):
            raise ValueError(f"{number:g} is outside {legal.low:g} to {min(legal.high, LARGEST_PARAMETER):g}")


def free_starts(dispersion: Dispersion) -> dict[str, Start]:
    """Return starts for a free choice of laws, from the generic materials where they know the parameter."""
    known: dict[str, Start] = dict(PLAIN_STARTS)
    for model in STARTING_MODELS.values():
        known = {**material(model).parameters, **known}
    starts = {}
    for name, parameter in zip(dispersion.names, dispersion.parameters, strict=True):
        stem, _, last = name.rpartition(".")
        plain = f"{stem.rstrip('-0123456789')}.{last}"
        low, high = max(parameter.low, -FREE_LAW_BOUNDS), min(parameter.high, FREE_LAW_BOUNDS)
        starts[name] = known.get(name) or known.get(plain) or Start(float(np.clip(1.0, low, high)), low, high)
    return starts


def hint_nm(layer: Layer) -> float | None:
    """Return the thickness that the user expects of a layer, as a further trial of the search."""
    given = layer.thickness_nm
    if isinstance(given, Value):
        return given.value or given.start
    return None if given is None else float(given)


def instrument_parameters(run_id: str, keys: Instrument) -> tuple[Parameter, ...]:
    """Return the errors of instrument and sample in the order of `InstrumentModel`; one instrument has one set."""
    stem = f"instrument.{keys.id}"
    slit = keys.slit_nm if keys.slit_nm is not None else SLIT_NM
    slit_sigma = SLIT_SIGMA_NM if keys.slit_nm is None else max(SLIT_STATED_SHARE * slit, 0.1)
    return (
        Parameter(f"{stem}.scale_R", 1.0, SCALE_LOW, SCALE_HIGH, 1.0, keys.scale_sigma_R),
        Parameter(f"{stem}.scale_T", 1.0, SCALE_LOW, SCALE_HIGH, 1.0, keys.scale_sigma_T),
        Parameter(f"{stem}.offset_nm", 0.0, -OFFSET_LIMIT_NM, OFFSET_LIMIT_NM, 0.0, keys.offset_sigma_nm),
        Parameter(f"{stem}.slit_nm", max(slit, SLIT_LOW_NM), SLIT_LOW_NM, SLIT_HIGH_NM, slit, slit_sigma),
        Parameter(f"run.{run_id}.wedge", WEDGE_START, WEDGE_LOW, WEDGE_HIGH, 0.0, WEDGE_SIGMA),
        *(
            Parameter(f"run.{run_id}.haze_{one}", 0.0, 0.0, HAZE_HIGH, 0.0, HAZE_SIGMA, vary=False)
            for one in ("R", "T")
        ),
    )
