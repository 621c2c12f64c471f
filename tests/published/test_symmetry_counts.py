"""How many constants each class has and which cells are not zero.

The schemes of Nye 1957, Physical Properties of Crystals, table 9 (patterns confirmed by a
separate group-averaging calculation), standard axes.
"""

import numpy as np
import pytest

from core.tensor.symmetry import crystal_class

SCHEMES = {
    "triclinic": (21, "11 12 13 14 15 16 22 23 24 25 26 33 34 35 36 44 45 46 55 56 66"),
    "monoclinic": (13, "11 12 13 15 22 23 25 33 35 44 46 55 66"),
    "orthorhombic": (9, "11 12 13 22 23 33 44 55 66"),
    "tetragonal_7": (7, "11 12 13 16 22 23 26 33 44 55 66"),
    "tetragonal_6": (6, "11 12 13 22 23 33 44 55 66"),
    "trigonal_7": (7, "11 12 13 14 15 22 23 24 25 33 44 46 55 56 66"),
    "trigonal_6": (6, "11 12 13 14 22 23 24 33 44 55 56 66"),
    "hexagonal": (5, "11 12 13 22 23 33 44 55 66"),
    "cubic": (3, "11 12 13 22 23 33 44 55 66"),
    "isotropic": (2, "11 12 13 22 23 33 44 55 66"),
}


@pytest.mark.parametrize("key", SCHEMES)
def test_scheme(key):
    count, cells = SCHEMES[key]
    cls = crystal_class(key)
    assert len(cls.independent) == count
    filled = np.argwhere(np.triu(np.array(cls.kinds) != "zero"))
    assert " ".join(f"{i + 1}{j + 1}" for i, j in filled) == cells
