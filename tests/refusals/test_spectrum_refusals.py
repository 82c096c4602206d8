"""What a spectrum file is refused for, in whole sentences."""

import pytest

from filmfit.errors import SpectrumError
from filmfit.spectra.read import check_sum, read_spectrum

ROWS = "".join(f"{x},{0.5 + x / 1e4:.4f}\n" for x in range(400, 500, 10))
TWO = "nm,T (%),R (%)\n" + "".join(f"{x},80.0,9.0\n" for x in range(400, 500, 10))

REFUSED = [
    (b"", None, "w: 'a.csv' is empty; export the spectrum again"),
    (b"\n \n", None, "w: 'a.csv' is empty; export the spectrum again"),
    (b"one line of words\nand another\n", None,
     "w: 'a.csv' holds no table of numbers with at least 5 rows; allowed: a wavelength column and columns of R or T; "
     "export the spectrum as delimited text"),
    (b"nm,T\n400,0.5\n410,0.5\n", None,
     "w: 'a.csv' holds no table of numbers with at least 5 rows; allowed: a wavelength column and columns of R or T; "
     "export the spectrum as delimited text"),
    (b"PK\x03\x04rest", None, "w: 'a.csv' is a workbook: not supported yet; save the sheet as CSV"),
    (b"\xd0\xcf\x11\xe0rest", None, "w: 'a.csv' is a workbook: not supported yet; save the sheet as CSV"),
    (b"##TITLE=scan\n##END=\n", None, "w: 'a.csv' is JCAMP-DX: not supported yet; export it as delimited text"),
    (b"\x00\x01\x02" * 50, None, "w: 'a.csv' is not a text file; export the spectrum as delimited text"),
    (b"\xff\xfe1", None, "w: 'a.csv' says it is utf-16 but is not; export it again"),
    (TWO.replace("T (%)", "S1 (%)").encode(), None,
     "w: 'a.csv' holds 2 spectra; allowed: 'S1 (%)', 'R (%)'; name one as column"),
    (TWO.encode(), "A", "w: no column 'A' in 'a.csv'; allowed: 'T (%)', 'R (%)'"),
    (TWO.encode(), 4, "w: no column 4 in 'a.csv'; allowed: 2 to 3"),
    (TWO.encode(), 1, "w: no column 1 in 'a.csv'; allowed: 2 to 3"),
    (TWO.replace("R (%)", "T").encode(), "T ", "w: 2 columns 'T ' in 'a.csv'; give its number instead"),
    (("x,T\n" + "".join(f"{x},0.5\n" for x in range(100, 108))).encode(), None,
     "w: 'a.csv' does not say the unit of its first column (100 to 107); allowed: nm, um, cm-1 or eV in its heading"),
    (("eV,T\n" + "".join(f"{x},0.5\n" for x in range(-2, 6))).encode(), None,
     "w: 'a.csv' has -2 eV; allowed: positive numbers"),
    (("nm,T\n" + ROWS.replace("0.54", "-0.2")).encode(), None,
     "w: 'a.csv' holds -0.29 as a fraction of 1; allowed: -0.05 to 1.5; check column and unit"),
    (("nm,T (%)\n" + "".join(f"{x},180\n" for x in range(400, 500, 10))).encode(), None,
     "w: 'a.csv' holds 1.8 as a fraction of 1; allowed: -0.05 to 1.5; check column and unit"),
    (("nm,T\n" + "".join(f"{x},--\n" for x in range(400, 500, 10))).encode(), None,
     "w: 'a.csv' has 0 points in column 'T'; allowed: at least 5"),
    (("nm,T\n" + "".join(f"{x},10,{x % 7}\n" for x in range(300, 400, 10))).encode(), None,
     "w: a.csv:2: '300,10,6' under 2 headings is 3 numbers, or 2 with a decimal comma; export it with semicolons or a "
     "decimal point"),
]  # fmt: skip


@pytest.mark.parametrize(("content", "column", "sentence"), REFUSED)
def test_sentence(tmp_path, content, column, sentence):
    path = tmp_path / "a.csv"
    path.write_bytes(content)
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(path, "T", column, "w")
    assert str(caught.value) == sentence


def test_missing_file_and_folder(tmp_path):
    (tmp_path / "scan.csv").write_text(TWO)
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(tmp_path / "scam.csv", "T", None, "w")
    assert str(caught.value) == f"w: no file 'scam.csv' in {tmp_path}; did you mean 'scan.csv'?"
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(tmp_path, "T", None, "w")
    assert str(caught.value) == f"w: '{tmp_path.name}' is a folder; name the file in it"


def pair(tmp_path, reflected, transmitted):
    found = []
    for name, rows in (("R", reflected), ("T", transmitted)):
        path = tmp_path / f"{name}.csv"
        path.write_text(f"nm,{name}\n" + "".join(f"{x},{y}\n" for x, y in rows))
        found.append(read_spectrum(path, name))
    return found


def test_scans_that_do_not_overlap(tmp_path):
    R, T = pair(tmp_path, [(x, 0.1) for x in range(400, 500, 10)], [(x, 0.8) for x in range(600, 700, 10)])
    with pytest.raises(SpectrumError) as caught:
        check_sum(R, T, "w")
    assert str(caught.value) == "w: R (400-490 nm) and T (600-690 nm) do not overlap; measure both over one range"


def test_sum_far_above_one(tmp_path):
    R, T = pair(tmp_path, [(x, 0.3) for x in range(400, 500, 10)], [(x, 0.8) for x in range(400, 500, 10)])
    with pytest.raises(SpectrumError) as caught:
        check_sum(R, T, "w")
    assert str(caught.value) == (
        "w: R + T is above 1.05 on 100 % of the points, up to 1.10; allowed: at most 5 %; check units, columns and the "
        "100 % line"
    )


def test_sum_little_above_one_is_no_refusal(tmp_path):
    R, T = pair(tmp_path, [(x, 0.22) for x in range(400, 500, 10)], [(x, 0.8) for x in range(400, 500, 10)])
    check_sum(R, T, "w")
