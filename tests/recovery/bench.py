"""A spectrophotometer with faults: R and T of a coated plate by the general-purpose package tmm.

None of filmfit's optics makes the data.
"""

from dataclasses import dataclass

import numpy as np
import tmm

SLIT_NODES = ((-0.5774, 0.25), (0.0, 0.5), (0.5774, 0.25))  # of a triangle of unit half-height width
WEDGE_NODES = ((-0.7746, 5 / 18), (0.0, 8 / 18), (0.7746, 5 / 18))  # Gauss-Legendre


@dataclass(frozen=True)
class Bench:
    """What is wrong with the instrument; `haze` is the share of light scattered at 550 nm."""

    noise: float
    scale_R: float
    scale_T: float
    offset_nm: float
    slit_nm: float
    wedge: float
    haze: float = 0.0

    @classmethod
    def drawn(cls, rng, haze=0.0):
        """Return an ordinary instrument."""
        return cls(
            rng.choice([0.0005, 0.001, 0.002]), 1 + rng.normal(0, 0.005), 1 + rng.normal(0, 0.0025),
            rng.normal(0, 0.3), rng.choice([0.0, 2.0, 5.0]), rng.choice([0.0, 0.01]), haze,
        )  # fmt: skip

    def scan(self, rng, nm, layers, plate, plate_mm, quantity, angle, side="film", back="bare"):
        """Return what is written for R or T, (W,).

        Args:
            layers: (n + ik as a function of nm, thickness in nm) from the substrate up; none for the bare plate.
        """
        nodes = SLIT_NODES if self.slit_nm else ((0.0, 1.0),)
        spreads = WEDGE_NODES if self.wedge and layers else ((0.0, 1.0),)
        total = np.zeros(nm.size)
        for shift, share in nodes:
            x = nm + self.offset_nm + shift * self.slit_nm
            indices = [film(x) for film, _ in layers], plate(x)
            for spread, weight in spreads:
                depths = [d * (1 + spread * self.wedge) for _, d in layers]
                seen = _ideal(x, *indices, depths, plate_mm, quantity, angle, side, back)
                total += share * weight * seen
        scale = self.scale_R if quantity == "R" else self.scale_T
        if layers:
            scale = scale * np.exp(-self.haze * (550 / nm) ** 2 * (1.0 if quantity == "R" else 0.5))
        return scale * total + rng.normal(0, self.noise, nm.size)


def _ideal(nm, films, plate, depths, plate_mm, quantity, angle, side, back):
    seen = np.empty(nm.size)
    theta = np.radians(angle)
    for w, at in enumerate(nm):
        stack = [1.0, *(film[w] for film in reversed(films)), plate[w], plate[w] if back == "blackened" else 1.0]
        sizes = [np.inf, *reversed(depths), plate_mm * 1e6, np.inf]
        kinds = ["i", *("c" for _ in films), "i", "i"]
        if side == "substrate":
            stack, sizes, kinds = stack[::-1], sizes[::-1], kinds[::-1]
        pols = "sp" if angle else "s"
        seen[w] = sum(tmm.inc_tmm(p, stack, sizes, kinds, theta, at)[quantity] for p in pols) / len(pols)
    return seen
