"""Results and records as text for a terminal.

Knows words, digits and layout; computes nothing.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from io import StringIO
from typing import TYPE_CHECKING, Any

from filmfit.report.plain import plain

if TYPE_CHECKING:
    from filmfit.materials import Material
    from filmfit.records.store import RunRecord, RunSummary
    from filmfit.result import Quantity, Result

WIDTH = 160
LARGEST_PLAIN, SMALLEST_PLAIN, MOST_DECIMALS = 1e7, 0.01, 6  # beyond: with an exponent
ANSWERS = {
    "usable": "USABLE: the numbers below may be used",
    "check": "CHECK: a person must look before the numbers are used",
    "unusable": "UNUSABLE: no number of this fit should be used",
}
LABELS = (
    ("thickness_nm", "thickness", "nm"),
    ("top_nm", "glass to outer surface", "nm"),
    ("rate_nm_min", "deposition rate", "nm/min"),
    ("index_550", "refractive index at 550 nm", ""),
    ("gap_tauc_lorentz_eV", "gap parameter (Tauc-Lorentz)", "eV"),
    ("gap_direct_eV", "direct gap ((alpha E)^2)", "eV"),
    ("energy_at_1e4_eV", "energy at alpha = 1e4 /cm", "eV"),
    ("plasma_energy_eV", "plasma energy", "eV"),
    ("carrier_density_cm3", "carrier density", "/cm3"),
    ("mobility_cm2_Vs", "mobility (optical)", "cm2/Vs"),
    ("resistivity_ohm_cm", "resistivity (optical)", "ohm cm"),
    ("sheet_resistance_ohm", "sheet resistance (optical)", "ohm/sq"),
)


def number(value: float, sigma: float | None, beside: float | None = None) -> str:
    """Return a value with as many digits as two digits of its sigma allow.

    Args:
        value: what is written.
        sigma: its standard uncertainty; None or 0 gives four digits.
        beside: the value that it stands beside, whose notation (plain or with an exponent) it takes; default itself.
    """
    if sigma is None or sigma <= 0 or not math.isfinite(sigma):
        return f"{value:.4g}"
    place = math.floor(math.log10(sigma)) - 1
    size = abs(value if beside is None else beside)
    if size >= LARGEST_PLAIN or (size < SMALLEST_PLAIN and place < -MOST_DECIMALS):
        digits = math.floor(math.log10(abs(value))) - place if value else 1
        return f"{value:.{max(1, min(8, digits))}e}"
    return f"{round(value, -place) + 0.0:.{max(0, -place)}f}"  # + 0.0: no minus sign before a zero


def quantity(got: Quantity | None, unit: str) -> str:
    """Return a quantity with its 95 % interval, a bound, or a dash."""
    if got is None:
        return "-"
    tail = f" {unit}" if unit else ""
    if got.value is None:
        if got.low is not None:
            return f"at least {number(got.low, None)}{tail}"
        return f"at most {number(got.high or 0.0, None)}{tail}"
    if got.low is None and got.high is None:
        return f"{number(got.value, got.sigma)}{tail}"
    ends = " to ".join(number(end, got.sigma, got.value) for end in (got.low, got.high) if end is not None)
    return f"{number(got.value, got.sigma)}{tail}   (95 %: {ends})"


def one_line(result: Result) -> str:
    """Return a result on one line."""
    codes = ", ".join(dict.fromkeys(one.code for one in result.reasons))
    depth = quantity(result.results.thickness_nm, "nm")
    return plain(f"{result.run}: {result.answer}, {depth}" + (f"; {codes}" if codes else ""))


def fit_text(result: Result, tail: Sequence[str] = ()) -> str:
    """Return a result as a page of text: the answer and its reasons first.

    Args:
        result: what the fit answered.
        tail: last lines: where it was filed, where the picture is.
    """
    lines = [f"{result.run}   {result.film}   {ANSWERS[result.answer]}"]
    for one in result.reasons:
        lines += [f"  {one.code}: {one.text}", f"      {one.do}"]
    lines.append("")
    if result.answer != "unusable":
        lines += _quantities(result)
        lines += _layers(result)
    if result.alternatives:
        lines.append(
            "other thicknesses the data may mean" if result.answer != "unusable" else "best estimates, not to be used"
        )
        for other in result.alternatives:
            lines.append(
                f"  {other.thickness_nm:.1f} nm   evidence against it {other.delta_bic:.0f} (difference of BIC)"
            )
        lines.append("")
    lines += _instrument(result)
    lines.append("taken for granted")
    lines += [f"  {said}" for said in result.assumptions]
    lines.append("")
    return _page([*lines, _summary(result), *tail])


def _page(lines: Iterable[str]) -> str:
    """Return lines as one text, each of them one line whatever the run file holds."""
    return "\n".join(plain(line) for line in lines)


def _quantities(result: Result) -> list[str]:
    """Return the quantities, one a line, the undetermined ones with the reason's code."""
    missing = {one.quantity: one.code for one in result.reasons if one.quantity}
    lines = []
    for name, label, unit in LABELS:
        got: Quantity | None = getattr(result.results, name)
        if got is None and name not in missing:
            continue
        text = quantity(got, unit) if got is not None else f"not determined: {missing[name]}"
        state = f"   [{result.limits[name]} its limits]" if name in result.limits else ""
        lines.append(f"  {label:<31}{text}{state}")
    return [*lines, ""]


