"""What the page of measured speeds shows, against LAPACK's speeds and closed forms."""

from dataclasses import replace

import numpy as np
import pytest

from core.crystal.cell import UnitCell
from core.directional.medium import Medium
from core.editing.readings import understand
from core.state import SPEED_COLUMNS, BenchState, Display, MeasuredSpeeds, Specimen
from core.study.recovery.fitting import recover
from core.study.recovery.planning import candidate_directions, plan, rank_next
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class
from gui.presenting import speeds as pages
from gui.presenting import speeds_plots as plots
from gui.presenting.speeds import Found
from tests.gui.presenting.benches import as_rows
from tests.materials import cubic, random_physical
from tests.surveys import speeds_along

RNG = np.random.default_rng(9)
DENSITY = 2700.0
TRUTH = random_physical(RNG)
NORMALS = np.array([
    [1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 1, 0], [1, -1, 0], [1, 0, 1], [1, 0, -1],
    [0, 1, 1], [0, 1, -1], [1, 1, 1], [1, 2, 3],
], float).T  # fmt: skip
UNIT = NORMALS / np.linalg.norm(NORMALS, axis=0)
SPEEDS = speeds_along(TRUTH, DENSITY, UNIT)
STATE = BenchState(Specimen("rock", as_rows(TRUTH), DENSITY))


def row(**cells):
    return tuple(cells.get(name, "") for name in SPEED_COLUMNS)


def readings(**known):
    """Return a table of exact speeds, the sheets not said."""
    rows = tuple(
        row(direction=" ".join(f"{x:.0f}" for x in NORMALS[:, k]), speed_m_s=f"{speed:.4f}")
        for k in range(NORMALS.shape[1])
        for speed in SPEEDS[:, k]
    )
    return MeasuredSpeeds(**({"rows": rows, "density": "2700"} | known))


@pytest.fixture(scope="module")
def found():
    known = understand(readings())
    fit = recover(known.readings, DENSITY, crystal_class("triclinic"))
    return Found(fit, rank_next(fit))


# ------------------------------------------------------------------ readings
def test_the_table_says_what_empty_cells_are_taken_for(found):
    view = pages.table_view(readings(), found)
    keys = [column.key for column in view.columns]
    assert keys[-1] == "residual"
    for number in range(33):
        assert view.ghosts[number, keys.index("sheet")] == f"({number % 3 + 1})"
        assert view.ghosts[number, keys.index("kind")] == "phase"
    sigma = float(view.ghosts[0, keys.index("sigma_m_s")])
    assert sigma == pytest.approx(1e-3 * SPEEDS[0, 0], rel=0.05)
    assert abs(float(view.rows[0][-1].replace("−", "-"))) < 0.1
    assert view.summary == "33 along 11 directions"
    assert "speed_m_s" not in {keys[column] for _, column in view.ghosts}


def test_a_time_of_flight_shows_the_speed_it_makes():
    flight = row(direction="1 0 0", thickness_mm="8", transit_us="2")
    view = pages.table_view(MeasuredSpeeds((flight,), entered="both"), Found())
    keys = [column.key for column in view.columns]
    assert view.ghosts[0, keys.index("speed_m_s")] == "4000.0"
    assert view.ghosts[0, keys.index("path")] == "through"


def test_faults_stand_at_their_cells_and_those_of_hidden_columns_at_the_first():
    rows = (row(direction="1 0 0", speed_m_s="x"),
            row(direction="1 0 0", thickness_mm="8", transit_us="2", delay_ns="y"),
            row(direction="0 1 0"))  # fmt: skip
    view = pages.table_view(MeasuredSpeeds(rows), Found())
    keys = [column.key for column in view.columns]
    assert "not a number" in view.faults[0, keys.index("speed_m_s")]
    assert view.faults[1, 0].startswith("delay_ns: ")
    assert view.marks == {2: "planned"}
    assert view.summary == "0 along 0 directions, 1 planned, 2 left out"


