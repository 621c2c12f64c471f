"""Edits that put what was read into a specimen: a foreign table, the cell of a CIF file."""

from __future__ import annotations

from dataclasses import dataclass, replace

from core import limits
from core.crystal.cell import axes_matrix, axes_text
from core.files.cif import CifCell
from core.files.foreign.readings import AS_LISTED
from core.files.matrices import Understood
from core.numbers import significant
from core.state import Specimen, as_matrix
from core.tensor.closest import simplest_class
from core.tensor.symmetry import crystal_class

_PRINTED = 5e-3  # relative distance: what the rounding of a printed table leaves
_EXACT = 1e-9


@dataclass(frozen=True)
class Claim:
    """Which crystal class a table is to claim, and why.

    Attributes
    ----------
    class_key, unique_axis : str
    reason : str
        A plain sentence.
    certain : bool
        Whether the table has the form of the class exactly.
    """

    class_key: str
    unique_axis: str
    reason: str
    certain: bool


def simplest_claim(known: Understood) -> Claim:
    """Return the class of fewest constants that a table is near to, about its own axes."""
    listed = known.reading("class")
    if listed is not None and listed.value != AS_LISTED:
        key, *axis = listed.value.split()
        return Claim(key, axis[0] if axis else "y", listed.reason, listed.certain)
    cls, off = simplest_class(known.stiffness, _PRINTED)
    about = f" about {cls.unique_axis}" if cls.key == "monoclinic" else ""
    if cls.key == "triclinic":
        reason = "It has the form of no class with fewer constants, about the axes it is in."
    elif off < _EXACT:
        reason = (f"It has the form of this class{about} exactly, and of none with fewer "
                  "constants.")
    else:
        reason = (f"It has the form of this class{about} within {significant(100 * off, 2)} %, "
                  "as rounding leaves it; of those so near, this has the fewest constants.")
    return Claim(cls.key, cls.unique_axis or "y", reason, off < _EXACT)


def with_table(
    specimen: Specimen, known: Understood, class_key: str, unique_axis: str, axes: str
) -> Specimen:
    """Return the specimen with a foreign table in place of its own.

    Parameters
    ----------
    specimen : Specimen
        Keeps its name, density and cell; the uncertainties of the old numbers go.
    known : Understood
        Without an open question.
    class_key, unique_axis : str
        The class to claim; the numbers are taken as they are.
    axes : str
        How the axes of the table follow the cell.

    Raises
    ------
    InputError
        For constants that no solid has, and axes that cannot be laid in the cell.
    ValueError
        When a question is open.
    """
    if known.questions:
        raise ValueError("a table with open questions cannot be used")
    table = limits.stiffness(known.stiffness, "table")
    claimed = crystal_class(class_key, unique_axis)
    canonical = axes_text(axes)
    if specimen.cell is not None:
        axes_matrix(specimen.cell, canonical)  # refuses axes that cannot be laid in it
    std = known.std
    return replace(
        specimen,
        stiffness=as_matrix(table),
        stiffness_std=as_matrix(std) if std is not None and std.any() else None,
        covariance=None,
        crystal_class=claimed.key,
        unique_axis=unique_axis,
        crystal_axes=canonical,
    )


def with_cell(specimen: Specimen, found: CifCell, axes: str) -> Specimen:
    """Return the specimen with the unit cell of a CIF file.

    Parameters
    ----------
    specimen : Specimen
    found : CifCell
    axes : str
        How the crystal axes of the constants follow this cell; the numbers stay.
    """
    canonical = axes_text(axes)
    axes_matrix(found.cell, canonical)
    return replace(specimen, cell=found.cell, crystal_axes=canonical)