def _layers(result: Result) -> list[str]:
    """Return each layer's law and parameters."""
    lines = []
    for layer in result.layers:
        lines.append(f"layer {layer.name}: {layer.law}, {quantity(layer.thickness_nm, 'nm')}")
        lines += [f"  {name:<31}{quantity(got, '')}" for name, got in layer.parameters.items()]
    return [*lines, ""]


def _instrument(result: Result) -> list[str]:
    """Return the errors of instrument and plate that the fit found, beside what was expected."""
    lines = ["instrument and plate, as the fit found them"]
    for name, got in result.instrument.items():
        lines.append(
            f"  {name:<31}{number(got.value, got.sigma)} +- {_short_sigma(got.sigma)}   (expected {got.expected:g})"
        )
    return [*lines, ""]


def _summary(result: Result) -> str:
    """Return how the fit went, on one line."""
    fit = result.fit
    rms = [
        f"rms {name} {100 * value:.2f} %" for name, value in (("R", fit.rms_R), ("T", fit.rms_T)) if value is not None
    ]
    chi2 = "" if fit.reduced_chi2 is None else f", chi2 {fit.reduced_chi2:.2f} per point"
    return f"{fit.model}: {fit.points} points, {fit.free} free{chi2}, {', '.join(rms)}, {fit.seconds:.1f} s"


def runs_text(runs: Sequence[RunSummary]) -> str:
    """Return a table of runs."""
    if not runs:
        return "no runs"
    rows = [
        (run.id, run.date.isoformat(), run.film, run.chamber, run.source, run.process,
         _short(run.thickness_nm), _short(run.rate_nm_min), run.answer or "-", str(run.fits))
        for run in runs
    ]  # fmt: skip
    heads = ("run", "date", "film", "chamber", "source", "process", "thickness nm", "rate nm/min", "answer", "fits")
    return _table(heads, rows, right=(6, 7, 9))


