"""Reflectance and transmittance against values computed from the closed formulas of the literature.

Formulas: Abeles, Ann. Phys. 12, 596 (1950); Born and Wolf, Principles of Optics, ch. 1.6 (from memory); bare slab:
R = 2r/(1+r), T = (1-r)/(1+r). The numbers were computed from them by an independent matrix code that agrees with the
general-purpose package tmm 0.2.0 to 1.2e-12.
"""

import numpy as np
import pytest

from filmfit.optics.coherent import coherent
from filmfit.optics.thick import plate

TOLERANCE = 1e-9
MGF2_NM = 99.6376811594


def face(wavelength, layers, exit_index, angle, polarization):
    epsilon = np.array([[complex(n) ** 2] for n, _ in layers]).reshape(len(layers), 1)
    thickness = np.array([d for _, d in layers], float)
    found = coherent(
        np.array([wavelength], float), epsilon, thickness, np.array([complex(exit_index) ** 2]), angle, polarization
    )
    return found.R_front[0], found.T[0]


def slab(wavelength, layers, index, substrate_nm, angle, polarization, side="film"):
    epsilon = np.array([[complex(n) ** 2] for n, _ in layers]).reshape(len(layers), 1)
    thickness = np.array([d for _, d in layers], float)
    R, T = plate("RT", np.array([wavelength], float), epsilon, thickness, np.array([complex(index) ** 2]), substrate_nm,
                 angle, polarization, side, "bare")  # fmt: skip
    return R.value[0], T.value[0]


@pytest.mark.parametrize(
    ("wavelength", "angle", "polarization", "R", "T"),
    [
        (400, 0, "s", 0.0220525153, 0.9779474847),
        (550, 0, "s", 0.0126007902, 0.9873992098),
        (700, 0, "s", 0.0159619687, 0.9840380313),
        (400, 45, "s", 0.0419474732, 0.9580525268),
        (550, 45, "s", 0.0400477184, 0.9599522816),
        (550, 45, "p", 0.0013557393, 0.9986442607),
    ],
)
def test_quarter_wave_of_magnesium_fluoride_on_glass(wavelength, angle, polarization, R, T):
    found = face(wavelength, [(1.38, MGF2_NM)], 1.52, angle, polarization)
    assert found == pytest.approx((R, T), abs=TOLERANCE)


def test_quarter_wave_on_both_faces_of_a_lossless_slab():
    # the face's R, seen from inside as from outside, summed over the rounds between two such faces: 2 R / (1 + R)
    R = coherent(np.array([550.0]), np.array([[1.38**2 + 0j]]), np.array([MGF2_NM]), np.array([1.52**2 + 0j]), 0.0, "s")
    assert R.R_front == pytest.approx(R.R_rear, abs=1e-12)
    both = R.R_front + R.T**2 * R.R_rear / (1 - R.R_rear**2)
    assert both == pytest.approx(0.0248879723, abs=TOLERANCE)


def test_quarter_wave_formula():
    # R = ((n0 ns - n^2) / (n0 ns + n^2))^2 at the design wavelength, Born and Wolf ch. 1.6
    assert face(550, [(1.38, MGF2_NM)], 1.52, 0, "s")[0] == pytest.approx(
        ((1.52 - 1.38**2) / (1.52 + 1.38**2)) ** 2, abs=1e-12
    )


@pytest.mark.parametrize(
    ("angle", "polarization", "R", "T"),
    [
        (0, "s", 0.0541367486, 0.9458632514),
        (8, "s", 0.0556042644, 0.9443957356),
        (8, "p", 0.0526900035, 0.9473099965),
    ],
)
def test_quarter_wave_on_a_lossless_slab(angle, polarization, R, T):
    assert slab(550, [(1.38, MGF2_NM)], 1.52, 1e6, angle, polarization) == pytest.approx((R, T), abs=TOLERANCE)


ABSORBING = {
    "visible": (550, 1.95 + 0.012j, 1.52 + 5e-7j),
    "infrared": (1500, 0.90 + 0.60j, 1.50 + 2e-6j),
}


