"""The samples and states of one run side by side: thickness of each, and its difference from the one that counts.

Knows which fit speaks for a piece. The difference is that of two measurements taken as independent: what they share
makes it wider than it need be, never narrower.
"""

from dataclasses import dataclass

import numpy as np

from filmfit.records.store import FitRecord, RunRecord
from filmfit.result import Quantity


@dataclass(frozen=True)
class Piece:
    """A sample in a state: its fit, its thickness, and how much it differs from the piece that counts."""

    sample: str
    state: str
    fit: int
    thickness_nm: Quantity
    difference_nm: Quantity | None


def pieces(record: RunRecord) -> tuple[Piece, ...]:
    """Return a run's pieces that have a thickness, the one that counts first; empty where there is only one."""
    latest: dict[tuple[str, str], FitRecord] = {}
    for fit in record.fits:
        key = (fit.sample, fit.state)
        held = latest.get(key)
        keep = held is not None and (held.counts or (held.answer == "usable" and fit.answer != "usable"))
        if fit.thickness_nm is not None and fit.thickness_nm.value is not None and (fit.counts or not keep):
            latest[key] = fit
    base = next((fit for fit in latest.values() if fit.counts), None)
    if base is None or len(latest) < 2:
        return ()
    ordered = sorted(latest.values(), key=lambda fit: (not fit.counts, fit.number))
    found = []
    for fit in ordered:
        assert fit.thickness_nm is not None
        found.append(
            Piece(fit.sample, fit.state, fit.number, fit.thickness_nm, None if fit.counts else _less(fit, base))
        )
    return tuple(found)


def _less(fit: FitRecord, base: FitRecord) -> Quantity | None:
    """Return the difference of two thicknesses."""
    one, other = fit.thickness_nm, base.thickness_nm
    if one is None or other is None or one.value is None or other.value is None:
        return None
    difference = one.value - other.value
    if one.sigma is None or other.sigma is None:
        return Quantity(value=difference, sigma=None, low=None, high=None)
    return Quantity.normal(difference, float(np.hypot(one.sigma, other.sigma)))
