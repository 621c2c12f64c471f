"""The typed table of measured speeds: understood cell by cell, edited, saved, handed on.

Speeds come from LAPACK on the full Christoffel matrix (tests.surveys), never from `core`.
"""

from dataclasses import replace

import numpy as np
import pytest

from core.crystal.cell import UnitCell
from core.editing import readings as measured
from core.editing.readings import EMPTY_ROW, understand
from core.errors import InputError
from core.files.speed_cells import COLUMNS
from core.files.speeds import parse_speeds, speeds_text
from core.state import SPEED_COLUMNS, MeasuredSpeeds, Specimen, as_matrix
from core.study.recovery.fit import FitOptions
from core.study.recovery.fitting import recover
from core.tensor.notation import upper_triangle
from core.tensor.symmetry import crystal_class
from tests.materials import cubic, random_physical
from tests.surveys import measured_crystal, readings_of, speeds_along

CELL = UnitCell(8.1, 12.8, 7.2, 94.3, 116.6, 87.7)
ROCK = Specimen(
    "rock", as_matrix(random_physical(np.random.default_rng(4))), 2684.0, cell=CELL,
    source="a book",
)  # fmt: skip


def row(**cells):
    return tuple(cells.get(name, "") for name in SPEED_COLUMNS)


def table(*rows, **known):
    return MeasuredSpeeds(rows, **({"density": "2684 ± 1", "cell": CELL} | known))


GOOD = row(direction="[1 0 0]", sheet="1", speed_m_s="6000", sigma_m_s="6")


def test_the_columns_are_those_of_the_file_without_components():
    assert tuple(name for name in COLUMNS if name not in ("nx", "ny", "nz")) == SPEED_COLUMNS


# ------------------------------------------------------------------ understanding
def test_rows_become_readings_that_keep_their_numbers():
    known = understand(table(GOOD, EMPTY_ROW, row(direction="0 0 2", speed_m_s="5e3")))
    assert [reading.row for reading in known.readings] == [1, 3]
    assert known.readings[1].direction == (0.0, 0.0, 1.0)
    assert (known.readings[0].speed, known.readings[0].sigma) == (6000.0, 6.0)
    assert known.readings[1].sigma == pytest.approx(5.0)  # 0.1 %, CONVENTIONS section 9
    assert (known.density, known.density_sigma) == (2684.0, 1.0)
    assert known.wanting == ""
    assert known.faults == ()


def test_a_time_of_flight_is_a_speed():
    # Pulse-echo through 8 mm in 3.2 µs of which 40 ns are not in the crystal: 16 mm in 3.16 µs.
    flight = row(direction="1 0 0", thickness_mm="8", transit_us="3.2", sigma_us="0.0032",
                 path="echo", delay_ns="40")  # fmt: skip
    (reading,) = understand(table(flight)).readings
    assert reading.speed == pytest.approx(16e-3 / 3.16e-6)
    assert reading.sigma / reading.speed == pytest.approx(0.0032 / 3.16)


def test_a_row_without_any_measurement_is_a_plan_and_no_fault():
    known = understand(table(GOOD, row(direction="(0 1 2)", sheet="2")))
    assert [(plan.row, plan.sheet) for plan in known.planned] == [(2, "2")]
    assert known.faults == ()
    assert len(known.readings) == 1


@pytest.mark.parametrize(
    ("cells", "column", "words"),
    [
        ({"speed_m_s": "fast"}, "speed_m_s", "is not a number"),
        ({"speed_m_s": "-6000"}, "speed_m_s", "not above zero"),
        ({"sigma_m_s": "0"}, "sigma_m_s", "not above zero"),
        ({"direction": "0 0 0"}, "direction", "no"),
        ({"direction": ""}, "direction", "missing"),
        ({"sheet": "4"}, "sheet", "Sheets are 1 (fastest), 2 and 3"),
        ({"kind": "ray"}, "kind", "phase or group"),
        ({"polarisation": "sideways"}, "polarisation", "longitudinal, shear"),
        ({"thickness_mm": "8"}, "speed_m_s", "both a speed and a time of flight"),
        ({"speed_m_s": "1,684"}, "speed_m_s", "thousands or a decimal comma"),
    ],
)
def test_a_fault_is_named_by_its_cell_and_the_other_rows_still_count(cells, column, words):
    wrong = row(**(dict(zip(SPEED_COLUMNS, GOOD, strict=True)) | cells))
    known = understand(table(GOOD, wrong))
    assert [reading.row for reading in known.readings] == [1]
    fault = next(fault for fault in known.faults if fault.column == column)
    assert fault.row == 2
    assert words in f"{fault.message} {fault.hint}"


