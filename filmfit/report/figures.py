"""Pictures of a fit.

Knows matplotlib; draws what it is given and computes nothing but differences to be drawn.
"""

import warnings
from collections.abc import Sequence
from io import BytesIO
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from filmfit.report.plain import plain
from filmfit.report.style import DASHES, GREY, INK, QUANTITY_COLOURS, SETTINGS
from filmfit.report.text import quantity
from filmfit.result import Curve, Result
from filmfit.units import HC_EV_NM

ANSWERS = {
    "usable": "usable",
    "check": "check: a person must look first",
    "unusable": "unusable: no number of this fit should be used",
}
# In the order in which they claim room; a tick too near to one before it is left out.
ENERGY_TICKS_EV = (1.0, 2.0, 3.0, 0.6, 0.8, 4.0, 1.5, 6.0, 5.0, 0.5, 0.4, 0.3, 0.2, 0.1, 0.05, 1.2, 0.7, 2.5, 3.5)
TICK_ROOM = 0.045  # of the width
NOISE_BAND_SIGMAS = 2.0
MANY_POINTS = 2000  # beyond, points are drawn as an image: a picture of megabytes helps nobody
LONGEST_NAME = 40
LABEL_ROOM = 0.055  # height of a label as a fraction of the upper panel


def draw_fit(result: Result, curves: Sequence[Curve], kind: str = "svg") -> bytes:
    """Return a picture: measured and fitted R and T above, what is left over below; the same bytes for the same fit.

    Args:
        result: for the title.
        curves: the spectra beside their fit; at least one.
        kind: "svg", "png" or "pdf".
    """
    coated = [curve for curve in curves if curve.coated]
    with mpl.rc_context({**SETTINGS}), warnings.catch_warnings():  # type: ignore[dict-item] # stubs: literals only
        warnings.filterwarnings("ignore", message="Glyph .* missing")  # a film may be named in any script
        figure = Figure(figsize=(8.0, 5.8), layout="constrained")
        upper, lower = figure.subplots(2, 1, sharex=True, height_ratios=(3, 1.15))
        _spectra(upper, coated, [curve for curve in curves if not curve.coated])
        _residuals(lower, coated)
        _wavelength_and_energy(upper, curves)
        upper.set_title(_title(result), loc="left", fontsize=10, pad=8, linespacing=1.5)
        out = BytesIO()
        metadata = {"Date": None} if kind == "svg" else {"Software": None} if kind == "png" else {"CreationDate": None}
        figure.savefig(out, format=kind, metadata=metadata, dpi=130)
    return out.getvalue()


def _title(result: Result) -> str:
    """Return run and film, and under them thickness and answer; an unusable answer shows no number."""
    names = [one if len(one) <= LONGEST_NAME else f"{one[:LONGEST_NAME]}..." for one in (result.run, result.film)]
    depth = result.results.thickness_nm
    middle = f"{quantity(depth, 'nm')}   " if depth is not None else ""
    return f"{plain('   '.join(names))}\n{middle}{ANSWERS[result.answer]}"


def _spectra(axes: Axes, coated: Sequence[Curve], bare: Sequence[Curve]) -> None:
    """Draw measured points, fitted lines and their labels."""
    places: list[tuple[float, str, str]] = []
    for curve in bare:
        axes.plot(curve.wavelength_nm, curve.measured, color=GREY, linewidth=0.8, zorder=1)
        places.append((float(curve.measured[-1]), f"{curve.quantity}, bare plate", GREY))
    for curve, dashes in zip(coated, _dashes(coated), strict=True):
        colour = QUANTITY_COLOURS[curve.quantity, curve.side]
        axes.plot(curve.wavelength_nm, curve.measured, "o", color=colour, markersize=3.8, alpha=0.3, zorder=2,
                  markeredgewidth=0, rasterized=curve.wavelength_nm.size > MANY_POINTS)  # fmt: skip
        axes.plot(curve.wavelength_nm, curve.fitted, color=colour, linewidth=1.0, linestyle=dashes, zorder=3)
        places.append((float(curve.fitted[-1]), _name(curve, coated), colour))
    top = max(1.0, axes.get_ylim()[1])
    axes.set_ylim(min(-0.02, axes.get_ylim()[0]), 1.09 * top)
    axes.set_yticks(np.arange(0.0, top + 0.01, 0.2))
    _labels(axes, places)
    axes.set_ylabel("reflectance R, transmittance T")
    axes.text(0.008, 0.975, "points: measured     line: fit", transform=axes.transAxes, va="top", fontsize=8.5)


