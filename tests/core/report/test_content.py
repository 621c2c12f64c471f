"""The content of reports: the numbers of the summary, and what each bench calls for."""

import hashlib
import math
import re
from dataclasses import replace

import numpy as np
import pytest

from core.errors import InputError
from core.numbers import significant
from core.report.blocks import Figure, Paragraph, SignOff, Table
from core.report.captions import FigureChoice
from core.report.cautions import CAUTIONS
from core.report.content import (
    SECTIONS,
    ReportPlan,
    bench_digest,
    compared_sides,
    default_figures,
    file_note,
    report_content,
)
from core.state import BenchState, OrientationChoice, Specimen, as_matrix, rotation_of
from core.summary import summarise
from core.task import Cancelled, Ticker
from tests import materials

TRICLINIC = Specimen(
    "first piece", as_matrix(materials.random_physical(np.random.default_rng(3))), 2700.0,
    source="invented", stiffness_std=as_matrix(np.full((6, 6), 0.25)))  # fmt: skip
UNSTABLE = Specimen("broken piece", as_matrix(materials.cubic(100.0, 150.0, 40.0)), 5000.0,
                    "cubic")  # fmt: skip
TURNED = OrientationChoice("bunge 10 20 30")
BENCH = BenchState(TRICLINIC, orientation_b=TURNED, pin=(0.0, 0.6, 0.8))


def text_of(report):
    """Return every word of a report."""
    words = [report.title, report.subtitle, report.made, report.running]
    for section in report.sections:
        words.append(section.title)
        for block in section.blocks:
            if isinstance(block, Table):
                words += [block.title, block.note, *block.header]
                words += [cell for row in block.rows for cell in row]
            elif isinstance(block, Paragraph):
                words.append(block.text)
            elif isinstance(block, Figure):
                words.append(block.caption)
    return "\n".join(words)


def section_of(report, key):
    return next(section for section in report.sections if section.key == key)


def tables_of(report, key):
    return [block for block in section_of(report, key).blocks if isinstance(block, Table)]


def numbers_in(data):
    """Yield every number of a summary that a report shows, with its name."""
    for name, value in data.items():
        if name == "symmetry":
            continue
        if isinstance(value, dict):
            yield from numbers_in(value)
        elif isinstance(value, float) and math.isfinite(value):
            yield name, value
        elif isinstance(value, list) and name == "eigenstiffness_gpa":
            yield from ((name, x) for x in value)


@pytest.mark.parametrize("specimen", [TRICLINIC, UNSTABLE])
def test_every_number_of_the_summary_is_in_the_report(specimen):
    words = set(text_of(report_content(BenchState(specimen), ReportPlan())).split("\n"))
    for name, value in numbers_in(summarise(specimen)):
        if name == "density_kg_m3":
            assert f"{value:g} kg/m³" in words
        else:
            assert significant(value) in words, (name, value)


def test_constants_carry_their_uncertainties():
    table = tables_of(report_content(BENCH, ReportPlan(("constants",))), "constants")[0]
    value = TRICLINIC.stiffness[0][0]
    assert table.rows[0][1] == f"{value:.2f} ± 0.25"
    plain = replace(TRICLINIC, stiffness_std=None)
    bare = tables_of(report_content(BenchState(plain), ReportPlan(("constants",))), "constants")
    assert bare[0].rows[0][1] == significant(value)
    assert "no uncertainties" in bare[0].note


def test_a_covariance_gives_uncertainties_too():
    known = replace(TRICLINIC, stiffness_std=None, covariance=as_matrix(np.eye(21) * 0.16))
    report = report_content(BenchState(known), ReportPlan(("constants",)))
    table = tables_of(report, "constants")
    assert table[0].rows[0][1].endswith("± 0.40")


def test_all_sections_stand_in_their_order():
    plan = ReportPlan(tuple(reversed(SECTIONS)), default_figures(BENCH))
    report = report_content(BENCH, plan)
    assert [section.key for section in report.sections] == list(SECTIONS)
    assert any(isinstance(block, SignOff) for block in section_of(report, "specimen").blocks)


def test_only_the_sections_wanted():
    report = report_content(BENCH, ReportPlan(("cautions", "verdict")))
    assert [section.key for section in report.sections] == ["verdict", "cautions"]
    alone = report_content(BENCH, ReportPlan(("verdict",)))
    assert [section.key for section in alone.sections] == ["verdict", "cautions"]
    with pytest.raises(InputError, match="'verdicts' is no section"):
        report_content(BENCH, ReportPlan(("verdicts",)))


