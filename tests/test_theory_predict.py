from dataclasses import replace

import numpy as np
import pytest
from modewright.fem.modal.material import Material
from modewright.fem.modal.mount import AttachedMass, Hold, Mount
from modewright.fem.modal.theory.beam import beam_frequencies, beam_roots
from modewright.fem.modal.theory.predict import predict
from modewright.fem.modal.theory.support import held_of
from modewright.geometry.anatomy import (
    Anatomy,
    DiscSize,
    Kind,
    PlateSize,
    Region,
    RingSize,
    Role,
)
from modewright.geometry.section import of_rectangle, of_tube
from modewright.geometry.selector import ByName, OnPlane

STEEL = Material(name="steel", youngs_modulus=200e9, poisson_ratio=0.3, density=8000.0)
BAR = Anatomy(
    kind=Kind.BAR,
    length=0.1,
    ends=("root", "tip"),
    sections=of_rectangle([0.0, 0.1], 0.008, 0.002),
)
PLATE = Anatomy(
    kind=Kind.PLATE,
    length=10.0,
    ends=("x_min", "x_max"),
    plate=PlateSize(length=10.0, width=10.0, thickness=0.05),
)


def hertz(anatomy, held, *names, material=STEEL):
    return [found and found[0] for found in predict(anatomy, material, held, names)]


def clamp(*faces):
    return Mount(hold=Hold.CLAMPED, faces=tuple(ByName(name=face) for face in faces))


@pytest.mark.parametrize(
    ("mounts", "held"),
    [
        ((), "free"),
        ((Mount(hold=Hold.FREE),), "free"),
        ((clamp("root"),), "first end clamped"),
        ((clamp("tip"),), "last end clamped"),
        ((clamp("root"), clamp("tip")), "both ends clamped"),
        ((clamp("root", "tip"),), "both ends clamped"),
        ((clamp("root", "top"),), "other"),
        ((Mount(hold=Hold.SLIDING, faces=(ByName(name="root"),)),), "other"),
        ((clamp("root"), Mount(hold=Hold.SPRINGS, faces=(ByName(name="tip"),))), "other"),
        ((Mount(hold=Hold.CLAMPED, faces=(OnPlane(axis="x", at="min"),)),), "other"),
    ],
)
def test_how_mounts_hold_a_bar(mounts, held):
    assert held_of(mounts, BAR) == held


def test_attached_masses_and_bodies_without_ends_are_other():
    assert held_of((), BAR, [AttachedMass(mass=1e-3)]) == "other"
    assert held_of((clamp("root"),), replace(BAR, ends=None)) == "other"
    assert held_of((), replace(BAR, ends=None)) == "free"


def test_slender_bar_is_near_the_slender_formula():
    flat, edge, twist = hertz(
        BAR, "first end clamped", "flatwise bending 1", "edgewise bending 1", "torsion 1"
    )
    slender = beam_frequencies(
        beam_roots("clamped-free", 1), 0.1, 16e-6, 8e-3 * 8e-9 / 12, 200e9, 8000.0
    )[0]
    assert flat == pytest.approx(slender, rel=5e-4)
    assert flat < slender
    assert edge == pytest.approx(4 * slender, rel=1e-2)
    # (1 / 4 L) sqrt(G J / rho I_p), J = 0.280813 b t^3 at b / t = 4, recomputed
    ip = 8e-3 * 2e-3 * (64e-6 + 4e-6) / 12
    j = 0.280813 * 8e-3 * 8e-9
    assert twist == pytest.approx(np.sqrt(200e9 / 2.6 * j / (8000 * ip)) / 0.4, rel=1e-5)


def test_the_text_names_formula_source_and_slender_limit():
    (found,) = predict(BAR, STEEL, "free", ["flatwise bending 2"])
    assert found is not None
    for word in ("Timoshenko", "1921", "Cowper 1966", "Euler-Bernoulli"):
        assert word in found[1]
    assert "varying" not in found[1]
    limit = float(found[1].split("Euler-Bernoulli: ")[1].split(" ")[0])
    assert 1.0 < limit / found[0] < 1.01


