"""The value of any condition or result of a run, by its name.

Knows where names are looked for; does not know what they mean.
"""

from typing import Any

from filmfit.records.series import Deposited
from filmfit.result import Quantity, Results

RATE = "rate_nm_min"


def condition(run: Deposited, name: str) -> float | None:
    """Return a condition of a run: a key of [run], flows_sccm.GAS, a number of [other], "date" in days, or A/B.

    Args:
        run: the run.
        name: for example power_W, flows_sccm.O2, flows_sccm.O2/flows_sccm.Ar, date.
    """
    if "/" in name:
        above, below = (condition(run, part.strip()) for part in name.split("/", 1))
        return None if above is None or not below else above / below
    if name == "date":
        return float(run.date.toordinal())
    table, _, key = name.rpartition(".")
    places: list[Any] = [run.run, run.conditions.get("other", {})]
    if table == "flows_sccm":
        places = [run.run.get("flows_sccm", {})]
    elif table in ("run", "other", "electrical"):
        places = [run.conditions.get(table, {})]
    for place in places:
        value = place.get(key)
        if isinstance(value, int | float) and not isinstance(value, bool):
            return float(value)
    return None


def outcome(run: Deposited, name: str) -> Quantity | None:
    """Return a result of a run: of the fit that counts, else a measured value or a number of the lab's own columns.

    Args:
        run: the run with its whole result.
        name: for example resistivity_ohm_cm, rate_nm_min, step_nm.
    """
    time_s = run.run.get("time_s")
    if name == RATE and run.thickness_nm is not None and time_s:
        value = run.thickness_nm * 60 / time_s
        sigma = None if run.sigma_nm is None else run.sigma_nm * 60 / time_s
        return _single(value) if sigma is None else Quantity.normal(value, sigma)
    found = ((run.result or {}).get("results") or {}).get(name) if run.answer != "unusable" else None
    if found is not None:
        return Quantity(**found)
    measured = run.conditions.get("electrical", {}).get(name)
    value = measured if isinstance(measured, int | float) else condition(run, name)
    return None if value is None else _single(float(value))


def known_results() -> list[str]:
    """Return the names of results."""
    return list(Results.model_fields)


def _single(value: float) -> Quantity:
    """Return a value without a stated uncertainty."""
    return Quantity(value=value, sigma=None, low=None, high=None)