def test_typed_columns_leave_out_what_the_fit_says():
    speeds = MeasuredSpeeds(entered="flight")
    assert pages.typed_columns(speeds, 2) == (
        "thickness_mm", "transit_us", "sigma_us", "path", "delay_ns", "polarisation", "kind",
        "sigma_mm",
    )  # fmt: skip


def test_the_form_says_what_indices_refer_to():
    assert pages.form_view(readings()).frame == "no unit cell"
    cell = UnitCell(8.1, 12.8, 7.2, 94.3, 116.6, 87.7)
    assert pages.form_view(readings(cell=cell)).frame == (
        "z∥c, y∥b*; cell 8.1 12.8 7.2 94.3 116.6 87.7"
    )
    assert pages.form_view(readings(crystal_class="monoclinic")).has_unique_axis


# ------------------------------------------------------------------ result
def test_constants_are_shown_with_two_digits_of_their_uncertainty(found):
    view = pages.result_view(readings(), found)
    for i in range(6):
        for j in range(i, 6):
            cell = view.constants.cells[i][j]
            value = float(cell.text.replace("−", "-"))
            std = float(cell.deviation.removeprefix("± "))
            assert std == pytest.approx(found.fit.std[i, j], rel=0.06)
            assert value == pytest.approx(TRUTH[i, j], abs=max(std, 0.06))
            assert view.constants.cells[j][i].text == cell.text
    facts = {fact.label: fact for fact in view.facts}
    assert facts["Seen"].text == "21 of 21 combinations of constants"
    assert facts["Outliers"].text == "none"
    assert facts["Stable"].text == "yes, probability above 0.999"
    assert facts["Misfit"].text.endswith("for 12)")
    assert view.can_use
    assert not view.constants.editable


def test_what_is_not_seen_is_said_once_and_not_given_an_uncertainty():
    speeds = speeds_along(cubic(160.0, 90.0, 70.0), 8000.0, np.eye(3)[:, :1])[:, 0]
    rows = tuple(row(direction="1 0 0", speed_m_s=f"{v:.3f}") for v in speeds)
    table = MeasuredSpeeds(rows, "8000", "cubic")
    fit = recover(understand(table).readings, 8000.0, crystal_class("cubic"))
    view = pages.result_view(table, Found(fit))
    assert view.unseen == ("C12",)
    assert not any("Not seen is" in note for note in view.notes)
    cell = view.constants.cells[0][1]
    assert (cell.deviation, cell.is_seen) == ("not seen", False)
    assert view.constants.cells[3][3].text.startswith("70.0")
    assert view.constants.cells[0][3].kind == "zero"
    facts = {fact.label: fact.role for fact in view.facts}
    assert (facts["Seen"], facts["Stable"]) == ("doubt", "doubt")


def test_an_outlier_is_marked_everywhere():
    rows = list(readings().rows)
    rows[4] = row(direction=rows[4][0], speed_m_s=f"{1.03 * SPEEDS[1, 1]:.3f}", sheet="2")
    table = readings(rows=tuple(rows))
    fit = recover(understand(table).readings, DENSITY, crystal_class("triclinic"))
    found = Found(fit)
    assert pages.table_view(table, found).marks == {4: "outlier"}
    facts = {fact.label: fact for fact in pages.result_view(table, found).facts}
    assert (facts["Outliers"].text, facts["Outliers"].role) == ("row 5", "alert")
    (point,) = [p for p in plots.residuals_view(table, found).points if p.is_outlier]
    assert (point.row, point.sheet) == (5, 1)
    assert point.residual < -5  # measured too fast, so predicted minus measured is negative
    assert any("without it" in line for line in point.card)


