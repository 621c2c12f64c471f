"""View data for the views of the page, written by hand."""

import numpy as np

from gui.speeds.viewdata import (
    BlankRow,
    BlanksView,
    CorrelationView,
    Fact,
    ResidualPoint,
    ResidualsView,
    ResultCell,
    ResultView,
    SectionPoint,
    SingularView,
    SpeedColumn,
    SpeedsFormView,
    SpeedsSectionView,
    SpeedsTableView,
)
from gui.viewdata import ConstantsView, Curve, SectionView

COLUMNS = (
    SpeedColumn("direction", "direction", "Wave normal", False, "0.31 0.87"),
    SpeedColumn("sheet", "sheet", "1, 2 or 3", True, "1"),
    SpeedColumn("speed_m_s", "v, m/s", "Speed", True, "6000.0"),
    SpeedColumn("residual", "off, σ", "Residual", True, "−12.3", False),
)
TABLE = SpeedsTableView(
    columns=COLUMNS,
    rows=(("[1 0 0]", "1", "6000", "0.3"), ("[0 1 0]", "", "fast", ""),
          ("(0 0 1)", "3", "", "")),
    ghosts={(0, 1): "(1)"},
    faults={(1, 2): "“fast” is not a number."},
    marks={0: "outlier", 2: "planned"},
    entered="speed",
    summary="1 along 1 direction",
)  # fmt: skip
FORM = SpeedsFormView(
    density="2684 ± 1",
    crystal_class="monoclinic",
    classes=(("triclinic", "triclinic, 21 constants"), ("monoclinic", "monoclinic")),
    unique_axis="y",
    has_unique_axis=True,
    direction_sigma="0.2",
    robust=True,
    frame="z∥c, y∥b*",
)


def result_cells():
    """Return 36 cells: 11 free with ± , 12 unseen, the rest zero."""
    zero = ResultCell("·", "zero", "0.0", "zero by symmetry")
    cells = [[zero] * 6 for _ in range(6)]
    cells[0][0] = ResultCell("86.06", "independent", "86.0612345", "C11", "± 0.13")
    cells[0][1] = ResultCell("13.25", "independent", "13.25", "C12", "not seen", False)
    cells[1][0] = ResultCell("13.25", "dependent", "13.25", "C12", "not seen", False)
    return tuple(map(tuple, cells))


RESULT = ResultView(
    constants=ConstantsView("stiffness", "GPa", result_cells(), editable=False),
    facts=(Fact("Seen", "1 of 2 combinations", "rank", "doubt"),
           Fact("Outliers", "row 17", "rows", "alert"), Fact("Readings", "39", "rows")),
    unseen=("C12", "C14 + 0.3 C56"),
    notes=("Row 17 fits neither this crystal nor the other readings.",),
    can_use=True,
)  # fmt: skip
BLANKS = BlanksView(
    "determinant",
    (("determinant", "all"), ("largest", "the least certain")),
    (BlankRow("1", "[1 0 2]", "σ −5.9 %", "tip", "[1 0 2]"),
     BlankRow("2", "0.1  0.2  0.97", "σ −4.0 %", "tip", "0.1000 0.2000 0.9700")),
)  # fmt: skip
RESIDUALS = ResidualsView(
    points=(
        ResidualPoint(1, 0, 0.4, False, ("row 1", "fine")),
        ResidualPoint(2, 1, -2.1, False, ("row 2", "fine")),
        ResidualPoint(4, 1, 5.5, True, ("row 4", "off")),
        ResidualPoint(6, 2, 40.0, True, ("row 6", "far off")),
    ),
    rows=6,
    limit=3.2,
)
_TURN = np.linspace(0, 2 * np.pi, 181)
SECTION = SpeedsSectionView(
    SectionView(
        title="Phase speed",
        curves=tuple(Curve(r * np.stack([np.cos(_TURN), np.sin(_TURN)]), "A", sheet, name)
                     for sheet, (r, name) in enumerate([(6.0, "fastest"), (3.0, "middle")])),
        radius=6.0, rings=((2.0, "2"), (4.0, "4"), (6.0, "6")), axis_labels=("x", "y"),
        unit="km/s", pin_angle=None, plane="XY",
        planes=(("XY", "xy, 2 readings"), ("XZ", "xz, 0 readings")),
    ),
    (SectionPoint(6.0, 0.0, 1, False, ("row 1",)), SectionPoint(0.0, 3.3, 4, True, ("row 4",))),
)  # fmt: skip
SINGULAR = SingularView((0.1, 0.2, 1.0, float("inf")), 3, 60.0, ("C12",))
CORRELATION = CorrelationView(
    ("C11", "C12", "C44"), np.array([[1.0, -0.8, 0.0], [-0.8, 1.0, 0.1], [0.0, 0.1, 1.0]])
)