def test_the_text_tells_tapers_and_bent_axes():
    x = np.linspace(0.0, 0.1, 65)
    taper = replace(BAR, sections=of_rectangle(x, 0.008, 0.002 - 0.01 * x))
    flush = replace(BAR, sections=of_rectangle(x, 0.008, 0.002 - 0.01 * x, -0.005 * x))
    (a,) = predict(taper, STEEL, "free", ["flatwise bending 1"])
    (b,) = predict(flush, STEEL, "free", ["flatwise bending 1"])
    assert a
    assert b
    assert "varying section" in a[1]
    assert "axis" not in a[1]
    assert "bent axis" in b[1]
    (c,) = predict(flush, STEEL, "free", ["edgewise bending 1"])
    assert c
    assert "straight axis" in c[1]
    assert a[0] == pytest.approx(b[0], rel=1e-4)  # a slope of 1 in 200 hardly matters


def test_names_that_bars_do_not_have_are_null():
    names = [
        "flatwise bending 1, prong 2",
        "crosswise bending 1",
        "flatwise bending 1 #2",
        "mode 1",
        "plate (2,0)",
        "shell (2,0)",
    ]
    assert hertz(BAR, "free", *names) == [None] * len(names)
    assert hertz(BAR, "other", "flatwise bending 1") == [None]


def test_pairs_of_a_square_bar_have_one_value():
    square = replace(BAR, square=True, sections=of_rectangle([0.0, 0.1], 0.003, 0.003))
    a, b = hertz(square, "free", "bending 2 a", "bending 2 b")
    assert a == b is not None


def test_stubby_bars_and_short_waves_are_null():
    stubby = replace(BAR, sections=of_rectangle([0.0, 0.1], 0.01, 0.025))
    assert hertz(stubby, "free", "flatwise bending 1") == [None]
    assert hertz(BAR, "free", "flatwise bending 7", "flatwise bending 8")[1] is None
    assert hertz(BAR, "free", "flatwise bending 7") != [None]


def test_prongs_and_bodies_without_sections_are_null():
    prong = Region(role=Role.PRONG, number=1, low=(0, 0, 0), high=(1, 1, 1))
    assert hertz(replace(BAR, regions=(prong,)), "free", "torsion 1") == [None]
    assert hertz(replace(BAR, sections=None), "free", "torsion 1") == [None]


def test_orthotropic_bars_have_bending_and_axial_but_no_torsion():
    wood = Material(
        name="wood",
        youngs_modulus=(12e9, 1e9, 1e9),
        shear_modulus=(0.8e9, 0.8e9, 0.1e9),
        poisson_ratio=(0.4, 0.4, 0.3),
        density=450.0,
    )
    bend, axial, twist = hertz(
        BAR, "free", "flatwise bending 1", "axial 1", "torsion 1", material=wood
    )
    assert axial == pytest.approx(np.sqrt(12e9 / 450) / 0.2, rel=1e-3)
    assert bend is not None
    assert twist is None
    (text,) = predict(BAR, wood, "free", ["flatwise bending 1"])
    assert "kappa 5/6" in text[1]


@pytest.mark.parametrize(
    ("factor", "material", "ratio"),
    [
        (2.0, STEEL, 0.5),
        (1.0, replace(STEEL, youngs_modulus=4 * 200e9), 2.0),
        (1.0, replace(STEEL, density=4 * 8000.0), 0.5),
    ],
)
def test_scaling_laws(factor, material, ratio):
    area, second = np.pi * 0.002**2, np.pi * 0.002**4 / 4
    ring = RingSize(radius=0.05, area=area, i_axial=second, i_radial=second, torsion=2 * second)
    for anatomy, names in (
        (BAR, ("flatwise bending 2", "edgewise bending 1", "torsion 2", "axial 1")),
        (PLATE, ("plate (1,1)", "plate (2,0)+(0,2)", "plate (2,1)")),
        (
            Anatomy(kind=Kind.DISC, disc=DiscSize(radius=0.1, thickness=0.002)),
            ("disc (2,0) a", "disc (0,1)", "disc (1,1) b"),
        ),
        (
            Anatomy(kind=Kind.RING, ring=ring),
            (
                "ring 2 in-plane a",
                "ring 3 out-of-plane b",
                "ring 0 extensional",
                "ring 1 torsional a",
            ),
        ),
    ):
        before = hertz(anatomy, "free", *names)
        after = hertz(anatomy.scaled(factor), "free", *names, material=material)
        assert None not in before
        assert np.divide(after, before) == pytest.approx(ratio, rel=1e-6)