def run_text(record: RunRecord) -> str:
    """Return everything filed under a run."""
    lines = [f"{record.id}   {record.date.isoformat()}   {record.film}", "", "conditions"]
    lines += [f"  {key} = {value}" for key, value in _flat(record.conditions)]
    for number_, when, changes in record.revisions[1:]:
        lines.append(f"revision {number_}, {when:%Y-%m-%d %H:%M} UTC")
        lines += [f"  {one.key}: {one.old} -> {one.new}" for one in changes]
    for edit in record.edits:
        why = f" because {edit.because}" if edit.because else ""
        said = f"{edit.key} from {edit.old} to {edit.new}{why}"
        lines.append(f"{edit.created:%Y-%m-%d %H:%M} UTC, {edit.who}: {edit.action}, {said}")
    if record.left_out:
        lines.append(f"left out of rates and trends: {record.left_out}")
    rows = [
        (f"{fit.number}{'*' if fit.counts else ''}", str(fit.revision), fit.sample, fit.state,
         f"{fit.created:%Y-%m-%d %H:%M}", fit.answer,
         quantity(fit.thickness_nm, "nm"), _short(fit.rate_nm_min))
        for fit in record.fits
    ]  # fmt: skip
    return f"{_page([*lines, ''])}\n" + _table(
        ("fit", "revision", "sample", "state", "filed (UTC)", "answer", "thickness", "rate nm/min"), rows
    )


def materials_text(found: Sequence[Material]) -> str:
    """Return a table of materials."""
    rows = [
        (one.name, "fixed or fitted" if one.kind == "fixed" and one.laws and one.tables else
         "fixed" if one.kind == "fixed" else "fitted", f"{one.valid_nm[0]:g}-{one.valid_nm[1]:g}", one.description)
        for one in found
    ]  # fmt: skip
    return _table(("material", "in a fit", "valid nm", "what it is"), rows)


def material_text(one: Material) -> str:
    """Return everything the library knows of a material."""
    lines = [
        f"{one.name}: {one.description}",
        f"valid {one.valid_nm[0]:g}-{one.valid_nm[1]:g} nm, origin: {one.origin}",
        f"reference: {one.reference}",
    ]
    if one.laws:
        lines.append(f"laws: {' + '.join(one.laws)}")
        lines += [f"  {name:<31}{p.value:g}   ({p.low:g} to {p.high:g})" for name, p in one.parameters.items()]
    for table in one.tables:
        ends = f"{table.wavelength_nm[0]:g}-{table.wavelength_nm[-1]:g} nm"
        lines.append(f"table: {table.wavelength_nm.size} points, {ends}, {table.reference}")
    for label, expected in (("index at 550 nm", one.index_550), ("effective mass", one.effective_mass)):
        if expected is not None:
            lines.append(f"{label}: {expected.value:g} +- {expected.sigma:g} ({expected.reference})")
    return _page(lines)


def _short(got: Quantity | None) -> str:
    """Return a quantity as value +- sigma."""
    if got is None or got.value is None:
        return "-"
    tail = "" if got.sigma is None else f" +- {_short_sigma(got.sigma)}"
    return f"{number(got.value, got.sigma)}{tail}"


def _short_sigma(sigma: float) -> str:
    """Return a standard uncertainty with its two digits."""
    return number(sigma, sigma)


def _flat(content: Any, key: str = "") -> list[tuple[str, Any]]:
    """Return nested conditions as dotted keys, array elements counted from 1."""
    if isinstance(content, dict):
        return [row for name, value in content.items() for row in _flat(value, f"{key}.{name}" if key else str(name))]
    if isinstance(content, list) and content and isinstance(content[0], dict):
        return [row for at, value in enumerate(content) for row in _flat(value, f"{key}[{at + 1}]")]
    return [(key, content)]


def _table(heads: Sequence[str], rows: Sequence[Sequence[str]], right: Sequence[int] = ()) -> str:
    """Return a plain table; every text is taken as it is, but for control characters."""
    from rich.box import SIMPLE_HEAD
    from rich.console import Console
    from rich.table import Table

    table = Table(box=SIMPLE_HEAD, pad_edge=False, safe_box=True)
    for at, head in enumerate(heads):
        table.add_column(head, justify="right" if at in right else "left", overflow="fold")
    for row in rows:
        table.add_row(*[plain(cell) for cell in row])
    out = StringIO()
    Console(file=out, width=WIDTH, markup=False, highlight=False, emoji=False, color_system=None).print(table)
    return "\n".join(line.rstrip() for line in out.getvalue().strip("\n").splitlines())