def test_without_a_fit_the_reason_is_said_everywhere():
    found = Found(notice="The density is wanted.")
    assert pages.result_view(readings(), found).notice == "The density is wanted."
    for view in (plots.residuals_view(readings(), found), plots.singular_view(found),
                 plots.correlation_view(found), plots.sphere_view(STATE, readings(), found),
                 plots.section_view(STATE, readings(), found).section):  # fmt: skip
        assert view.notice == "The density is wanted."
    assert "on its way" in plots.residuals_view(readings(), Found(pending=True)).notice


# ------------------------------------------------------------------ plots
def test_residuals_have_a_limit_and_a_card_each(found):
    view = plots.residuals_view(readings(), found)
    assert [point.row for point in view.points] == list(range(1, 34))
    assert view.limit == pytest.approx(3.17, abs=0.02)  # normal quantile at 0.05/66, two-sided
    assert view.points[1].card[0] == "row 2: 1 0 0, middle wave"
    assert f"{SPEEDS[1, 0]:.1f}" in view.points[1].card[1]


def test_the_section_has_the_exact_speeds_and_the_readings_that_lie_in_it(found):
    view = plots.section_view(STATE, readings(), found)  # the xy plane
    angle = np.linspace(0, 2 * np.pi, 721)
    round_z = np.stack([np.cos(angle), np.sin(angle), 0 * angle])
    wanted = speeds_along(TRUTH, DENSITY, round_z) / 1e3
    for sheet, curve in enumerate(view.section.curves):
        assert np.hypot(*curve.points) == pytest.approx(wanted[sheet], rel=1e-3)
    assert sorted({point.row for point in view.points}) == [1, 2, 3, 4, 5, 6, 10, 11, 12, 13,
                                                            14, 15]  # fmt: skip
    first = next(point for point in view.points if point.row == 1)
    assert (first.x, first.y) == pytest.approx((SPEEDS[0, 0] / 1e3, 0.0), abs=1e-6)
    assert view.section.notice.startswith("12 of 33 readings within 1°")


def test_planes_with_most_readings_are_offered():
    choices = dict(plots.plane_choices(readings(), (0.0, 0.0, 1.0)))
    assert choices["XY"] == "xy (12)"
    normals = {key: normal for key, _, normal in plots.planes_of(readings())}
    # (1 1 1), (1 1 0), [0 0 1] and more lie in the plane across (1 -1 0).
    assert any(abs(np.dot(n, (0.5**0.5, -(0.5**0.5), 0.0))) > 0.9999 for n in normals.values())
    assert plots.plane_normal(readings(), "XZ") == (0.0, 1.0, 0.0)
    assert plots.plane_normal(readings(), "0 3 4") == pytest.approx((0.0, 0.6, 0.8))
    other = plots.plane_choices(readings(), (0.6, 0.0, 0.8))
    assert other[-1] == ("other", "across 0.60  0  0.80")


def test_axes_off_those_of_the_crystal_are_explained(found):
    plain = plots.section_view(STATE, readings(), found).section
    assert plain.axis_labels == ("x", "y")
    assert " = " not in plain.notice
    tilted = replace(STATE, display=Display(speeds_plane=(0.6, 0.0, 0.8)))
    section = plots.section_view(tilted, readings(), found).section
    assert "p" in section.axis_labels
    assert "p = 0.8 0 −0.6" in section.notice


def test_the_spectrum_is_the_uncertainty_of_combinations(found):
    view = plots.singular_view(found)
    assert view.rank == len(view.deviations) == 21
    assert list(view.deviations) == sorted(view.deviations)
    # Their squares add up to the trace of the covariance in Kelvin norm.
    kelvin = np.sqrt(np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2]))
    rows, columns = np.triu_indices(6)
    weights = np.where(rows == columns, 1, 2) * kelvin[rows, columns] ** 2
    trace = (weights * np.diag(found.fit.covariance)).sum()
    assert sum(x**2 for x in view.deviations) == pytest.approx(trace, rel=1e-6)
    trace = np.trace(kelvin * TRUTH) / 6
    assert view.typical == pytest.approx(trace, rel=0.01)