def test_tubes_bend_like_timoshenko_beams():
    tube = Anatomy(
        kind=Kind.REVOLVED,
        ends=("end_a", "end_b"),
        sections=of_tube([0.0, 0.5], 0.025, 0.022),
        round=True,
    )
    a, b, twist, shell = hertz(
        tube, "free", "bending 1 a", "bending 1 b", "torsion 1", "shell (2,0)"
    )
    second = np.pi / 64 * (0.025**4 - 0.022**4)
    area = np.pi / 4 * (0.025**2 - 0.022**2)
    slender = beam_frequencies(beam_roots("free-free", 1), 0.5, area, second, 200e9, 8000.0)[0]
    assert a == b
    assert 0.98 * slender < a < 0.99 * slender  # length 20 diameters
    assert twist == pytest.approx(np.sqrt(200e9 / 2.6 / 8000.0), rel=1e-9)  # round: exact
    assert shell is None


def test_square_plate_patterns():
    # NAFEMS FV12, converged 3-D values, recomputed
    found = hertz(
        PLATE,
        "free",
        "plate (1,1)",
        "plate (2,0)-(0,2)",
        "plate (2,0)+(0,2)",
        "plate (2,1)",
        "plate (1,2)",
    )
    assert found == pytest.approx([1.6205, 2.3593, 2.9219, 4.187, 4.187], rel=1.5e-3)
    # one order or the other of the two patterns is the same mode
    assert hertz(PLATE, "free", "plate (0,2)-(2,0)") == [found[1]]
    assert hertz(PLATE, "free", "plate (2,0)", "plate in-plane 1") == [None, None]


def test_turned_plate_has_turned_patterns():
    long = replace(PLATE, plate=PlateSize(length=0.3, width=0.2, thickness=0.002))
    wide = replace(PLATE, plate=PlateSize(length=0.2, width=0.3, thickness=0.002))
    a = hertz(long, "free", "plate (2,0)", "plate (0,2)", "plate (2,1)", "plate (1,1)")
    b = hertz(wide, "free", "plate (0,2)", "plate (2,0)", "plate (1,2)", "plate (1,1)")
    assert None not in a
    assert a == pytest.approx(b, rel=1e-6)


def test_cantilever_plate_is_the_same_from_either_end():
    first = predict(PLATE, STEEL, "first end clamped", ["plate (0,0)", "plate (2,0)"])
    last = predict(PLATE, STEEL, "last end clamped", ["plate (0,0)", "plate (2,0)"])
    assert first == last
    assert first[0] is not None
    # lambda^2 = 3.4710, square, nu 0.3, recomputed
    rigidity = 200e9 * 0.05**2 / (12 * 0.91 * 8000.0)
    assert first[0][0] == pytest.approx(3.4710 * np.sqrt(rigidity) / (2 * np.pi * 100), rel=1e-4)
    assert hertz(PLATE, "both ends clamped", "plate (2,0)") == [None]


def test_thick_plates_discs_and_rings_are_null():
    thick = replace(PLATE, plate=PlateSize(length=10.0, width=10.0, thickness=1.1))
    assert hertz(thick, "free", "plate (1,1)") == [None]
    disc = Anatomy(kind=Kind.DISC, disc=DiscSize(radius=0.1, thickness=0.021))
    assert hertz(disc, "free", "disc (2,0)") == [None]
    thin = Anatomy(kind=Kind.DISC, disc=DiscSize(radius=0.1, thickness=0.01))
    assert hertz(thin, "free", "disc (1,0)", "disc (0,0)") == [None, None]
    assert hertz(thin, "free", "disc (2,0)")[0] is not None
    assert hertz(thin, "free", "disc (9,3)") == [None]
    area = 0.01**2
    second = 0.01**4 / 12
    ring = RingSize(radius=0.04, area=area, i_axial=second, i_radial=second, torsion=second)
    assert hertz(Anatomy(kind=Kind.RING, ring=ring), "free", "ring 2 in-plane") == [None]
    thin_ring = replace(ring, radius=0.06)
    names = ("ring 2 in-plane", "ring 3 in-plane", "ring 1 in-plane")
    found = hertz(Anatomy(kind=Kind.RING, ring=thin_ring), "free", *names)
    assert found[0] is not None
    assert found[1:] == [None, None]
