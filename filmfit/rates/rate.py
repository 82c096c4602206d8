"""Deposition rate from a thickness and a time.

Knows one run; does not know its neighbours in the records.
"""

from filmfit.result import Quantity

SECONDS_PER_MINUTE = 60.0


def rate_nm_min(thickness_nm: Quantity, time_s: float) -> Quantity:
    """Return the mean deposition rate in nm/min; the interval scales with the thickness's.

    Args:
        thickness_nm: deposited thickness.
        time_s: time that the shutter was open, > 0.

    Reference: definition; tests/published/test_rate_values.py.

    Holds when: dead time is small against the deposition time.
    """
    per_nm = SECONDS_PER_MINUTE / time_s
    parts = {
        name: None if value is None else value * per_nm
        for name, value in (
            ("value", thickness_nm.value),
            ("sigma", thickness_nm.sigma),
            ("low", thickness_nm.low),
            ("high", thickness_nm.high),
        )
    }
    return Quantity(**parts)
