"""The job on measured spectra (International Glazing Database, open data): bare plates and a coated one.

The coated plate has an undercoat and a rough surface (common practice for such coatings, no source), so one smooth film
cannot describe it: the answer must say so.
"""

import pytest

from filmfit.jobs.fit import fit_run

HEAD = """format = 1
[run]
id = "{name}"
date = 2026-01-01
film = "{film}"
[substrate]
thickness_mm = {thickness}
"""
BARE = '[[substrate.spectrum]]\nfile = "{file}"\nquantity = "{quantity}"\ncolumn = "{column}"\n'
SCAN = '[[spectrum]]\nfile = "{file}"\nquantity = "{quantity}"\ncolumn = "{column}"\nside = "{side}"\n'


def test_the_coated_plate_is_not_sold_as_one_smooth_film(tmp_path, measured):
    text = HEAD.format(name="coated", film="FTO", thickness=4.7)
    for quantity, column in (("T", "T"), ("R", "R_front")):
        text += BARE.format(file=measured / "bare-4.7mm.csv", quantity=quantity, column=column)
    text += '[[layer]]\nname = "film"\nlike = "FTO"\n'
    for quantity, column, side in (
        ("T", "T", "film"),
        ("R", "R_film_side", "film"),
        ("R", "R_glass_side", "substrate"),
    ):
        text += SCAN.format(file=measured / "fto-coated.csv", quantity=quantity, column=column, side=side)
    path = tmp_path / "run.toml"
    path.write_text(text)
    result = fit_run(path).result
    assert result.answer in ("check", "unusable")
    codes = [one.code for one in result.reasons]
    assert "residual-structure" in codes or "poor-fit" in codes
    # 12.4 ohm at 18 um and 10.6 at 25 um from the same sample's far infrared: R = (1 + 2 Rs/Z0)^-2, Z0 = 376.73 ohm
    # (Frank, Kauer, Koestlin, Thin Solid Films 77, 107 (1981), from memory): the interval must not exclude the order
    sheet = result.results.sheet_resistance_ohm
    assert sheet is None or 5 < sheet.value < 60


@pytest.mark.parametrize(("file", "thickness"), [("bare-3.0mm.csv", 3.0), ("bare-5.7mm.csv", 5.7)])
def test_a_bare_plate_read_as_coated_does_not_become_a_film(tmp_path, measured, file, thickness):
    text = HEAD.format(name="bare", film="none", thickness=thickness)
    for quantity, column in (("T", "T"), ("R", "R_front")):
        text += BARE.format(file=measured / file, quantity=quantity, column=column)
    text += '[[layer]]\nname = "film"\nmodel = "dielectric"\n'
    for quantity, column in (("T", "T"), ("R", "R_front")):
        text += SCAN.format(file=measured / file, quantity=quantity, column=column, side="film")
    path = tmp_path / "run.toml"
    path.write_text(text)
    result = fit_run(path).result
    got = result.results.thickness_nm
    assert result.answer != "usable" or got is None or got.sigma > 0.03 * got.value or got.value < 12