def test_a_verdict_says_its_mark():
    stable = section_of(report_content(BENCH, ReportPlan(("verdict",))), "verdict").blocks[0]
    broken = section_of(
        report_content(BenchState(UNSTABLE), ReportPlan(("verdict",))), "verdict").blocks[0]
    assert stable.role == "good"
    assert stable.text.startswith("Stable:")
    assert broken.role == "alert"


def test_stability_criteria_fail_where_they_fail():
    table = tables_of(report_content(BenchState(UNSTABLE), ReportPlan(("stability",))),
                      "stability")[0]  # fmt: skip
    fails = {row[0]: row[3] for row in table.rows}
    assert fails["C11 − C12 > 0"] == "FAILS"  # 100 − 150
    assert fails["C44 > 0"] == "holds"


def test_cautions_are_all_there_and_some_of_their_own():
    found = [block.text for block in section_of(
        report_content(BenchState(UNSTABLE), ReportPlan(("cautions",))), "cautions").blocks]
    assert found[: len(CAUTIONS)] == list(CAUTIONS)
    own = " ".join(found[len(CAUTIONS) :])
    for words in ("unstable", "no uncertainties", "source of the constants is not stated"):
        assert words in own
    assert len(section_of(report_content(BENCH, ReportPlan(("cautions",))), "cautions").blocks
               ) == len(CAUTIONS)  # fmt: skip


def test_a_against_b_only_where_they_differ():
    assert compared_sides(BENCH) == "AB"
    alone = replace(BENCH, orientation_b=BENCH.orientation_a)
    assert compared_sides(alone) == "A"
    assert all(one.key != "comparison" for one in report_content(alone, ReportPlan()).sections)
    table = tables_of(report_content(BENCH, ReportPlan(("comparison",))), "comparison")[0]
    row = next(row for row in table.rows if row[0] == "E along X, GPa")
    stiffness = np.array(TRICLINIC.stiffness)
    young_a = 1 / np.linalg.inv(stiffness)[0, 0]
    assert row[1] == significant(young_a)
    assert table.header == ("", "A", "B", "B − A")


def test_two_crystals_are_both_reported():
    both = replace(BENCH, other=replace(UNSTABLE, density=None), display=replace(
        BENCH.display, layout="AB"))
    report = report_content(both, ReportPlan(figures=default_figures(both)))
    words = text_of(report)
    assert report.title == "first piece and broken piece"
    assert "A: Stiffness C, GPa, crystal axes" in words
    assert "B: Stiffness C, GPa, crystal axes" in words
    assert all(choice.kind != "source" for choice in default_figures(both))


def test_differences_of_equal_numbers_are_zero():
    cubic = Specimen("cube", as_matrix(materials.cubic(190.0, 118.0, 92.0)), 8000.0, "cubic")
    bench = BenchState(cubic, orientation_b=OrientationChoice("axis [0 0 1] 90"))
    table = tables_of(report_content(bench, ReportPlan(("comparison",))), "comparison")[0]
    assert {row[3] for row in table.rows} <= {"0", "–"}


def test_default_figures_are_eight_at_most_and_can_all_be_drawn():
    figures = default_figures(BENCH)
    assert len(figures) == 8
    report = report_content(BENCH, ReportPlan(("figures",), figures))
    numbers = [block.number for block in section_of(report, "figures").blocks]
    assert numbers == list(range(1, 9))
    without = replace(BENCH, specimen=replace(TRICLINIC, density=None), quantity="slowness")
    assert {choice.quantity for choice in default_figures(without)} == {"young"}


def test_a_figure_that_cannot_be_drawn_is_refused_before_anything_is():
    bench = BenchState(replace(TRICLINIC, density=None))
    with pytest.raises(InputError, match="wants a density"):
        report_content(bench, ReportPlan(figures=(FigureChoice("surface", "phase"),)))


def test_methods_name_formula_and_source_of_what_is_shown():
    plan = ReportPlan(("methods", "averages", "figures"),
                      (FigureChoice("hemisphere", "focusing"),))  # fmt: skip
    rows = tables_of(report_content(BENCH, plan), "methods")[0].rows
    names = " ".join(row[0] for row in rows)
    assert "Reuss average" in names
    assert "Focusing" in names
    assert "Extremes" not in names
    assert all(all(row) for row in rows)


