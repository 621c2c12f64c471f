"""The measured-speeds file: reading, naming every fault, writing."""

import time

import numpy as np
import pytest

from core.crystal.cell import CrystalFrame, UnitCell
from core.errors import InputError
from core.files.speeds import parse_speeds, read_rows, read_speeds, speeds_text, write_speeds
from core.study.recovery.problem import MOST_READINGS

HEADER = "direction,sheet,polarisation,kind,speed_m_s,sigma_m_s\n"
FLIGHT = "direction,sheet,thickness_mm,transit_us,sigma_us,path,delay_ns\n"


def refusal(text, where="speeds.csv"):
    with pytest.raises(InputError) as caught:
        parse_speeds(text, where=where)
    return str(caught.value)


def test_a_plain_table_is_read():
    table = parse_speeds(
        "# density_kg_m3: 2649 ± 1\n# crystal_class: trigonal_6\n# a remark\n"
        + HEADER
        + '"0.3,0.4,0.87",1,,phase,5720.5,5\n'
        + "0 0 1,,longitudinal,,6319,\n0 1 0,2,1 0 0,group,4000,4\n"
    )
    first, second, third = table.readings
    assert (first.row, first.sheet, first.speed, first.sigma) == (1, 1, 5720.5, 5.0)
    written = np.array([0.3, 0.4, 0.87])
    assert np.allclose(first.direction, written / np.linalg.norm(written))
    assert (second.sheet, second.polarisation, second.kind) == (None, "longitudinal", "phase")
    assert second.sigma == pytest.approx(6.319)
    assert (third.polarisation, third.kind) == ((1.0, 0.0, 0.0), "group")
    assert (table.density, table.density_sigma) == (2649.0, 1.0)
    assert table.class_key == "trigonal_6"
    assert table.comments == ("a remark",)
    assert table.guesses == ("readings without a standard uncertainty were given 0.1 %",)


def test_components_and_times_of_flight_are_read():
    table = parse_speeds(
        "nx,ny,nz,sheet,thickness_mm,transit_us,sigma_us,path,delay_ns\n"
        "1,1,0,1,5,1.0,0.001,,\n0,0,2,2,5,2.1,0.002,echo,100\n"
    )
    assert np.allclose(table.readings[0].direction, np.sqrt([0.5, 0.5, 0]))
    assert [r.speed for r in table.readings] == pytest.approx([5000.0, 5000.0])
    assert [r.sigma for r in table.readings] == pytest.approx([5.0, 5.0])


def test_indices_follow_the_cell_and_the_axes_of_the_file():
    """Hexagonal, x along a: the normal of (1 0 0) is 30° from a towards -b; [1 2 0] is y."""
    text = (
        "# cell: 4 4 6 90 90 120\n# crystal_axes: x||a, z||c*\n# crystal_class: hexagonal\n"
        "direction,speed_m_s\n(1 0 0),5000\n[1 2 0],5000\n[2 -1 -1 0],5000\n"
    )
    vectors = [reading.direction for reading in parse_speeds(text).readings]
    assert np.allclose(vectors, [[np.sqrt(0.75), 0.5, 0], [0, 1, 0], [1, 0, 0]], atol=1e-12)


def test_the_callers_cell_serves_where_the_file_has_none():
    frame = CrystalFrame(UnitCell(4, 4, 6, 90, 90, 120), "x||a, z||c*", "hexagonal")
    table = parse_speeds("direction,speed_m_s\n[1 2 0],5000\n", frame)
    assert np.allclose(table.readings[0].direction, [0, 1, 0], atol=1e-12)
    assert not any("cell" in guess for guess in table.guesses)


def test_without_a_cell_indices_are_components_and_this_is_said():
    table = parse_speeds("direction,speed_m_s,sigma_m_s\n[1 1 0],5000,5\n(0 0 -1),5000,5\n")
    assert np.allclose(table.readings[0].direction, np.sqrt([0.5, 0.5, 0]))
    assert np.allclose(table.readings[1].direction, [0, 0, -1])
    assert "no unit cell" in table.guesses[0]
    rows = "direction,speed_m_s,sigma_m_s\n[1 1 0],5000,5\n"
    assert parse_speeds("# crystal_class: cubic\n" + rows).guesses == ()


def test_four_indices_without_a_cell_are_refused():
    assert "needs the cell" in refusal("direction,speed_m_s\n[2 -1 -1 0],5000\n")


@pytest.mark.parametrize("mark", [";", "\t"])
def test_semicolons_and_tabs_separate_and_then_a_decimal_comma_is_understood(mark):
    rows = (("direction", "speed_m_s", "sigma_m_s"), ("[0 0 1]", "5720,5", "0,5"))
    (reading,) = parse_speeds("\n".join(mark.join(row) for row in rows)).readings
    assert (reading.speed, reading.sigma) == (5720.5, 0.5)