@pytest.mark.parametrize(
    ("case", "angle", "polarization", "R_film", "R_glass", "T"),
    [
        ("visible", 0, "s", 0.0856221326, 0.0808698987, 0.8608324330),
        ("visible", 8, "s", 0.0871782657, 0.0823827082, 0.8591010319),
        ("visible", 8, "p", 0.0830973342, 0.0784647144, 0.8632167399),
        ("visible", 45, "s", 0.1704904011, 0.1641588696, 0.7711499940),
        ("visible", 45, "p", 0.0183732915, 0.0168507327, 0.9243093668),
        ("infrared", 0, "s", 0.1531603811, 0.0838142769, 0.5101930055),
        ("infrared", 8, "s", 0.1558152970, 0.0850952975, 0.5073281078),
        ("infrared", 8, "p", 0.1473042423, 0.0822899034, 0.5057010495),
        ("infrared", 45, "s", 0.2602305029, 0.1408993543, 0.4062024639),
        ("infrared", 45, "p", 0.0447805519, 0.0519972903, 0.3941735499),
    ],
)
def test_absorbing_film_on_thick_glass_from_both_sides(case, angle, polarization, R_film, R_glass, T):
    wavelength, film, glass = ABSORBING[case]
    layers = [(film, 150.0)]
    assert slab(wavelength, layers, glass, 1.1e6, angle, polarization) == pytest.approx((R_film, T), abs=TOLERANCE)
    from_glass = slab(wavelength, layers, glass, 1.1e6, angle, polarization, "substrate")
    assert from_glass == pytest.approx((R_glass, T), abs=TOLERANCE)


@pytest.mark.parametrize(
    ("case", "angle", "polarization", "absorbed"),
    [
        ("visible", 0, "s", 0.0416974269),
        ("visible", 8, "s", 0.0418201429),
        ("visible", 8, "p", 0.0417806660),
        ("visible", 45, "s", 0.0449894635),
        ("visible", 45, "p", 0.0438543697),
        ("infrared", 0, "s", 0.3263725658),
        ("infrared", 8, "s", 0.3265740953),
        ("infrared", 8, "p", 0.3367877550),
        ("infrared", 45, "s", 0.3232680478),
        ("infrared", 45, "p", 0.5525809242),
    ],
)
def test_light_absorbed_in_the_film(case, angle, polarization, absorbed):
    # what neither leaves the film nor comes back, on the way in and on every return from the plate's rear face; in a
    # medium that absorbs, the flux of two opposite waves has a cross term, 2 Im(r) Im(Y) / Re(Y)
    wavelength, film, glass = ABSORBING[case]
    vacuum, plate_epsilon = np.array([float(wavelength)]), np.array([glass**2])
    face_ = coherent(vacuum, np.array([[film**2]]), np.array([150.0]), plate_epsilon, angle, polarization)
    bare = face_.without_layers()
    tau = np.exp(-4 * np.pi * 1.1e6 * np.sqrt(glass**2 - np.sin(np.radians(angle)) ** 2).imag / wavelength)
    upward = face_.T * tau**2 * bare.R_rear / (1 - face_.R_rear * bare.R_rear * tau**2)
    crossed = 2 * face_._rear.imag * face_.exit.Y.imag / face_.exit.Y.real
    lost = (1 - face_.R_front - face_.T) + upward * (1 - face_.R_rear - face_.T + crossed)
    assert lost == pytest.approx(absorbed, abs=TOLERANCE)


@pytest.mark.parametrize(("case", "tau"), [("visible", 0.9875122565), ("infrared", 0.9817381294)])
def test_what_one_passage_of_the_glass_leaves(case, tau):
    wavelength, _, glass = ABSORBING[case]
    (through,) = plate("T", np.array([float(wavelength)]), np.empty((0, 1), complex), np.empty(0),
                       np.array([glass**2]), 1.1e6, 0.0, "s", "film", "index-matched")  # fmt: skip
    assert through.value[0] / face(wavelength, [], glass, 0, "s")[1] == pytest.approx(tau, abs=TOLERANCE)


@pytest.mark.parametrize(
    ("case", "R", "T"), [("visible", 0.0851377999, 0.8611588859), ("infrared", 0.1515597696, 0.5065145787)]
)
def test_unpolarised_light_at_eight_degrees(case, R, T):
    wavelength, film, glass = ABSORBING[case]
    assert slab(wavelength, [(film, 150.0)], glass, 1.1e6, 8, "mean") == pytest.approx((R, T), abs=TOLERANCE)


