"""The Tauc-Lorentz law: interband absorption above a gap, and the dispersion that causality demands of it.

Knows one interband transition; does not know the constant epsilon beyond it (constant.py) nor an absorption tail.

The published real part has square roots of 4 E0^2 - C^2 that fail for C > 2 E0, and logarithms that fail at E = Eg.
Here every term is real for every C > 0: the two functions of D = 4 E0^2 - C^2 pass through D = 0 as power series.
"""

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter, stacked

SERIES_BELOW = 0.02  # of |D u^2|, where the closed forms begin to lose digits
SERIES_TERMS = 8


def tauc_lorentz(energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return the Tauc-Lorentz dielectric function, without its constant, and its derivatives.

    epsilon2 = A E0 C (E - Eg)^2 / {[(E^2 - E0^2)^2 + C^2 E^2] E} above Eg, else 0.

    Args:
        energy_eV: (E,), > 0.
        values: amplitude_eV A, peak_eV E0, width_eV C, gap_eV Eg, (4,) or (4, ..., 1).

    Reference: Jellison and Modine, Appl. Phys. Lett. 69, 371 and erratum 2137 (1996);
        tests/published/test_tauc_lorentz_values.py, tests/against/test_kramers_kronig.py.
    """
    A, E0, C, Eg = (np.asarray(value, float) for value in values)
    E2 = energy_eV**2
    above = E2 - E0**2
    per_z4 = 1.0 / (above**2 + (C * energy_eV) ** 2)
    z4_by_E0, z4_by_C = -4.0 * E0 * above, 2.0 * C * E2
    bracket, by_E0, by_C, by_Eg = _bracket(energy_eV, E2, above, E0, C, Eg)
    front = per_z4 / np.pi
    per_A = front * bracket
    over = np.maximum(energy_eV - Eg, 0.0)
    line = E0 * C * over * per_z4 / energy_eV
    absorbed = line * over
    epsilon = A * (per_A + 1j * absorbed)
    A_front = A * front
    gradient = stacked(
        epsilon.shape,
        per_A + 1j * absorbed,
        A_front * by_E0 - epsilon.real * z4_by_E0 * per_z4 + 1j * epsilon.imag * (1.0 / E0 - z4_by_E0 * per_z4),
        A_front * by_C - epsilon.real * z4_by_C * per_z4 + 1j * epsilon.imag * (1.0 / C - z4_by_C * per_z4),
        A_front * by_Eg - 2j * A * line,
    )
    return epsilon, gradient


Scalar = FloatArray  # a number per trial, broadcastable against energy


def _bracket(
    E: FloatArray, E2: FloatArray, above: FloatArray, E0: Scalar, C: Scalar, Eg: Scalar
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Return pi z4 epsilon1 / A and its derivatives to E0, C, Eg (z4 held)."""
    D, S, w = 4 * E0**2 - C**2, E0**2 + Eg**2, C**2 - 2 * E0**2 + 2 * Eg**2
    a, b = E0**2 - Eg**2, C * Eg
    Q = a**2 + b**2
    P = np.pi / 2 + np.arctan(a / b)
    La, La_by_u, La_by_D = _twice_artanh(D, Eg / S)
    M, M_by_w, M_by_C, M_by_D = _arccot(D, w, C)
    aln = (Eg**2 - E0**2) * E2 + (b**2 - E0**2 * (E0**2 + 3 * Eg**2))
    aat = above * S + b**2
    g = E2 - E0**2 + 0.5 * C**2
    logs, logs_by_Eg = _gap_logarithms(E, Eg)
    log_Q = np.log(Q)
    tail = logs - Eg * log_Q
    bracket = (0.5 * C * La / E0) * aln - (P / E0) * aat + (4 * E0 * Eg * M) * g + (E0 * C) * tail

    # derivatives of what does not depend on energy
    La_by_E0 = La_by_u * (-2 * E0 * Eg / S**2) + La_by_D * 8 * E0
    La_by_C = La_by_D * -2 * C
    La_by_Eg = La_by_u * (S - 2 * Eg**2) / S**2
    M_by_E0 = M_by_w * -4 * E0 + M_by_D * 8 * E0
    M_by_C_all = M_by_C + M_by_w * 2 * C + M_by_D * -2 * C
    M_by_Eg = M_by_w * 4 * Eg
    P_by_E0, P_by_C, P_by_Eg = 2 * E0 * b / Q, -a * Eg / Q, -(2 * Eg * b + a * C) / Q
    Q_by_Eg = -4 * Eg * a + 2 * Eg * C**2

    by_E0 = (0.5 * C / E0) * (La_by_E0 - La / E0) * aln
    by_E0 += (0.5 * C * La / E0) * (-2 * E0 * E2 - 4 * E0**3 - 6 * E0 * Eg**2)
    by_E0 += ((P / E0 - P_by_E0) / E0) * aat - P * 2 * (above - S)
    by_E0 += 4 * Eg * (M + E0 * M_by_E0) * g - (8 * E0**2 * Eg * M)
    by_E0 += C * tail - (E0 * C) * (Eg * 4 * E0 * a / Q)

    by_C = (0.5 / E0) * (La + C * La_by_C) * aln + (0.5 * C * La / E0 - P / E0) * (2 * Eg * b)
    by_C += -(P_by_C / E0) * aat + (4 * E0 * Eg) * (M_by_C_all * g + M * C)
    by_C += E0 * tail - (E0 * C) * (Eg * 2 * Eg * b / Q)

    by_Eg = (0.5 * C / E0) * (La_by_Eg * aln + La * (2 * Eg * E2 + (2 * Eg * C**2 - 6 * E0**2 * Eg)))
    by_Eg += -(P_by_Eg / E0) * aat - (P / E0) * (2 * Eg * above + 2 * Eg * C**2)
    by_Eg += (4 * E0) * (M + Eg * M_by_Eg) * g
    by_Eg += (E0 * C) * (logs_by_Eg - log_Q - Eg * Q_by_Eg / Q)
    return bracket, by_E0, by_C, by_Eg


def _gap_logarithms(E: FloatArray, Eg: Scalar) -> tuple[FloatArray, FloatArray]:
    """Return [(E + Eg)^2 ln(E + Eg) - (E - Eg)^2 ln|E - Eg|] / E and its derivative to Eg; finite at E = Eg."""
    total, rest = E + Eg, E - Eg
    log_total = np.log(total)
    log_rest = np.log(np.where(rest == 0, 1.0, np.abs(rest)))
    value = (total**2 * log_total - rest**2 * log_rest) / E
    slope = 2.0 * (total * log_total + rest * log_rest) / E + 2.0
    return value, slope


def _twice_artanh(D: Scalar, u: Scalar) -> tuple[Scalar, Scalar, Scalar]:
    """Return 2 artanh(sqrt(D) u) / sqrt(D) and its derivatives to u and D, for either sign of D."""
    x = D * u**2
    near = np.abs(x) < SERIES_BELOW
    root = np.sqrt(np.where(near, 1.0, np.abs(D)))
    inside = np.where(near, 0.0, root * u)
    closed = np.where(D > 0, np.arctanh(np.where(D > 0, inside, 0.0)), np.arctan(inside)) * 2.0 / root
    series, slope = _odd_series(x)
    by_u = 2.0 / (1.0 - x)
    value = np.where(near, 2.0 * u * series, closed)
    far_slope = (0.5 * u * by_u - 0.5 * value) / np.where(near, 1.0, D)
    return value, by_u, np.where(near, 2.0 * u**3 * slope, far_slope)


def _arccot(D: Scalar, w: Scalar, C: Scalar) -> tuple[Scalar, Scalar, Scalar, Scalar]:
    """Return arccot(w / (sqrt(D) C)) / sqrt(D) and its derivatives to w, C and D, for either sign of D.

    D < 0 means C > 2 E0, where w > 0.
    """
    v = C / np.where(w == 0, np.inf, w)
    x = D * v**2
    near = (np.abs(x) < SERIES_BELOW) & (w > 0)
    root = np.sqrt(np.where(near, 1.0, np.abs(D)))
    cot = np.pi / 2 - np.arctan(np.where(near | (D < 0), 0.0, w / (root * C)))
    inside = np.where(near | (D > 0), 0.0, root * v)
    closed = np.where(D > 0, cot, np.arctanh(inside)) / root
    series, slope = _odd_series(-x)
    value = np.where(near, v * series, closed)
    power = w**2 + D * C**2
    far_slope = 0.5 * (w * C / power - value) / np.where(near, 1.0, D)
    return value, -C / power, w / power, np.where(near, -(v**3) * slope, far_slope)


def _odd_series(x: Scalar) -> tuple[Scalar, Scalar]:
    """Return sum x^j / (2 j + 1) and its derivative: artanh(sqrt x) / sqrt x near 0."""
    safe = np.clip(x, -SERIES_BELOW, SERIES_BELOW)
    value, slope = np.zeros_like(safe), np.zeros_like(safe)
    for j in range(SERIES_TERMS, -1, -1):
        slope = slope * safe + (j + 1) / (2 * j + 3)
        value = value * safe + 1.0 / (2 * j + 1)
    return value, slope


TAUC_LORENTZ = Law(
    "tauc-lorentz",
    "epsilon",
    (
        Parameter("amplitude_eV", 0.0, np.inf, "amplitude A"),
        Parameter("peak_eV", 0.1, np.inf, "peak transition energy E0"),
        Parameter("width_eV", 1e-3, np.inf, "broadening C"),
        Parameter("gap_eV", 1e-3, np.inf, "gap Eg: a curve parameter that moves with the fitted range"),
    ),
    tauc_lorentz,
    causal=True,
    reference="Jellison and Modine, Appl. Phys. Lett. 69, 371 and 2137 (1996)",
)
