"""One look for all figures.

Knows colours, sizes and line widths; does not draw.
"""

from types import MappingProxyType
from typing import Any

# Okabe and Ito, Color Universal Design (2008): told apart with any colour vision.
BLUE = "#0072B2"
VERMILION = "#D55E00"
GREEN = "#009E73"
GREY = "#8A8A8A"
INK = "#222222"

QUANTITY_COLOURS = MappingProxyType({("T", "film"): BLUE, ("R", "film"): VERMILION, ("R", "substrate"): GREEN,
                                     ("T", "substrate"): BLUE})  # fmt: skip

# Kinds of line, in order, for curves of one colour.
DASHES = ("-", "--", "-.", ":")

SETTINGS: MappingProxyType[str, Any] = MappingProxyType(
    {
        "font.family": "DejaVu Sans",
        "font.size": 9,
        "axes.edgecolor": INK,
        "axes.labelcolor": INK,
        "axes.linewidth": 0.7,
        "axes.spines.right": False,
        "text.color": INK,
        "xtick.color": INK,
        "ytick.color": INK,
        "lines.linewidth": 1.4,
        "text.parse_math": False,
        "svg.hashsalt": "filmfit",
        "svg.fonttype": "path",
    }
)