def test_provenance_knows_file_bench_and_date(tmp_path):
    path = tmp_path / "b.json"
    path.write_bytes(b"some bytes")
    note = file_note(path)
    assert note.sha256 == hashlib.sha256(b"some bytes").hexdigest()
    plan = ReportPlan(("provenance",), file=note, made="2031-05-17", again="tricline report b")
    rows = dict(tables_of(report_content(BENCH, plan), "provenance")[0].rows)
    assert rows["file"] == "b.json"
    assert rows["SHA-256 of the file"] == note.sha256
    assert rows["SHA-256 of the bench"] == bench_digest(BENCH)
    assert rows["made on"] == "2031-05-17"
    assert rows["the same again"] == "tricline report b"
    changed = replace(plan, file=replace(note, is_current=False))
    rows = dict(tables_of(report_content(BENCH, changed), "provenance")[0].rows)
    assert "changed" in rows["since then"]
    with pytest.raises(InputError, match="cannot be read"):
        file_note(tmp_path / "missing")


def test_the_same_bench_gives_the_same_report():
    plan = ReportPlan(figures=default_figures(BENCH))
    assert report_content(BENCH, plan) == report_content(BENCH, plan)
    assert bench_digest(BENCH) == bench_digest(replace(BENCH))
    assert bench_digest(BENCH) != bench_digest(replace(BENCH, quantity="slowness"))


def test_progress_is_told_and_cancelling_heard():
    told = []
    report_content(BENCH, ReportPlan(("verdict", "stability")), Ticker(told.append))
    assert told[0] == 0.0
    assert max(told) < 1.0
    with pytest.raises(Cancelled):
        report_content(BENCH, ReportPlan(), Ticker(is_cancelled=lambda: True))


def test_what_is_odd_about_a_crystal_stands_under_the_verdict():
    light = replace(TRICLINIC, density=2.7)  # g/cm³ taken for kg/m³
    words = [block.text for block in section_of(
        report_content(BenchState(light), ReportPlan(("verdict",))), "verdict").blocks
        if isinstance(block, Paragraph)]  # fmt: skip
    assert any("2.7" in text and "g/cm³" in text for text in words)


def cubic_turned(text):
    """Return a bench with a cubic table written in axes that are not the cube's."""
    turn = rotation_of(OrientationChoice(text), UNSTABLE)
    table = materials.rotated(materials.cubic(230.0, 140.0, 120.0), turn)
    return BenchState(Specimen("turned piece", as_matrix(table), 8000.0, "cubic")), turn


def test_axes_that_look_wrong_are_said_and_the_right_ones_given():
    bench, turn = cubic_turned("bunge 20 15 5")
    report = report_content(bench, ReportPlan(("symmetry", "cautions")))
    said = section_of(report, "symmetry").blocks[1]
    assert said.role == "doubt"
    assert said.text.startswith("The axes look wrong: turned by ")
    assert said.text.partition("table is ")[2].startswith("cubic exactly")
    axes = next(table for table in tables_of(report, "symmetry")
                if table.title == "Axes in which the table is cubic")  # fmt: skip
    found = np.array([[float(x.replace("−", "-")) for x in row[1:4]] for row in axes.rows])
    # v_turned = turn v_cube: each of the cube's axes is a column of the rotation.
    shares = np.abs(found @ turn)
    assert np.allclose(np.sort(shares, axis=1), [[0, 0, 1]] * 3, atol=1e-4)
    assert any("axes look wrong" in block.text
               for block in section_of(report, "cautions").blocks)  # fmt: skip


def test_axes_that_serve_are_left_alone():
    bench, _ = cubic_turned("identity")
    report = report_content(bench, ReportPlan(("symmetry",)))
    assert "look wrong" not in text_of(report)
    distances = dict(tables_of(report, "symmetry")[-1].rows)
    assert distances["cubic"] == distances["triclinic"] == "exact"
    assert float(distances["isotropic"]) > 1.0
    assert "⁻" not in text_of(report)


def test_the_zener_ratio_is_named_only_where_it_is():
    cubic, _ = cubic_turned("identity")
    with_zener, without = (
        next(table for table in tables_of(report_content(bench, ReportPlan(("averages",))),
                                          "averages") if table.title == "Anisotropy")
        for bench in (cubic, BENCH))  # fmt: skip
    assert "Zener" in with_zener.note
    assert "Zener" not in without.note
    assert {row[0]: row[1] for row in with_zener.rows}["percent anisotropy of K"] == "0"


def test_angles_of_an_orientation_have_few_digits():
    bench = replace(BENCH, orientation_b=OrientationChoice("axis 1,1,0.2 15.123"))
    words = text_of(report_content(bench, ReportPlan(("orientation",))))
    assert re.search(r"\d\.\d{6,}", words) is None
