"""Edits that follow what the search for symmetry found: turn to its axes, make it exact.

Pure functions like those of `core.editing.specimen`; the specimen handed in is never changed.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from core.arrays import FloatArray
from core.crystal.cell import UnitCell, axes_matrix, change_of_axes
from core.crystal.directions import nearest_indices
from core.crystal.orientation import orientation_texts
from core.editing import specimen as edits
from core.state import OrientationChoice, Specimen, rotation_of
from core.tensor.symmetry import crystal_class

_DIGITS = 7  # of decimal indices: the axes they say are good to 1e-5 degrees
_ALONG = 0.01  # degrees: axes this near a low-index direction are said by it
_LOW = 4  # largest index of a low-index direction
_SAME = 1e-9  # difference of two rotation matrices that are one


def turn_to(
    specimen: Specimen, rotation: FloatArray, class_key: str, unique_axis: str = "y"
) -> Specimen:
    """Return the specimen in other crystal axes, claiming the class that they are those of.

    Parameters
    ----------
    specimen : Specimen
    rotation : ndarray, shape (3, 3)
        Rows are the new axes in the old ones, v_new = rotation v_old.
    class_key, unique_axis : str
        The class to claim. The numbers are turned, not made exact.

    Notes
    -----
    With a cell, how the new axes follow it is said by two statements with decimal indices, and
    the numbers are turned by exactly what is said.
    """
    if specimen.cell is None:
        turned = edits.turned(specimen, rotation)
    else:
        statement = axes_statement(specimen.cell, specimen.crystal_axes, rotation)
        turned = edits.set_axes(specimen, statement, re_express=True)
    return replace(turned, crystal_class=class_key, unique_axis=unique_axis)


def axes_statement(cell: UnitCell, axes: str, rotation: FloatArray) -> str:
    """Return how axes turned against a convention follow the cell: "z||[1 2 0], y||(…)".

    Parameters
    ----------
    cell : UnitCell
    axes : str
        The convention in which the old axes are.
    rotation : ndarray, shape (3, 3)
        Rows are the new axes in the old ones.
    """
    basis = axes_matrix(cell, axes)
    along, normal = np.linalg.solve(basis, rotation[2]), basis.T @ rotation[1]
    low = [_low_indices(cell, axes, vector) for vector in (rotation[2], rotation[1])]
    z = low[0] or f"[{_decimals(along)}]"
    y = low[1] or f"({_decimals(normal)})"
    return f"z||{z}, y||{y}"


def _low_indices(cell: UnitCell, axes: str, vector: FloatArray) -> str:
    """Return the low-index direction or plane normal that a vector is along; else nothing."""
    frame = Specimen("", (), cell=cell, crystal_axes=axes).frame
    for plane in (False, True):
        near = nearest_indices(vector, frame, largest=_LOW, plane=plane)
        if near.angle_deg < _ALONG:
            return near.text if float(np.dot(near.vector, vector)) > 0 else ""
    return ""


def _decimals(components: FloatArray) -> str:
    scaled = components / np.abs(components).max()
    return " ".join(f"{x + 0.0:.{_DIGITS}f}".rstrip("0").rstrip(".") for x in scaled)


def claim_exactly(specimen: Specimen, class_key: str, unique_axis: str = "y") -> Specimen:
    """Return the specimen with the nearest table of a class, about its axes, and its claim."""
    axis = crystal_class(class_key, unique_axis).unique_axis
    claiming = replace(specimen, crystal_class=class_key, unique_axis=axis or unique_axis)
    return edits.make_exact(claiming)


def kept_part(
    choice: OrientationChoice, old: Specimen, new: Specimen, rotation: FloatArray
) -> OrientationChoice:
    """Return an orientation so that the part stays the same piece of the turned crystal.

    "Part axes = crystal axes" stays as it is, and so does everything that says the same part
    by indices; other words are said anew as a matrix.

    Parameters
    ----------
    choice : OrientationChoice
    old, new : Specimen
        Before and after the crystal axes were turned.
    rotation : ndarray, shape (3, 3)
        v_new = rotation v_old, crystal axes; read where there is no cell to tell it exactly.
    """
    if choice == OrientationChoice():
        return choice
    if old.cell is not None and new.cell == old.cell:
        rotation = change_of_axes(old.cell, old.crystal_axes, new.crystal_axes)
    wanted = rotation_of(choice, old) @ rotation.T
    if np.abs(rotation_of(choice, new) - wanted).max() < _SAME:
        return choice
    return OrientationChoice(orientation_texts(wanted, new.frame)["matrix"])
