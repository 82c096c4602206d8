"""Pictures of a fit.

Knows matplotlib; draws what it is given and computes nothing but differences to be drawn.
"""

from collections.abc import Sequence
from io import BytesIO
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from filmfit.report.style import GREY, INK, QUANTITY_COLOURS, SETTINGS
from filmfit.report.text import quantity
from filmfit.result import Curve, Result
from filmfit.units import HC_EV_NM

ANSWERS = {"usable": "usable", "check": "check: a person must look", "unusable": "unusable"}
ENERGY_TICKS_EV = (0.4, 0.5, 0.6, 0.8, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0)
NOISE_BAND_SIGMAS = 2.0


def draw_fit(result: Result, curves: Sequence[Curve], kind: str = "svg") -> bytes:
    """Return a picture: measured and fitted R and T above, what is left over below.

    Args:
        result: for the title.
        curves: the spectra beside their fit.
        kind: "svg", "png" or "pdf".
    """
    with mpl.rc_context({**SETTINGS}):  # type: ignore[dict-item] # the stubs know the keys as literals only
        figure = Figure(figsize=(8.0, 5.6), layout="constrained")
        upper, lower = figure.subplots(2, 1, sharex=True, height_ratios=(3, 1.15))
        _spectra(upper, [curve for curve in curves if curve.coated], [curve for curve in curves if not curve.coated])
        _residuals(lower, [curve for curve in curves if curve.coated])
        _energy_axis(upper, curves)
        upper.set_title(_title(result), loc="left", fontsize=10, pad=8)
        out = BytesIO()
        metadata = {"Date": None} if kind == "svg" else {"Software": None} if kind == "png" else {"CreationDate": None}
        figure.savefig(out, format=kind, metadata=metadata, dpi=130)
    return out.getvalue()


def _title(result: Result) -> str:
    """Return run, film, thickness and answer; an unusable answer shows no number."""
    depth = result.results.thickness_nm
    middle = f"{quantity(depth, 'nm')}   " if depth is not None else ""
    return f"{result.run}, {result.film}      {middle}{ANSWERS[result.answer]}"


def _spectra(axes: Axes, coated: Sequence[Curve], bare: Sequence[Curve]) -> None:
    """Draw measured points, fitted lines and their labels."""
    for curve in bare:
        axes.plot(curve.wavelength_nm, curve.measured, color=GREY, linewidth=0.8, zorder=1)
    places: list[tuple[float, str, str]] = []
    for curve in bare:
        places.append((float(curve.measured[-1]), f"{curve.quantity} bare plate", GREY))
    for curve in coated:
        colour = QUANTITY_COLOURS[curve.quantity, curve.side]
        axes.plot(curve.wavelength_nm, curve.measured, ".", color=colour, markersize=3.2, alpha=0.55, zorder=2,
                  markeredgewidth=0, rasterized=curve.wavelength_nm.size > 2000)  # fmt: skip
        axes.plot(curve.wavelength_nm, curve.fitted, color=colour, zorder=3)
        side = f", {curve.side} side" if curve.quantity == "R" else ""
        places.append((float(curve.fitted[-1]), f"{curve.quantity}{side}", colour))
    _labels(axes, places, max(float(curve.wavelength_nm[-1]) for curve in (*coated, *bare)))
    axes.set_ylim(min(0.0, axes.get_ylim()[0]), max(1.0, axes.get_ylim()[1]))
    axes.set_ylabel("reflectance, transmittance")
    axes.text(0.005, 0.985, "points: measured   line: fit", transform=axes.transAxes, va="top", fontsize=8, color=INK)


def _labels(axes: Axes, places: list[tuple[float, str, str]], right: float) -> None:
    """Write each curve's name at its right end, pushed apart where two would touch."""
    gap, last = 0.055, -1.0
    for height, label, colour in sorted(places):
        at = max(height, last + gap)
        last = at
        axes.annotate(label, (right, at), xytext=(5, 0), textcoords="offset points", color=colour, va="center",
                      fontsize=8.5, annotation_clip=False)  # fmt: skip


def _residuals(axes: Axes, coated: Sequence[Curve]) -> None:
    """Draw measured minus fitted in percentage points, with the noise band of two sigmas."""
    for curve in coated:
        colour = QUANTITY_COLOURS[curve.quantity, curve.side]
        band = 100 * NOISE_BAND_SIGMAS * curve.sigma
        axes.fill_between(curve.wavelength_nm, -band, band, color=colour, alpha=0.10, linewidth=0)
        axes.plot(curve.wavelength_nm, 100 * (curve.measured - curve.fitted), color=colour, linewidth=0.8)
    axes.axhline(0, color=INK, linewidth=0.6)
    limit = max(float(np.abs(axes.get_ylim()).max()), 0.05)
    axes.set_ylim(-limit, limit)
    axes.set_ylabel("measured - fit\n(% points)")
    axes.set_xlabel("wavelength (nm)")
    axes.text(0.005, 0.04, "band: two sigmas of the noise", transform=axes.transAxes, fontsize=8, color=INK)


def _energy_axis(axes: Axes, curves: Sequence[Curve]) -> None:
    """Put photon energy on the upper edge."""
    low = min(float(curve.wavelength_nm[0]) for curve in curves)
    high = max(float(curve.wavelength_nm[-1]) for curve in curves)
    axes.set_xlim(low - 0.01 * (high - low), high)
    energy = axes.secondary_xaxis("top", functions=(_energy, _energy))
    ticks = [tick for tick in ENERGY_TICKS_EV if low <= HC_EV_NM / tick <= high]
    energy.set_xticks(ticks, labels=[f"{tick:g}" for tick in ticks])
    energy.set_xlabel("photon energy (eV)")


def _energy(value: Any) -> Any:
    """Return hc / value: nm to eV and back."""
    return HC_EV_NM / np.maximum(np.asarray(value, float), 1e-9)
