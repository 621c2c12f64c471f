"""Surfaces as meshes for other programs: PLY and OBJ, with the value at every vertex.

Vertices are in part axes; their distances from the origin are in the unit of the quantity that
is drawn (slowness in s/km for quantities that colour the slowness surface). Vertices where the
quantity is not defined are left out, with the triangles that touch them.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional.quantities import Quantity, quantity
from core.directional.sphere import sphere_mesh
from core.errors import InputError
from core.files.origin import Origin, origin_lines
from core.files.tables import SHEETS

LEVELS = {4: "2,562 vertices", 5: "10,242 vertices", 6: "40,962 vertices"}


@dataclass(frozen=True, eq=False)
class Mesh:
    """A surface ready to be written.

    Attributes
    ----------
    places, normals : ndarray, shape (N, 3)
        Part axes; unit normals, outward.
    values : ndarray, shape (N,)
        In the unit of the quantity; NaN where only the value is not defined.
    sheets : ndarray of int, shape (N,)
        0, 1, 2 from the fastest.
    triangles : ndarray of int, shape (M, 3)
        Counter-clockwise from outside.
    """

    places: FloatArray
    normals: FloatArray
    values: FloatArray
    sheets: IntArray
    triangles: IntArray


def surface_mesh(origin: Origin, key: str, level: int = 5) -> Mesh:
    """Return the surface of a quantity, all its sheets in one mesh.

    Raises
    ------
    InputError
        For an unknown quantity, waves without a density, or one defined nowhere.
    """
    entry = quantity(key)
    if entry.wave and origin.specimen.density is None:
        raise InputError(f"{entry.name} wants a density, and {origin.specimen.name} has none.",
                         "Add “density_kg_m3” to the specimen.", "density")
    mesh = sphere_mesh(level)
    parts = [_sheet(rows.astype(np.float64), mesh.triangles.astype(np.intp))
             for rows in entry.surface(origin.medium, mesh)]
    counts = [len(places) for places, *_ in parts]
    if not sum(counts):
        raise InputError(f"{entry.name} is not defined in any direction.", where="quantity")
    first = np.concatenate([[0], np.cumsum(counts)[:-1]])
    return Mesh(
        np.concatenate([part[0] for part in parts]),
        np.concatenate([part[1] for part in parts]),
        np.concatenate([part[2] for part in parts]),
        np.repeat(np.arange(len(parts)), counts),
        np.concatenate([part[3] + start for part, start in zip(parts, first, strict=True)]))


def _sheet(rows: FloatArray, triangles: IntArray) -> tuple[FloatArray, FloatArray, FloatArray,
                                                           IntArray]:
    """Return places, unit normals, values and triangles of one sheet, where it is defined."""
    defined: BoolArray = np.logical_and.reduce(np.isfinite(rows[:6]), axis=0)
    kept = triangles[defined[triangles].all(axis=1)]
    number = np.cumsum(defined) - 1
    normals = rows[3:6, defined]
    return (rows[:3, defined].T, (normals / np.linalg.norm(normals, axis=0)).T,
            rows[6, defined], number[kept])


def ply_text(origin: Origin, key: str, level: int = 5) -> str:
    """Return the surface of a quantity as a PLY file in plain text.

    Vertex properties: x y z, nx ny nz, value, and sheet (0 the fastest) where there are three.
    """
    entry, mesh = quantity(key), surface_mesh(origin, key, level)
    properties = ["x", "y", "z", "nx", "ny", "nz", "value"]
    head = ["ply", "format ascii 1.0", *origin_lines([origin], "comment"),
            *(f"comment {line}" for line in _unit_lines(entry)),
            f"element vertex {len(mesh.places)}",
            *(f"property float {name}" for name in properties)]
    if entry.sheets == 3:
        head.append("property uchar sheet")
    head += [f"element face {len(mesh.triangles)}", "property list uchar int vertex_indices",
             "end_header"]
    table = np.column_stack([mesh.places, mesh.normals, mesh.values])
    rows = [" ".join(map(_float_text, row)) for row in table.tolist()]
    if entry.sheets == 3:
        rows = [f"{row} {sheet}" for row, sheet in zip(rows, mesh.sheets.tolist(), strict=True)]
    faces = [f"3 {a} {b} {c}" for a, b, c in mesh.triangles.tolist()]
    return "\n".join([*head, *rows, *faces]) + "\n"


def obj_text(origin: Origin, key: str, level: int = 5) -> str:
    """Return the surface of a quantity as an OBJ file.

    The value of a vertex is the first coordinate of its texture point (vt), in the unit of the
    quantity; a sheet is a group.
    """
    entry, mesh = quantity(key), surface_mesh(origin, key, level)
    lines = [*origin_lines([origin], "#"), *(f"# {line}" for line in _unit_lines(entry)),
             "# vt: the value at the vertex, then 0"]
    lines += ["v " + " ".join(map(_float_text, row)) for row in mesh.places.tolist()]
    lines += [f"vt {_float_text(value)} 0" for value in mesh.values.tolist()]
    lines += ["vn " + " ".join(map(_float_text, row)) for row in mesh.normals.tolist()]
    owner = mesh.sheets[mesh.triangles[:, 0]]
    for sheet in range(entry.sheets):
        lines.append(f"g {entry.key}{f'_{SHEETS[sheet]}' if entry.sheets == 3 else ''}")
        lines += ["f " + " ".join(f"{k}/{k}/{k}" for k in corners)
                  for corners in (mesh.triangles[owner == sheet] + 1).tolist()]
    return "\n".join(lines) + "\n"


MESHES: Mapping[str, tuple[str, Callable[[Origin, str, int], str]]] = {
    ".ply": ("PLY, a value at every vertex", ply_text),
    ".obj": ("OBJ, values as texture coordinates", obj_text),
}
"""Forms of a mesh by file suffix: words and writer."""


def _unit_lines(entry: Quantity) -> list[str]:
    unit = entry.unit or "a pure number"
    length = "s/km" if entry.shape == "slowness" else unit
    return [f"quantity: {entry.name} ({entry.key})",
            f"coordinates: part axes X Y Z; length in {length}", f"value: {unit}"]


def _float_text(value: float) -> str:
    """Return the shortest text that reads back to the same single-precision number."""
    return np.format_float_positional(np.float32(value), unique=True, trim="0") if (
        abs(value) < 1e7) else repr(float(np.float32(value)))