CELL = "row 1, column "
SPEED, SIGMA = CELL + "speed_m_s", CELL + "sigma_m_s"
FAULTS = {
    "a number": (HEADER + "1 0 0,1,,,fast,5\n", SPEED, "fast"),
    "thousands": (HEADER + '1 0 0,1,,,"5,720",5\n', SPEED, "decimal comma"),
    "sigma of zero": (HEADER + "1 0 0,1,,,5720,0\n", SIGMA, "not above zero"),
    "negative sigma": (HEADER + "1 0 0,1,,,5720,-5\n", SIGMA, "not above zero"),
    "negative speed": (HEADER + "1 0 0,1,,,-5720,5\n", SPEED, "not above zero"),
    "not finite": (HEADER + "1 0 0,1,,,nan,5\n", SPEED, "nan"),
    "no speed": (HEADER + "1 0 0,1,,,,5\n", SPEED, "missing"),
    "no direction": (HEADER + ",1,,,5720,5\n", CELL + "direction", "missing"),
    "no length": (HEADER + "0 0 0,1,,,5720,5\n", CELL + "direction", "zero"),
    "two components": (HEADER + "1 0,1,,,5720,5\n", CELL + "direction", "three"),
    "sheet": (HEADER + "1 0 0,0,,,5720,5\n", CELL + "sheet", "1 (fastest)"),
    "kind": (HEADER + "1 0 0,1,,ray,5720,5\n", CELL + "kind", "phase or group"),
    "polarisation": (HEADER + "1 0 0,,sideways,,5720,5\n", CELL + "polarisation", "shear"),
    "later row": (HEADER + "1 0 0,1,,,57,5\n\n1 0 0,2,,,x,5\n", "row 2, column speed_m_s", "x"),
    "path": (FLIGHT + "1 0 0,1,5,1,0.001,twice,\n", CELL + "path", "through or echo"),
    "no transit": (FLIGHT + "1 0 0,1,5,,0.001,,\n", CELL + "transit_us", "needs"),
    "zero thickness": (FLIGHT + "1 0 0,1,0,1,0.001,,\n", CELL + "thickness_mm", "above zero"),
    "delay": (FLIGHT + "1 0 0,1,5,1,0.001,,2000\n", CELL + "delay_ns", "in ns"),
    "zero vector": ("nx,ny,nz,speed_m_s\n0,0,0,5720\n", CELL + "nx", "no length"),
    "component": ("nx,ny,nz,speed_m_s\n1,,0,5720\n", CELL + "ny", "missing"),
    "decimal commas": (HEADER + "1 0 0,1,,,5720,5,1,5\n", "row 1", "decimal points"),
    "unquoted": (HEADER + "0.3,0.4,0.87,1,,,5720,5\n", "row 1", "in quotes"),
    "header": ("direction,velocity\n1 0 0,5720\n", "header, column 2", "velocity"),
    "near header": ("direction,speed_ms\n1 0 0,5720\n", "header, column 2", "speed_m_s"),
    "no header": ("1 0 0,5720\n", "header, column 1", "1 0 0"),
    "twice": ("direction,speed_m_s,speed_m_s\n1 0 0,1,2\n", "header, column 2", "twice"),
    "lacks speed": ("direction,sheet\n1 0 0,1\n", "header", "speed_m_s"),
    "lacks direction": ("nx,ny,speed_m_s\n1,0,5720\n", "header", "direction"),
    "empty": ("# only a remark\n", "", "no table"),
    "density": ("# density_kg_m3: heavy\n" + HEADER, "comment density_kg_m3", "heavy"),
    "class": ("# crystal_class: cubik\n" + HEADER, "comment crystal_class", "cubic"),
    "cell": ("# cell: 4 4 6\n" + HEADER, "comment cell", "six numbers"),
    "open quote": (HEADER + '"1 0 0,1,,,5720,5\n', "", "CSV"),
}


@pytest.mark.parametrize("case", FAULTS)
def test_a_fault_is_named_by_row_and_column(case):
    text, where, words = FAULTS[case]
    said = refusal(text)
    assert said.startswith(f"speeds.csv, {where}: " if where else "speeds.csv: ")
    assert words in said


def test_a_speed_and_a_time_of_flight_in_one_row_are_refused():
    said = refusal("direction,speed_m_s,thickness_mm,transit_us\n1 0 0,5720,5,1\n")
    assert SPEED in said
    assert "both" in said