def _same(one: Curve, other: Curve) -> bool:
    """Return whether two curves have the same colour: one quantity from one side."""
    return (one.quantity, one.side) == (other.quantity, other.side)


def _dashes(coated: Sequence[Curve]) -> list[str]:
    """Return each curve's kind of line, which tells curves of one colour apart."""
    counts = [sum(_same(curve, other) for other in coated[:at]) for at, curve in enumerate(coated)]
    return [DASHES[count % len(DASHES)] for count in counts]


def _name(curve: Curve, coated: Sequence[Curve]) -> str:
    """Return a curve's label: quantity and side, and the angle where there are several of them."""
    angle = f", {curve.angle_deg:g} deg" if sum(_same(curve, other) for other in coated) > 1 else ""
    side = f", {curve.side} side" if curve.quantity == "R" or curve.side == "substrate" else ""
    return f"{curve.quantity}{side}{angle}"


def _labels(axes: Axes, places: Sequence[tuple[float, str, str]]) -> None:
    """Write each curve's name at the right edge, pushed apart where two would touch."""
    low, high = axes.get_ylim()
    room = LABEL_ROOM * (high - low)
    at = -np.inf
    for height, label, colour in sorted(places):
        at = max(height, at + room)
        axes.annotate(label, (1.0, at), xycoords=("axes fraction", "data"), xytext=(5, 0), textcoords="offset points",
                      color=colour, va="center", fontsize=9, annotation_clip=False)  # fmt: skip


def _residuals(axes: Axes, coated: Sequence[Curve]) -> None:
    """Draw measured minus fitted in percentage points, with the noise band of two sigmas."""
    for curve, dashes in zip(coated, _dashes(coated), strict=True):
        band = 100 * NOISE_BAND_SIGMAS * curve.sigma
        axes.fill_between(curve.wavelength_nm, -band, band, color=GREY, alpha=0.16, linewidth=0)
        axes.plot(curve.wavelength_nm, 100 * (curve.measured - curve.fitted), linewidth=0.8, linestyle=dashes,
                  color=QUANTITY_COLOURS[curve.quantity, curve.side])  # fmt: skip
    axes.axhline(0, color=INK, linewidth=0.6)
    limit = max(float(np.abs(axes.get_ylim()).max()), 0.05)
    axes.set_ylim(-limit, limit)
    axes.set_ylabel("measured - fit\n(percentage points)")
    axes.set_xlabel("wavelength (nm)")
    axes.annotate(
        "grey band:\n\N{PLUS-MINUS SIGN}2 sigma of\nthe noise", (1.0, 0.0), xycoords=("axes fraction", "data"),
        xytext=(5, 0), textcoords="offset points", va="center", fontsize=8.5, annotation_clip=False,
    )  # fmt: skip


def _wavelength_and_energy(axes: Axes, curves: Sequence[Curve]) -> None:
    """Put photon energy on the upper edge of the wavelengths that were measured."""
    low = min(float(curve.wavelength_nm[0]) for curve in curves)
    high = max(float(curve.wavelength_nm[-1]) for curve in curves)
    margin = 0.012 * (high - low)
    axes.set_xlim(low - margin, high + margin)
    energy = axes.secondary_xaxis("top", functions=(_energy, _energy))
    ticks: list[float] = []
    for tick in ENERGY_TICKS_EV:
        at = HC_EV_NM / tick
        if low <= at <= high and all(abs(at - HC_EV_NM / one) >= TICK_ROOM * (high - low) for one in ticks):
            ticks.append(tick)
    energy.set_xticks(ticks, labels=[f"{tick:g}" for tick in ticks])
    energy.set_xlabel("photon energy (eV)")


def _energy(value: Any) -> Any:
    """Return hc / value: nm to eV and back."""
    return HC_EV_NM / np.maximum(np.asarray(value, float), 1e-9)