def test_correlations_are_those_of_the_covariance(found):
    view = plots.correlation_view(found)
    covariance = found.fit.covariance
    i, j = view.names.index("C12"), view.names.index("C33")
    rows, columns = np.triu_indices(6)
    cells = [f"C{a + 1}{b + 1}" for a, b in zip(rows, columns, strict=True)]
    p, q = cells.index("C12"), cells.index("C33")
    wanted = covariance[p, q] / np.sqrt(covariance[p, p] * covariance[q, q])
    assert view.matrix[i, j] == pytest.approx(wanted)


def test_the_hemisphere_shows_gains_measured_and_suggested_directions(found):
    view = plots.sphere_view(STATE, readings(), found)
    kinds = [kind for *_, kind in view.marks]
    assert kinds.count("direction") == 11
    assert kinds.count("greatest") == 5
    assert "pin" not in kinds
    gains = 100 * (1 - 1 / found.ranking.gains)
    assert np.nanmax(view.picture) <= gains.max() + 1e-9
    assert np.nanmin(view.picture) >= gains.min() - 1e-9
    # The best candidate is bright where its mark is.
    x, y = next((x, y) for x, y, label, _ in view.marks if label == "1")
    size = view.picture.shape[0]
    value = view.picture[int((1 - y) / 2 * size), int((x + 1) / 2 * size)]
    assert value > 0.85 * gains.max()


def test_a_picture_of_even_gains_is_even():
    even = np.full(candidate_directions().shape[1], 7.0)
    picture = plots.gain_picture(even, "equal_area")
    assert picture[np.isfinite(picture)] == pytest.approx(7.0)


def test_the_pin_is_shown_where_it_is_what_the_blank_is_for(found):
    state = replace(STATE, pin=(0.0, 0.0, 1.0), display=Display())
    view = plots.sphere_view(state, readings(criterion="functional"), found)
    assert (0.0, 0.0, "", "pin") in view.marks


def test_a_press_on_the_disc_finds_the_measured_direction():
    assert plots.measured_at(STATE, readings(), 0.02, -0.01) == 7  # [0 0 1], the third blank
    assert plots.measured_at(STATE, readings(), 0.3, 0.5) is None
    assert plots.measured_at(STATE, MeasuredSpeeds(), 0.0, 0.0) is None


# ------------------------------------------------------------------ blanks
def test_suggestions_say_by_how_much_the_uncertainty_falls(found):
    view = pages.blanks_view(readings(), found)
    best = found.ranking.best[0]
    assert view.rows[0].gain == f"σ −{100 * (1 - 1 / best.gain):.1f} %"
    components = np.array([float(x) for x in view.rows[0].direction.split()])
    assert components == pytest.approx(best.direction, abs=5e-5)
    assert not view.pending
    first = pages.blanks_view(readings(), Found()).notice
    assert first == "Suggestions come with the first fit."


def test_a_suggestion_with_simple_indices_is_planned_by_them():
    frame = MeasuredSpeeds(crystal_class="cubic").frame
    assert pages.table_direction(np.array([1, 1, 0]) / 2**0.5, frame) == "[1 1 0]"
    assert pages.table_direction(np.array([0.6, 0.0, 0.8]), readings().frame) == (
        "0.6000 0.0000 0.8000"
    )


def test_a_plan_is_told_in_words():
    medium = Medium(Stiffness.from_voigt(TRUTH), DENSITY)
    made = plan(medium, crystal_class("triclinic"))
    view = pages.plan_view(STATE, made)
    assert view.can_place
    # Beyond six blanks each adds two numbers: 21 constants want eight.
    assert view.found[0] == "8 blanks, 24 speeds at 0.1 %, determine all 21 constants."
    assert "rock" in view.about
    assert pages.plan_view(STATE, None, "None will do.").notice == "None will do."