def test_what_is_wanting_is_said():
    assert "direction and a speed" in understand(table()).wanting
    assert "density is wanted" in understand(table(GOOD, density="")).wanting
    assert "not a number" in understand(table(GOOD, density="heavy")).wanting
    assert "below zero" in understand(table(GOOD, density="2684 ± -1")).wanting
    assert "between 0° and 30°" in understand(table(GOOD, direction_sigma="90")).wanting


def test_indices_without_a_cell_are_read_as_components_and_that_is_said():
    known = understand(table(replace_direction(GOOD, "[1 1 0]"), cell=None))
    assert known.readings[0].direction == pytest.approx((0.5**0.5, 0.5**0.5, 0.0))
    assert "No unit cell" in known.note
    assert understand(table(replace_direction(GOOD, "1 1 0"), cell=None)).note == ""


def replace_direction(cells, text):
    return (text, *cells[1:])


# ------------------------------------------------------------------ edits
def test_a_cell_past_the_end_begins_a_row_and_empty_ends_are_dropped():
    longer = measured.set_cell(table(GOOD), 2, "speed_m_s", " 5000 ")
    assert longer.rows == (GOOD, EMPTY_ROW, row(speed_m_s="5000"))
    assert measured.set_cell(longer, 2, "speed_m_s", "").rows == (GOOD,)


def test_a_new_row_repeats_the_direction_of_its_blank():
    more = measured.with_row_before(table(GOOD), 1)
    assert more.rows == (GOOD, row(direction="[1 0 0]"))
    assert measured.without_rows(more, [0]).rows == (row(direction="[1 0 0]"),)


def test_a_pasted_block_goes_in_from_the_current_cell_on():
    pasted = measured.with_block(
        table(GOOD, GOOD), 1, ("speed_m_s", "sigma_m_s"), "5001\t5\n4001\t4\n"
    )
    assert pasted.rows[1] == row(direction="[1 0 0]", sheet="1", speed_m_s="5001",
                                 sigma_m_s="5")  # fmt: skip
    assert pasted.rows[2] == row(speed_m_s="4001", sigma_m_s="4")


def test_a_header_says_which_columns_are_pasted():
    text = "# a comment\nnx,ny,nz,sheet,speed_m_s\n1,0,0,2,3000\n"
    pasted = measured.with_block(table(), 0, ("direction",), text)
    assert pasted.rows == (row(direction="1 0 0", sheet="2", speed_m_s="3000"),)


def test_what_cannot_be_pasted_is_refused():
    with pytest.raises(InputError, match="2 cells wide does not fit"):
        measured.with_block(table(GOOD), 0, ("sigma_m_s",), "1\t2")
    with pytest.raises(InputError, match="nothing to paste"):
        measured.with_block(table(GOOD), 0, ("sigma_m_s",), " \n")
    with pytest.raises(InputError, match=r"100,000 rows; no more than 10,000"):
        measured.with_block(table(), 0, ("speed_m_s",), "5000\n" * 100_000)


def test_fields_are_checked_when_they_are_set():
    assert measured.set_field(table(), "density", " 2700 +/- 2 ").density == "2700 +/- 2"
    assert measured.set_field(table(), "robust", "on").robust
    assert not measured.set_field(table(robust=True), "robust", "off").robust
    assert measured.set_field(table(), "crystal_class", "cubic").crystal_class == "cubic"
    for field, text in (("density", "-1"), ("density", "x"), ("direction_sigma", "-1"),
                        ("crystal_class", "quartz")):  # fmt: skip
        with pytest.raises(InputError):
            measured.set_field(table(), field, text)


def test_an_empty_table_takes_what_the_ledger_knows():
    mine = measured.for_specimen(ROCK)
    assert (mine.density, mine.crystal_class, mine.cell) == ("2684", "triclinic", CELL)
    assert mine.frame == ROCK.frame


# ------------------------------------------------------------------ files
def test_a_table_comes_back_from_its_file_with_its_plans():
    speeds = table(GOOD, row(direction="(1 0 2)", sheet="3"), row(direction="0.3 0.4 0.87"),
                   crystal_axes=ROCK.crystal_axes, comments=("run 6",))  # fmt: skip
    text = speeds_text(measured.to_table(speeds))
    assert "# planned: (1 0 2); sheet 3" in text
    assert measured.from_table(parse_speeds(text), ROCK) == speeds


def test_rows_with_a_fault_are_not_saved():
    wrong = row(direction="[1 0 0]", speed_m_s="fast")
    assert len(measured.to_table(table(GOOD, wrong)).readings) == 1