# silver index near Johnson and Christy, Phys. Rev. B 6, 4370 (1972)
SANDWICH = {
    "visible": (550, 2.0 + 0.01j, 0.06 + 3.60j),
    "infrared": (1500, 1.2 + 0.25j, 0.50 + 10.5j),
}


@pytest.mark.parametrize(
    ("case", "angle", "polarization", "R_half", "T_half", "R_slab", "T_slab", "R_glass"),
    [
        ("visible", 0, "s", 0.0002509806, 0.9516495363, 0.0388137703, 0.9111466761, 0.0430140875),
        ("visible", 45, "s", 0.0239242173, 0.9246660740, 0.1067534273, 0.8364486556, 0.1091386599),
        ("visible", 45, "p", 0.0220340420, 0.9304887566, 0.0301374250, 0.9219800546, 0.0319038803),
        ("infrared", 0, "s", 0.7336340503, 0.1716959033, 0.7349274034, 0.1693768531, 0.6962983882),
        ("infrared", 45, "p", 0.5825537862, 0.2162105802, 0.5829935073, 0.2153111965, 0.5596131599),
    ],
)
def test_silver_between_oxides(case, angle, polarization, R_half, T_half, R_slab, T_slab, R_glass):
    wavelength, oxide, silver = SANDWICH[case]
    layers = [(oxide, 40.0), (silver, 10.0), (oxide, 40.0)]
    assert face(wavelength, layers, 1.52, angle, polarization) == pytest.approx((R_half, T_half), abs=TOLERANCE)
    assert slab(wavelength, layers, 1.52, 1e6, angle, polarization) == pytest.approx((R_slab, T_slab), abs=TOLERANCE)
    from_glass = slab(wavelength, layers, 1.52, 1e6, angle, polarization, "substrate")
    assert from_glass[0] == pytest.approx(R_glass, abs=TOLERANCE)


@pytest.mark.parametrize(
    ("index", "R"), [(1.45846, 0.0347757582), (1.50, 0.04), (1.51, 0.0412850590), (1.52, 0.0425799950)]
)
def test_bare_face(index, R):
    assert face(550, [], index, 0, "s") == pytest.approx((R, 1 - R), abs=TOLERANCE)


@pytest.mark.parametrize(
    ("index", "R", "T"),
    [
        (1.45846, 0.0672140952, 0.9327859048),
        (1.50, 0.0769230769, 0.9230769231),
        (1.51, 0.0792963629, 0.9207036371),
        (1.52, 0.0816819720, 0.9183180280),
    ],
)
def test_bare_lossless_slab(index, R, T):
    assert slab(550, [], index, 1e6, 0, "s") == pytest.approx((R, T), abs=TOLERANCE)


@pytest.mark.parametrize(("tau", "R", "T"), [(0.95, 0.0778632807, 0.8722476568), (0.50, 0.0523421905, 0.4585343701)])
def test_bare_absorbing_slab(tau, R, T):
    # k small enough that the faces' own reflectance does not change: tau = exp(-4 pi k d / lambda)
    thickness_nm = 1e9
    k = -np.log(tau) * 550 / (4 * np.pi * thickness_nm)
    assert slab(550, [], 1.52 + 1j * k, thickness_nm, 0, "s") == pytest.approx((R, T), abs=TOLERANCE)


@pytest.mark.parametrize(
    ("polarization", "R", "T"), [("s", 0.1764023620, 0.8235976380), ("p", 0.0185411136, 0.9814588864)]
)
def test_bare_slab_at_45_degrees(polarization, R, T):
    assert slab(550, [], 1.52, 1e6, 45, polarization) == pytest.approx((R, T), abs=TOLERANCE)


def test_brewster_angle():
    assert slab(550, [], 1.52, 1e6, np.degrees(np.arctan(1.52)), "p")[0] == pytest.approx(0.0, abs=1e-12)


@pytest.mark.parametrize(("index", "T"), [(1.95 + 0.01j, 0.7110529890), (3.2 + 0.1j, 0.0606518260)])
def test_swanepoels_transmittance(index, T):
    # Swanepoel, J. Phys. E 16, 1214 (1983), eq. 4 (from memory): s = 1.51, d = 1000 nm, 550 nm
    assert slab(550, [(index, 1000.0)], 1.51, 1e6, 0, "s")[1] == pytest.approx(T, abs=TOLERANCE)
