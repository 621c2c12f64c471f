"""Meshes read back by readers of the tests' own, and held against closed forms."""

import numpy as np
import pytest

from core.directional.sphere import sphere_mesh
from core.errors import InputError
from core.files.meshes import MESHES, obj_text, ply_text, surface_mesh
from core.files.origin import Origin
from core.state import OrientationChoice
from tests import materials
from tests.core.files.test_tables import C44, cubic_origin, cubic_young, specimen

LEVEL = 3  # 642 vertices


def read_ply(text):
    """Return vertices by property name, faces and comments of an ASCII PLY file."""
    head, _, body = text.partition("end_header\n")
    lines = head.splitlines()
    assert lines[0] == "ply"
    assert lines[1] == "format ascii 1.0"
    counts = {words[1]: int(words[2]) for words in map(str.split, lines)
              if words[0] == "element"}  # fmt: skip
    names = [line.split()[-1] for line in lines if line.startswith("property")
             and " list " not in line]  # fmt: skip
    rows = body.splitlines()
    assert len(rows) == counts["vertex"] + counts["face"]
    table = np.array([row.split() for row in rows[: counts["vertex"]]], dtype=float)
    faces = np.array([row.split() for row in rows[counts["vertex"] :]], dtype=int)
    assert (faces[:, 0] == 3).all()
    comments = [line[8:] for line in lines if line.startswith("comment ")]
    return dict(zip(names, table.T, strict=True)), faces[:, 1:], comments


def read_obj(text):
    """Return vertices, values, normals and faces by group of an OBJ file, indices from 0."""
    found = {"v": [], "vt": [], "vn": []}
    groups, here = {}, None
    for line in text.splitlines():
        word, *rest = line.split()
        if word in found:
            found[word].append([float(x) for x in rest])
        elif word == "g":
            here = groups.setdefault(rest[0], [])
        elif word == "f":
            corners = [[int(x) for x in corner.split("/")] for corner in rest]
            assert all(len(set(corner)) == 1 for corner in corners)
            here.append([corner[0] - 1 for corner in corners])
    return (*(np.array(found[key]) for key in ("v", "vt", "vn")),
            {name: np.array(faces) for name, faces in groups.items()})  # fmt: skip


def is_closed(faces):
    """Tell whether every edge is met once each way, as on a closed surface."""
    edges = np.concatenate([faces[:, [0, 1]], faces[:, [1, 2]], faces[:, [2, 0]]])
    there = {tuple(edge) for edge in edges.tolist()}
    return len(there) == len(edges) and all((b, a) in there for a, b in there)


def volume(places, faces):
    """Return the volume that a closed surface holds; positive when it faces outwards."""
    a, b, c = (places[faces[:, corner]] for corner in range(3))
    return float(np.einsum("ni,ni->", a, np.cross(b, c)) / 6)


def test_ply_holds_the_closed_form_of_youngs_modulus():
    vertex, faces, _ = read_ply(ply_text(cubic_origin(), "young", LEVEL))
    places = np.stack([vertex[axis] for axis in "xyz"])
    radius = np.sqrt((places**2).sum(axis=0))
    assert len(radius) == 642
    assert vertex["value"] == pytest.approx(cubic_young(places / radius), rel=3e-6)
    assert radius == pytest.approx(vertex["value"], rel=3e-6)
    assert is_closed(faces)
    assert volume(places.T, faces) > 0
    normals = np.stack([vertex[f"n{axis}"] for axis in "xyz"])
    assert (normals**2).sum(axis=0) == pytest.approx(np.ones(642), rel=1e-5)
    assert ((normals * places).sum(axis=0) > 0).all()


def test_obj_holds_what_ply_holds():
    vertex, faces, _ = read_ply(ply_text(cubic_origin(), "young", LEVEL))
    places, values, normals, groups = read_obj(obj_text(cubic_origin(), "young", LEVEL))
    assert np.array_equal(places.T, [vertex[axis] for axis in "xyz"])
    assert np.array_equal(values[:, 0], vertex["value"])
    assert np.array_equal(normals.T, [vertex[f"n{axis}"] for axis in "xyz"])
    assert np.array_equal(groups["young"], faces)


def test_written_numbers_are_those_computed_to_the_last_bit():
    mesh = surface_mesh(cubic_origin(OrientationChoice("bunge 10 20 30")), "slowness", LEVEL)
    vertex, _, _ = read_ply(
        ply_text(cubic_origin(OrientationChoice("bunge 10 20 30")), "slowness", LEVEL))
    assert np.array_equal(np.float32(vertex["value"]), np.float32(mesh.values))
    assert np.array_equal(np.float32(vertex["x"]), np.float32(mesh.places[:, 0]))


def test_three_sheets_are_three_closed_parts():
    vertex, faces, _ = read_ply(ply_text(cubic_origin(), "phase", LEVEL))
    sheet = vertex["sheet"].astype(int)
    assert np.bincount(sheet).tolist() == [642] * 3
    for number in range(3):
        own = faces[sheet[faces[:, 0]] == number]
        assert (sheet[own] == number).all()
        assert is_closed(own)
    _, _, _, groups = read_obj(obj_text(cubic_origin(), "phase", LEVEL))
    assert list(groups) == ["phase_fastest", "phase_middle", "phase_slowest"]
    least = np.sqrt(min(C44, 36.0) * 1e9 / 2500.0) / 1e3  # (C11 − C12)/2 = 36
    assert vertex["value"].min() == pytest.approx(least, rel=1e-3)


@pytest.mark.parametrize("suffix", MESHES)
def test_the_head_says_where_from_and_in_which_units(suffix):
    origin = Origin(cubic_origin().specimen, OrientationChoice("axis [1 1 1] 15"), "2031-05-17")
    text = MESHES[suffix][1](origin, "slowness", LEVEL)
    for words in ("test piece", "axis [1 1 1] 15", "2031-05-17", "length in s/km",
                  "value: s/km", "Tricline"):  # fmt: skip
        assert words in text
    coloured = MESHES[suffix][1](origin, "power_flow", LEVEL)
    assert "length in s/km" in coloured
    assert "value: °" in coloured


def test_undefined_parts_are_left_out():
    unstable = Origin(specimen(materials.cubic(100.0, 150.0, 40.0)), OrientationChoice())
    mesh = surface_mesh(unstable, "young", LEVEL)
    assert 0 < len(mesh.places) < 642
    assert np.isfinite(mesh.places).all()
    assert mesh.triangles.max() < len(mesh.places)
    whole = sphere_mesh(LEVEL).triangles
    assert len(mesh.triangles) < len(whole)


def test_nothing_to_draw_is_refused():
    nowhere = Origin(specimen(-materials.isotropic(50.0, 30.0)), OrientationChoice())
    with pytest.raises(InputError, match="not defined in any direction"):
        surface_mesh(nowhere, "young", LEVEL)
    with pytest.raises(InputError, match="wants a density"):
        surface_mesh(cubic_origin(density=None), "slowness", LEVEL)
    with pytest.raises(InputError, match="Did you mean 'young'"):
        surface_mesh(cubic_origin(), "yung", LEVEL)
