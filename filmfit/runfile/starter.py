"""The commented run file that `filmfit new` writes.

Knows the keys an engineer needs first; the whole list is in the README.
"""

import re
from datetime import date

TEXT = """\
# A run: one deposition, what was measured on it, and what it was made with.
# Paths are relative to this file. A unit stands in the key's name.
format = 1

[run]
id = "{run_id}"                  # unique in the records
date = {date}
film = "ITO"                     # label for grouping
chamber = "C1"
source = "ITO target 1"          # what the film came from
process = "dc sputter"           # dc | pulsed dc | rf | mf sputter, thermal | e-beam evaporation, pyrolytic, other
time_s = 600                     # shutter open; or time_min
power_W = 300
# pressure_Pa = 0.4              # or pressure_mTorr, pressure_mbar
# substrate_temperature_C = 180
# flows_sccm = {{ Ar = 40.0, O2 = 0.5 }}
# source_energy_kWh = 12.0       # wear of the source so far

[substrate]
thickness_mm = 1.1
material = "soda-lime-glass"     # see 'filmfit materials list'; better: the bare plate as measured, below
back = "bare"                    # bare | blackened | index-matched
# [[substrate.spectrum]]
# file = "bare.csv"
# quantity = "T"
# column = "T"
# angle_deg = 0

[[layer]]                        # from the substrate up
name = "film"
like = "ITO"                     # or model = "tco" | "dielectric" | "metal"; or material = "..." to hold it fixed
# thickness_nm = 200             # a hint for the search, never needed

[[spectrum]]
file = "t.csv"
quantity = "T"
angle_deg = 0

[[spectrum]]
file = "r.csv"
quantity = "R"
angle_deg = 8
side = "film"                    # film | substrate: where the light comes from

# [electrical]
# sheet_resistance_ohm = 12.0    # four-point probe: compared with the optical value
"""


def starter_text(run_id: str, day: date) -> str:
    """Return the starter run file.

    Args:
        run_id: the run's id; what an id cannot hold becomes a '-'.
        day: its date.
    """
    safe = re.sub(r"[^A-Za-z0-9._-]+", "-", run_id).lstrip("._-")[:100]
    return TEXT.format(run_id=safe or "run-1", date=day.isoformat())
