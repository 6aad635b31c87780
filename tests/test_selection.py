"""Selectors resolved on a small mesh whose faces are known."""

import numpy as np
import pytest
from modewright.geometry import kernel
from modewright.geometry.errors import InputError
from modewright.geometry.selection import face_names, matches, select, triangle_distances
from modewright.geometry.selector import ByName, InBox, Near, OnPlane
from modewright.geometry.solid import Circle, Extrusion, Line, Patch, Profile, Solid

PAD = Patch(name="pad", face="top", low=(2, -1), high=(4, 1))


@pytest.fixture(scope="module")
def bar():
    corners = [(-2, -1), (2, -1), (2, 1), (-2, 1)]
    names = ["bottom", "left", "top", "right"]
    outer = tuple(
        Line(start=a, end=b, face=n)
        for a, b, n in zip(corners, [*corners[1:], corners[0]], names, strict=True)
    )
    body = Extrusion(
        profile=Profile(outer=outer, u=(0, 1, 0), v=(0, 0, 1)),
        vector=(20, 0, 0),
        start="root",
        end="tip",
    )
    solid = Solid(body=body, faces=("root", "tip", "top", "bottom", "left", "right"))
    return kernel.mesh(kernel.Request(solid=solid, size=2.0, patches=(PAD,)))


def test_names_stand_in_the_order_for_people(bar):
    assert face_names(bar) == ("root", "tip", "top", "bottom", "left", "right", "pad")


def test_by_name_and_patch(bar):
    np.testing.assert_array_equal(select(bar, [ByName(name="tip")]), bar.faces["tip"])
    np.testing.assert_array_equal(select(bar, [PAD]), bar.faces["pad"])


def test_several_are_taken_together_once(bar):
    got = select(bar, [ByName(name="tip"), PAD, ByName(name="top"), OnPlane(axis="x", at="max")])
    want = np.union1d(bar.faces["tip"], bar.faces["top"])
    np.testing.assert_array_equal(got, want)
    assert select(bar, []).shape == (0,)


@pytest.mark.parametrize(
    ("axis", "at", "names"),
    [("x", "min", {"root"}), ("y", "max", {"left"}), ("z", "max", {"top", "pad"})],
)
def test_on_plane(bar, axis, at, names):
    assert set(matches(bar, OnPlane(axis=axis, at=at))) == names


def test_in_box_takes_faces_wholly_inside(bar):
    assert matches(bar, InBox(low=(19, -2, -1), high=(21, 2, 1))) == ("tip",)
    assert matches(bar, InBox(low=(1, -2, 0), high=(5, 2, 2))) == ("pad",)


def test_near_takes_the_one_closest_face(bar):
    assert matches(bar, Near(point=(21, 0.3, 0.1))) == ("tip",)
    # The patch is part of the top, and the top is what is meant.
    assert matches(bar, Near(point=(3, 0, 1.5))) == ("top",)
    assert matches(bar, Near(point=(10, 0.2, -0.9))) == ("bottom",)


@pytest.mark.parametrize(
    ("selector", "says"),
    [
        (ByName(name="rooot"), r"did you mean 'root'.*root, tip"),
        (ByName(name="belly"), r"no such face.*allowed: root"),
        (OnPlane(axis="w", at="min"), "plane x, y or z"),
        (InBox(low=(0, 0, 0), high=(1, 1, 1)), r"no face lies wholly in the box.*root, tip"),
        (Near(point=(21, 0, 2)), r"equally near to the faces tip, top"),
        (Near(point=(10, 0, 0)), r"equally near to the faces top, bottom"),
    ],
)
def test_no_match_and_ties_list_the_faces(bar, selector, says):
    with pytest.raises(InputError, match=says):
        select(bar, [selector])


def test_round_bar_has_no_face_in_a_side_plane():
    profile = Profile(
        outer=(Circle(centre=(0, 0), radius=2, face="side"),), u=(0, 1, 0), v=(0, 0, 1)
    )
    body = Extrusion(profile=profile, vector=(10, 0, 0), start="root", end="tip")
    mesh = kernel.mesh(kernel.Request(solid=Solid(body=body), size=2.0))
    with pytest.raises(InputError, match="plane y = max"):
        select(mesh, [OnPlane(axis="y", at="max")])
    # 0.05 mm outside the round face, 0.5 mm inside the end.
    assert matches(mesh, Near(point=(9.5, 2.05, 0))) == ("side",)


def test_distance_from_a_triangle():
    triangle = np.array([[[0, 0, 0], [2, 0, 0], [0, 2, 0]]], float)
    for point, want in (
        ((0.5, 0.5, 3), 3.0),
        ((-1, 1, 0), 1.0),
        ((3, 0, 0), 1.0),
        ((2, 2, 0), 2**0.5),
        ((-3, -4, 0), 5.0),
    ):
        assert triangle_distances(triangle, np.array(point, float))[0] == pytest.approx(want)
