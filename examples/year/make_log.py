"""Makes the invented log of a year: two chambers, four sources, 300 runs, and the events of that year.

Run it as `python make_log.py FOLDER`; it writes log.csv and names the blunders. It uses no filmfit. Chamber K1
sputters ITO from one target, changed on 2 July, and AZO; chamber K2 evaporates silver and sputters ITO in line. Five
blunders are among the runs: a stuck shutter, a wrong line in the book, a swapped plate.

True values: ITO in K1 grows 16.8 nm/min at 400 W from a new target, falls by 0.3 % of that per kWh, and has a dead time
of 4 s; its rate goes with power to the power 0.97. AZO grows 21.0 nm/min at 500 W and falls by 0.15 % per kWh. Silver
grows 1.2 angstrom/s. In line ITO has 180 nm m/min. The resistivity of ITO is least at 0.55 sccm of oxygen.
"""

import csv
import datetime
import sys
from pathlib import Path

import numpy as np

START = datetime.date(2025, 1, 2)
TARGET_CHANGED = datetime.date(2025, 7, 2)
BLUNDERS = {"K1-0031": 0.82, "K1-0077": 1.21, "K1-0143": 0.85, "K2-0042": 0.8, "K2-0090": 1.15}
HEAD = ("id", "date", "film", "chamber", "source", "process", "time_s", "power_W", "pressure_Pa", "flows_sccm.Ar",
        "flows_sccm.O2", "carrier_speed_m_min", "passes", "source_energy_kWh", "thickness_nm", "thickness_sigma_nm",
        "resistivity_ohm_cm", "operator")  # fmt: skip
OPERATORS = ("day shift", "night shift")


def sputter_k1(rng):
    """Yield the runs of K1: ITO mostly, AZO every fourth, an oxygen series in May."""
    used = {"ITO": 0.0, "AZO": 0.0}
    for number in range(180):
        date = START + datetime.timedelta(days=2 * number)
        film = "AZO" if number % 4 == 3 else "ITO"
        if film == "ITO" and date >= TARGET_CHANGED > date - datetime.timedelta(days=4) and used["ITO"] > 5:
            used["ITO"] = 0.0
        power = 500 if film == "AZO" else (300 if number % 7 == 2 else 400)
        time = (600, 900, 1200)[number % 3]
        oxygen = 0.0 if film == "AZO" else (round(0.2 + 0.1 * (number - 60), 2) if 60 <= number < 70 else 0.6)
        new, drift, dead = (21.0 / 60, -0.0015, 0.0) if film == "AZO" else (16.8 / 60, -0.003, 4.0)
        rate = new * (1 + drift * used[film]) * (1.0 if film == "AZO" else (power / 400) ** 0.97)
        depth = rate * (time - dead) * (1 + 0.005 * rng.standard_normal()) + 0.4 * rng.standard_normal()
        rho = 4.2e-4 * (1 + 2.2 * (oxygen - 0.55) ** 2) * (1 + 0.01 * rng.standard_normal()) if film == "ITO" else 9e-4
        yield {
            "id": f"K1-{number + 1:04d}", "date": date, "film": film, "chamber": "K1", "source": f"{film} target",
            "process": "dc sputter", "time_s": time, "power_W": power, "pressure_Pa": 0.42, "flows_sccm.Ar": 40,
            "flows_sccm.O2": oxygen or "", "source_energy_kWh": round(used[film], 3), "depth": depth,
            "thickness_sigma_nm": 0.4, "resistivity_ohm_cm": f"{rho:.3e}",
        }  # fmt: skip
        used[film] += 4 * power * (time + 120) / 3.6e6 * 3


def chamber_k2(rng):
    """Yield the runs of K2: silver from a boat, and ITO in line."""
    for number in range(120):
        date = START + datetime.timedelta(days=3 * number)
        common = {"id": f"K2-{number + 1:04d}", "date": date, "chamber": "K2", "thickness_sigma_nm": 0.5}
        luck = 1 + 0.008 * rng.standard_normal()
        if number % 2:
            yield {**common, "film": "Ag", "source": "boat 3", "process": "thermal evaporation", "time_s": 90,
                   "depth": 10.8 * luck}  # fmt: skip
        else:
            speed = (1.0, 1.2)[number // 2 % 2]
            yield {**common, "film": "ITO", "source": "ITO cathode", "process": "dc sputter", "power_W": 6000,
                   "carrier_speed_m_min": speed, "passes": 3, "depth": 180.0 * 3 / speed * luck}  # fmt: skip


def main(folder):
    """Write log.csv and print which runs are blunders."""
    rng = np.random.default_rng(20250102)
    with (folder / "log.csv").open("w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, HEAD, lineterminator="\n", restval="")
        writer.writeheader()
        for number, run in enumerate([*sputter_k1(rng), *chamber_k2(rng)]):
            depth = run.pop("depth") * BLUNDERS.get(run["id"], 1.0)
            writer.writerow({**run, "thickness_nm": f"{depth:.2f}", "operator": OPERATORS[number % 2]})
    print("blunders =", " ".join(sorted(BLUNDERS)))


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