def test_components_are_shown_as_small_whole_numbers():
    text = "nx,ny,nz,speed_m_s\n1,0,-2,5000\n0.3,0.4,0.87,5000\n"
    speeds = measured.from_table(parse_speeds(text), ROCK)
    assert speeds.rows[0][0] == "1 0 -2"
    vectors = [reading.direction for reading in understand(speeds).readings]
    assert vectors[0] == pytest.approx(np.array([1, 0, -2]) / 5**0.5, abs=1e-15)
    wanted = np.array([0.3, 0.4, 0.87]) / np.linalg.norm([0.3, 0.4, 0.87])
    assert vectors[1] == pytest.approx(wanted, abs=1e-15)


def test_a_file_of_another_class_takes_no_cell_and_no_density_from_the_ledger():
    text = "# crystal_class: cubic\ndirection,speed_m_s\n1 0 0,5000\n"
    speeds = measured.from_table(parse_speeds(text), ROCK)
    assert (speeds.cell, speeds.density, speeds.crystal_class) == (None, "", "cubic")


# ------------------------------------------------------------------ what the ledger gets
def test_the_ledger_gets_constants_covariance_and_what_they_rest_on():
    rng = np.random.default_rng(5)
    truth = random_physical(rng)
    fit = recover(measured_crystal(truth, 2700.0, rng, 20), 2700.0, crystal_class("triclinic"))
    given = measured.with_constants(ROCK, fit, table(density="2700"))
    found, std = np.array(given.stiffness), np.array(given.stiffness_std)
    assert np.abs(found - truth).max() < 5 * std.max()
    assert std == pytest.approx(fit.std)
    assert np.array(given.covariance) == pytest.approx(fit.covariance)
    assert (given.density, given.name) == (2700.0, "rock")
    assert given.source == "fit of 60 measured speeds"


def test_what_is_not_seen_is_known_as_loosely_as_a_crystal_is_stiff():
    # Along [1 0 0] alone a cubic crystal shows C11 and C44; C12 stays unseen.
    speeds = speeds_along(cubic(160.0, 90.0, 70.0), 8000.0, np.eye(3)[:, :1])
    fit = recover(readings_of(speeds, np.eye(3)[:, :1]), 8000.0, crystal_class("cubic"),
                  FitOptions())  # fmt: skip
    assert fit.rank == 2
    whole = measured.whole_covariance(fit)
    assert np.linalg.eigvalsh(whole)[0] > -1e-9 * np.abs(whole).max()
    std = np.sqrt(np.diag(whole))
    c11, c12, c44 = std[0], std[1], std[15]
    typical = (fit.stiffness[:3, :3].trace() + 2 * fit.stiffness[3:, 3:].trace()) / 6
    assert c11 < 1.0
    assert c44 < 1.0
    # A unit of C12 is √6 long in the Kelvin norm: it stands in six places of the table.
    assert c12 == pytest.approx(typical / 6**0.5, rel=0.02)
    given = measured.with_constants(ROCK, fit, table(cell=None, crystal_class="cubic"))
    assert given.crystal_class == "cubic"
    assert np.isfinite(np.array(given.covariance)).all()
    assert given.notes.startswith("1 constant was not seen: C12. ")
    # ROCK is triclinic: another crystal, of which nothing is kept.
    assert (given.name, given.cell) == ("Constants from measured speeds", None)
    assert given.temperature_c is None
    alike = replace(ROCK, crystal_class="cubic", notes="cut in May")
    kept = measured.with_constants(alike, fit, table(cell=None, crystal_class="cubic"))
    assert (kept.name, kept.cell) == ("rock", CELL)
    assert kept.notes.splitlines()[0] == "cut in May"
    assert measured.with_constants(kept, fit, table(crystal_class="cubic")).notes == kept.notes


def test_what_is_not_seen_is_counted_in_words():
    assert measured.unseen_words(()) == ""
    assert measured.unseen_words(("C12", "C23")) == "2 constants were not seen: C12, C23"
    assert measured.unseen_words(("C12", "C13 + 2 C44")) == (
        "2 combinations of constants were not seen: C12, C13 + 2 C44"
    )


def test_the_covariance_of_a_determined_fit_is_handed_on_as_it_is():
    rng = np.random.default_rng(6)
    truth = random_physical(rng)
    fit = recover(measured_crystal(truth, 2700.0, rng, 20), 2700.0, crystal_class("triclinic"))
    assert measured.whole_covariance(fit) is fit.covariance
    given = np.array(measured.with_constants(replace(ROCK), fit, table()).covariance)
    assert np.sqrt(np.diag(given)) == pytest.approx(upper_triangle(fit.std))