def test_every_fault_is_named():
    said = refusal(HEADER + "1 0 0,7,,,x,-5\n0 1 0,1,,,5720,5\n0 0 0,1,,,5720,0\n")
    for place in (CELL + "sheet", SPEED, SIGMA,
                  "row 3, column direction", "row 3, column sigma_m_s"):  # fmt: skip
        assert place in said
    assert "row 2" not in said


def test_a_table_full_of_faults_is_named_in_part():
    rows = "".join(f"1 0 0,{sheet},,,5720,5\n" for sheet in range(7, 107))
    said = refusal(HEADER + rows)
    assert "row 20, column sheet" in said
    assert "row 21" not in said
    assert "80 more faults" in said


def test_a_fault_that_many_rows_share_is_one_sentence():
    said = refusal(HEADER + "1 0 0,7,,,5720,5\n" * 100)
    assert "rows 1, 2, 3, 4, 5 and 95 more, column sheet: “7” is not a sheet." in said
    assert "Also" not in said


def test_indices_without_a_cell_are_refused_where_nobody_can_give_it():
    text = "direction,speed_m_s\n[1 0 0],5000\n1 0 0,5000\n(0 0 1),5000\n"
    with pytest.raises(InputError, match="this crystal is trigonal and no cell") as error:
        parse_speeds("# crystal_class: trigonal_6\n" + text, needs_cell=True)
    assert "rows 1, 3, column direction" in str(error.value)
    for facts in ("# crystal_class: cubic\n", "# cell: 4 4 5 90 90 120\n"):
        assert len(parse_speeds(facts + text, needs_cell=True).readings) == 3
    assert len(parse_speeds(text).readings) == 3  # a page on which the cell can still be given


def test_a_density_with_its_uncertainty_in_brackets():
    table = parse_speeds("# density_kg_m3: 2684(1)\ndirection,speed_m_s\n1 0 0,5000\n")
    assert (table.density, table.density_sigma) == (2684.0, 1.0)


def test_a_specimen_is_no_table_of_speeds():
    with pytest.raises(InputError, match=r"specimen or a bench file.*tricline summary"):
        parse_speeds('{"format": "tricline-specimen"}')

def test_faults_of_a_table_that_is_being_typed_do_not_hide_the_other_rows():
    rows = [{"direction": "1 0 0", "speed_m_s": "5720"}, {}, {"direction": "0 1 0"}]
    readings, faults = read_rows(rows, CrystalFrame())
    assert [reading.row for reading in readings] == [1]
    assert [(fault.row, fault.column) for fault in faults] == [(3, "speed_m_s")]


def test_too_long_a_table_is_refused_at_once():
    text = HEADER + "1 0 0,1,,,5720,5\n" * 100_000
    start = time.perf_counter()
    said = refusal(text)
    assert time.perf_counter() - start < 2.0
    assert f"100,000 rows; no more than {MOST_READINGS:,}" in said


def test_the_longest_table_is_read_quickly():
    text = HEADER + "1 0 0,1,,,5720,5\n" * MOST_READINGS
    start = time.perf_counter()
    assert len(parse_speeds(text).readings) == MOST_READINGS
    assert time.perf_counter() - start < 5.0


TABLE = (
    "# Invented.\n# density_kg_m3: 2649.0 ± 1.5\n# crystal_class: monoclinic\n"
    "# unique_axis: z\n# cell: 4.1 5.2 6.3 90 90 104.5\n# crystal_axes: z||c, y||b*\n"
    "direction,sheet,polarisation,kind,speed_m_s,sigma_m_s,"
    "thickness_mm,transit_us,sigma_us,path,delay_ns,sigma_mm\n"
    "[1 1 0],1,,,5720.5,5.25,,,,,,\n(1 0 2),,longitudinal,,6319,6,,,,,,\n"
    "0.1 0.2 0.3,,0 0 1,group,4000,4,,,,,,\n[0 0 1],2,,,,,5.012,2.1,0.002,echo,38,0.004\n"
)


def test_what_is_written_reads_back_the_same(tmp_path):
    table = parse_speeds(TABLE)
    path = tmp_path / "out.csv"
    write_speeds(path, table)
    again = read_speeds(path)
    assert again == table
    assert speeds_text(again) == path.read_text(encoding="utf-8")
    assert again.readings[3].flight == table.readings[3].flight


def test_readings_without_words_are_written_by_components():
    table = parse_speeds("nx,ny,nz,speed_m_s,sigma_m_s\n1,2,2,5720,5\n")
    text = speeds_text(table)
    assert text.splitlines()[0] == "direction,speed_m_s,sigma_m_s"
    assert parse_speeds(text).readings[0].direction == pytest.approx((1 / 3, 2 / 3, 2 / 3))


def test_a_missing_file_is_an_input_error(tmp_path):
    with pytest.raises(InputError, match="no such file"):
        read_speeds(tmp_path / "none.csv")
