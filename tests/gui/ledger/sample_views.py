"""Invented views for the tests of the ledger."""

from dataclasses import replace

from gui.viewdata import (
    CellFormView,
    CellView,
    ConstantsView,
    OrientationView,
    SpecimenView,
    SpectrumBar,
    SpectrumView,
)

HEXAGONAL_OPEN = {(0, 0), (0, 1), (0, 2), (2, 2), (3, 3)}
HEXAGONAL_TIED = {(1, 1), (1, 2), (4, 4), (5, 5)}


def number(row: int, column: int) -> float:
    low, high = sorted((row, column))
    return -121.8412345 if (low, high) == (0, 2) else 10.0 * (low + 1) + high + 1.125


def cell(row: int, column: int, kind: str) -> CellView:
    value = number(row, column)
    if kind == "zero":
        return CellView("·", "zero", "0", "zero by symmetry")
    text = f"{value:.2f}".replace("-", "\N{MINUS SIGN}")
    tooltip = "C66 = (C11 − C12)/2" if (row, column) == (5, 5) else f"C{row + 1}{column + 1}"
    return CellView(text, kind, repr(value), tooltip)  # type: ignore[arg-type]


def kind_of(row: int, column: int) -> str:
    place = tuple(sorted((row, column)))
    if row <= column and place in HEXAGONAL_OPEN:
        return "independent"
    return "dependent" if place in HEXAGONAL_OPEN | HEXAGONAL_TIED else "zero"


def hexagonal(face: str = "stiffness", editable: bool = True, note: str = "") -> ConstantsView:
    cells = tuple(tuple(cell(i, j, kind_of(i, j)) for j in range(6)) for i in range(6))
    return ConstantsView(face, "GPa", cells, editable, note)  # type: ignore[arg-type]


def triclinic() -> ConstantsView:
    cells = tuple(
        tuple(cell(i, j, "independent" if i <= j else "dependent") for j in range(6))
        for i in range(6)
    )
    return ConstantsView("stiffness", "GPa", cells, True)


def with_cell(view: ConstantsView, row: int, column: int, text: str) -> ConstantsView:
    rows = [list(line) for line in view.cells]
    rows[row][column] = replace(rows[row][column], text=text, full=text)
    return replace(view, cells=tuple(tuple(line) for line in rows))


def spectrum(*values: float) -> SpectrumView:
    bars = tuple(SpectrumBar(v, f"{v:.4g}", f"strain {i}", f"bar {i}") for i, v in
                 enumerate(values))
    return SpectrumView(bars, "Eigenstiffness in GPa")


SPECIMEN = SpecimenView(
    name="Blank 7",
    source="pulse-echo",
    notes="clear",
    density="2684",
    temperature="21",
    crystal_class="triclinic",
    classes=(("triclinic", "triclinic · 21 constants"), ("cubic", "cubic · 3 constants")),
    unique_axis="y",
    has_unique_axis=False,
    class_note="",
    choices=(("A", "Blank 7"),),
)
CELL = CellFormView(
    lengths=("8.14", "12.79", "7.16"),
    angles=("94.3", "116.6", "87.7"),
    axes="z||c, y||b*",
    conventions=(("z||c, y||b*", "z ∥ c, y ∥ b*"), ("x||a, z||c*", "x ∥ a, z ∥ c*")),
    note="Volume 664 Å³",
)
ORIENTATION = OrientationView(
    side="A",
    text="z [0 1 0], x [1 0 0]",
    way="directions",
    ways=(("directions", "two directions"), ("cut", "rotated cut")),
    turn=(0.0, -12.5, 0.25),
    said_otherwise=(("Bunge angles", "bunge 0 90 0"), ("axis and angle", "axis 1 0 0 90")),
    axes=("[1 0 0]", "[0 0 -1]", "[0 1 0]"),
    note="90° from B",
)
