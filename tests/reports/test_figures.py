"""Pictures: the same bytes each time, every curve named, no label on another, any film name."""

import re
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from filmfit.report.figures import draw_fit
from filmfit.report.style import QUANTITY_COLOURS

# matplotlib writes each text of an SVG as a comment before its outlines
TEXT = re.compile(r"<!-- (?P<text>[^\n]*?) -->\s*<g[^>]*translate\((?P<x>[-\d.]+) (?P<y>[-\d.]+)\)")


def texts(svg):
    return {found["text"]: (float(found["x"]), float(found["y"])) for found in TEXT.finditer(svg.decode())}


@pytest.mark.parametrize("answer", ["usable", "check", "unusable"])
def test_the_same_bytes_twice(made_up, curves, answer):
    first, second = (draw_fit(made_up(answer), curves) for _ in range(2))
    assert first == second
    assert first.startswith(b"<?xml")


def test_the_same_bytes_in_another_process():
    code = (
        "import sys; sys.path.insert(0, sys.argv[1]); import conftest, hashlib; from filmfit.report.figures import draw_fit\n"
        "print(hashlib.sha256(draw_fit(conftest.make_result('check'), conftest.curves.__wrapped__())).hexdigest())"
    )
    sums = {
        subprocess.run([sys.executable, "-c", code, str(Path(__file__).parent)], capture_output=True, text=True,
                       check=True, env={"PYTHONHASHSEED": seed}).stdout
        for seed in ("1", "2")
    }  # fmt: skip
    assert len(sums) == 1


def test_the_answer_and_every_curve_are_named(made_up, curves):
    svg = draw_fit(made_up("usable"), curves).decode()
    for text in ("K2-0417   ITO", "251.30 nm   (95 %: 250.10 to 252.50)   usable", "R, film side", "R, substrate side",
                 "T, bare plate", "wavelength (nm)", "photon energy (eV)", "points: measured     line: fit"):  # fmt: skip
        assert text in svg, text
    assert "percentage points" in svg


def test_an_unusable_answer_shows_no_thickness(made_up, curves):
    svg = draw_fit(made_up("unusable"), curves).decode()
    assert "unusable: no number of this fit should be used" in svg
    assert "251" not in "".join(texts(svg.encode()))


def test_labels_do_not_touch_where_curves_meet(made_up, curves):
    level = [replace(curve, fitted=np.full(120, 0.5), measured=np.full(120, 0.5)) for curve in curves]
    found = texts(draw_fit(made_up("usable"), level))
    heights = sorted(found[name][1] for name in ("T", "R, film side", "R, substrate side", "T, bare plate"))
    assert min(np.diff(heights)) > 10  # points, of a font of 9


@pytest.mark.parametrize(("low", "high"), [(200, 400), (350, 1100), (320, 2200), (300, 25000)])
def test_energies_keep_their_distance(made_up, curves, low, high):
    x = np.linspace(low, high, 120)
    found = texts(draw_fit(made_up("usable"), [replace(curve, wavelength_nm=x) for curve in curves]))
    top = found["photon energy (eV)"][1]
    places = sorted(x for text, (x, y) in found.items() if re.fullmatch(r"[\d.]+", text) and abs(y - top) < 20)
    assert len(places) >= 2
    assert min(np.diff(places)) > 15


def test_several_angles_are_told_apart(made_up, curves):
    several = [curves[0], curves[1], replace(curves[1], angle_deg=45.0)]
    svg = draw_fit(made_up("usable"), several)
    assert {"R, film side, 8 deg", "R, film side, 45 deg", "T"} <= set(texts(svg))
    assert b"stroke-dasharray" in svg
    assert b"stroke-dasharray" not in draw_fit(made_up("usable"), curves)


@pytest.mark.parametrize("film", ["$x^{$", "50 % \\frac", "\u9178\u5316", "a\nb\x1b[2J", "<!-- & -->", "x" * 500])
def test_any_film_name_is_drawn_as_it_is(made_up, curves, film):
    odd = made_up("usable").model_copy(update={"film": film})
    assert draw_fit(odd, curves).endswith(b"</svg>\n")
    assert draw_fit(odd, curves, "png").startswith(b"\x89PNG")


def test_the_picture_of_a_long_scan_stays_small(made_up, curves):
    x = np.linspace(300, 2500, 20000)
    long = [replace(curves[0], wavelength_nm=x, measured=np.full(20000, 0.8), fitted=np.full(20000, 0.8),
                    sigma=np.full(20000, 0.001))]  # fmt: skip
    assert len(draw_fit(made_up("usable"), long)) < 2_000_000


def test_every_kind_of_curve_has_a_colour():
    assert set(QUANTITY_COLOURS) == {(quantity, side) for quantity in "RT" for side in ("film", "substrate")}


def test_other_kinds(made_up, curves):
    assert draw_fit(made_up("check"), curves, "png").startswith(b"\x89PNG")
    assert draw_fit(made_up("check"), curves, "pdf").startswith(b"%PDF")
