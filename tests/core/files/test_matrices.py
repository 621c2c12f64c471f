"""Foreign tables: the same invented crystal in many spellings, and what must be asked."""

import time
from pathlib import Path

import numpy as np
import pytest

from core.errors import InputError
from core.files.matrices import read_block, read_table, understand

TABLES = Path(__file__).parent / "tables"

# An invented trigonal crystal, GPa: C11 C12 C13 C14 C33 C44; C66 = (C11 − C12)/2.
CRYSTAL = np.array(
    [
        [93.1, 8.4, 13.2, -16.9, 0, 0],
        [8.4, 93.1, 13.2, 16.9, 0, 0],
        [13.2, 13.2, 104.6, 0, 0, 0],
        [-16.9, 16.9, 0, 57.2, 0, 0],
        [0, 0, 0, 0, 57.2, -16.9],
        [0, 0, 0, 0, -16.9, 42.35],
    ]
)

SPELLINGS = {  # file: readings that the text fixes
    "full_gpa.txt": {"shape": "full 6×6", "unit": "GPa", "kind": "stiffness"},
    "upper_kbar.txt": {"shape": "upper triangle", "unit": "kbar"},
    "list_uncertainties.txt": {"shape": "list", "unit": "GPa", "class": "trigonal_6"},
    "latex_rows.txt": {"shape": "upper triangle", "unit": "GPa"},
    "compliance_rows_tpa.txt": {"kind": "compliance", "unit": "1/TPa",
                                "rows": "11 22 33 12 13 23"},
    "in_a_row_pa.txt": {"unit": "Pa", "shape": "21 along the upper triangle"},
    "decimal_commas.txt": {"unit": "GPa"},
    "kelvin.txt": {"notation": "Kelvin", "unit": "GPa"},
    "nested_lists_mbar.txt": {"unit": "Mbar", "rows": "11 22 33 12 13 23"},
    "lower_dyn.txt": {"shape": "lower triangle", "unit": "1e11 dyn/cm²"},
}  # fmt: skip

QUESTIONS = {  # file: field asked about, and the answer that is right
    "triangles_differ.txt": {"symmetry": "upper"},
    "order_not_said.txt": {"rows": "11 22 33 12 13 23"},
    "no_unit_mbar.txt": {"unit": "Mbar"},
    "compliance_no_unit.txt": {"kind": "compliance", "unit": "1/TPa"},
    "kelvin_not_said.txt": {"notation": "Kelvin"},
}


def text_of(name):
    return (TABLES / name).read_text(encoding="utf-8")


def asked(understood):
    return {guess.field for guess in understood.readings if guess.question}


@pytest.mark.parametrize("name", SPELLINGS)
def test_every_spelling_gives_the_same_crystal(name):
    known = understand(text_of(name), where=name)
    assert known.questions == ()
    np.testing.assert_allclose(known.stiffness, CRYSTAL, rtol=0, atol=1e-8)
    for field, value in SPELLINGS[name].items():
        assert known.reading(field).value == value, field
        assert known.reading(field).reason.endswith(".")
    np.testing.assert_allclose(read_table(text_of(name)).stiffness, CRYSTAL, rtol=0, atol=1e-8)


@pytest.mark.parametrize("name", QUESTIONS)
def test_what_cannot_be_known_is_asked_and_the_answer_settles_it(name):
    answer = QUESTIONS[name]
    known = understand(text_of(name))
    assert asked(known) == set(answer)
    for field, value in answer.items():
        assert value in known.reading(field).choices
    with pytest.raises(InputError):
        read_table(text_of(name))
    settled = understand(text_of(name), answer)
    assert settled.questions == ()
    np.testing.assert_allclose(settled.stiffness, CRYSTAL, rtol=2e-3, atol=6e-3)
    assert all(settled.reading(field).certain for field in answer)


def test_every_table_file_is_tested():
    refused = {"thirty_five.txt", "not_a_table.txt"}
    assert {path.name for path in TABLES.glob("*.txt")} == {*SPELLINGS, *QUESTIONS, *refused}


def test_two_values_of_one_constant_are_both_named_and_any_can_be_chosen():
    text = text_of("triangles_differ.txt")
    (question,) = understand(text).questions
    assert "8.4" in question
    assert "8.9" in question
    values = {
        way: understand(text, {"symmetry": way}).stiffness[0, 1]
        for way in ("upper", "lower", "mean")
    }
    assert values == pytest.approx({"upper": 8.4, "lower": 8.9, "mean": 8.65}, abs=1e-12)


def test_thirty_five_numbers_are_refused_with_what_was_found():
    with pytest.raises(InputError, match="35 numbers in 6 rows") as refused:
        understand(text_of("thirty_five.txt"), where="thirty_five.txt")
    assert refused.value.where == "thirty_five.txt, line 5"


def test_a_text_that_is_no_table_says_which_line_and_why():
    with pytest.raises(InputError, match=r"no numbers.*Line 1 reads “Growth log”"):
        understand(text_of("not_a_table.txt"))
    broken = text_of("full_gpa.txt").replace("104.60", "1o4.60")
    with pytest.raises(InputError, match=r"1o4\.60") as refused:
        understand(broken)
    assert refused.value.where == "line 5, number 3"


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "no numbers"),
        ("168.4", "1 number in 1 row"),
        ("C11 = 168.4\nC12 = \nC44 = 75.4", "No number follows C12"),
        ("C11 = 168.4\nS12 = 3", "both stiffnesses"),
        ("C11 = 168.4\nC12 = 121.4\nC11 = 170\nC44 = 75.4", "C11 is given twice"),
        ("C11 = 168.4\nC12 = 121.4\nC15 = 3", "does not name 22, 33, 44, 55, 66"),
        ("C11 = 168.4\n12.5\nC44 = 3", "without a name"),
        ("C11 = nan\nC12 = 1\nC44 = 1", "“nan” is not a number"),
        ("C11 C12 C44\n168.4 121.4 75.4\n170 120 70", "one row of numbers was expected"),
        ("C11 | 168.4 | 0.3", "“0.3” follows no name"),
        ("1e308 0 0 0 0 0\n" * 6, "too large"),
        ("1,684 1,214 1,214 0 0 0\n" * 6, "thousands or a decimal comma"),
    ],
)
def test_refusals_name_the_fault(text, said):
    with pytest.raises(InputError, match=said):
        understand(text)


def test_ten_megabytes_are_refused_at_once():
    text = "168.4 121.4 121.4 0 0 0\n" * 420_000
    started = time.perf_counter()
    with pytest.raises(InputError, match="characters"):
        understand(text)
    assert time.perf_counter() - started < 0.05


@pytest.mark.parametrize("part", ["(", "±1 ", "[[", "1 ", "C1", "\\", "11 ", "1e", "1(", "$ ",
                                  " ", "\t ", "| "])  # fmt: skip
def test_long_nonsense_is_refused_quickly(part):
    junk = part * (90_000 // len(part))
    started = time.perf_counter()
    with pytest.raises(InputError):
        understand(junk)
    assert time.perf_counter() - started < 2.0


def test_uncertainties_in_their_spellings():
    known = understand(text_of("list_uncertainties.txt"))
    expected = {"11": 0.4, "12": 0.6, "13": 1.1, "14": 0.2, "33": 0.5, "44": 0.3}
    for name, sigma in expected.items():
        assert known.std[int(name[0]) - 1, int(name[1]) - 1] == pytest.approx(sigma)
    # C66 = (C11 − C12)/2 follows: √(0.4² + 0.6²)/2; C24 = −C14 and C22 = C11 as they are.
    assert known.std[5, 5] == pytest.approx(np.hypot(0.4, 0.6) / 2)
    assert known.std[1, 3] == pytest.approx(0.2)
    assert known.std[1, 1] == pytest.approx(0.4)
    assert known.std[0, 4] == 0


@pytest.mark.parametrize(
    ("word", "value", "sigma"),
    [
        ("86.1(4)", 86.1, 0.4), ("86.1(12)", 86.1, 1.2), ("86(4)", 86, 4),
        ("86.1(1.2)", 86.1, 1.2), ("8.61(4)E1", 86.1, 0.4), ("(8.61±0.04)e1", 86.1, 0.4),
        ("86.1±0.4", 86.1, 0.4), ("86.1 ± 0.4", 86.1, 0.4), ("86.1 +/- 0.4", 86.1, 0.4),
        ("86.1 (4)", 86.1, 0.4), ("8.61D+01", 86.1, None), (".861e2", 86.1, None),
    ],
)  # fmt: skip
def test_number_spellings(word, value, sigma):
    known = understand(f"C11 = {word}\nC12 = 7.5\nC44 = 58.2")
    assert known.stiffness[0, 0] == pytest.approx(value, rel=1e-14)
    if sigma is None:
        assert known.std is None
    else:
        assert known.std[0, 0] == pytest.approx(sigma, rel=1e-12)


def test_odd_uncertainties_are_kept_and_noted():
    known = understand("C11 = 86.1 ± -0.4\nC12 = 7.5(9.0)\nC44 = 58.2")
    assert known.std[0, 0] == pytest.approx(0.4)
    assert known.std[0, 1] == pytest.approx(9.0)
    assert any("C11 is negative" in note for note in known.notes)
    assert any("C12 is larger than the value" in note for note in known.notes)


def test_uncertainties_of_compliances_go_through_the_inverse():
    """Against a finite difference of the inverse, for S12 and its mirror image."""
    S = np.linalg.inv(CRYSTAL) * 1e3
    rows = [[f"{x:.12f}" for x in row] for row in S]
    rows[0][1] += "±0.05"
    rows[1][0] += "±0.05"
    known = understand("S in 1/TPa\n" + "\n".join(" ".join(row) for row in rows))
    step = np.zeros((6, 6))
    step[0, 1] = step[1, 0] = 0.05e-3
    change = (np.linalg.inv(S * 1e-3 + step) - np.linalg.inv(S * 1e-3 - step)) / 2
    np.testing.assert_allclose(known.std, np.abs(change), rtol=2e-4, atol=1e-9)


@pytest.mark.parametrize(
    ("names", "key"),
    [
        ("11 12", "isotropic"),
        ("11 12 44", "cubic"),
        ("11 12 13 33 44", "hexagonal"),
        ("11 12 13 33 44 66", "tetragonal_6"),
        ("11 12 13 16 33 44 66", "tetragonal_7"),
        ("11 12 13 14 33 44", "trigonal_6"),
        ("11 12 13 14 15 33 44", "trigonal_7"),
        ("11 12 13 22 23 33 44 55 66", "orthorhombic"),
        ("11 12 13 16 22 23 26 33 36 44 45 55 66", "monoclinic z"),
        ("11 12 13 15 22 23 25 33 35 44 46 55 66", "monoclinic y"),
    ],
)
def test_a_list_tells_its_class_by_what_it_names(names, key):
    values = {
        "11": 210,
        "22": 190,
        "33": 180,
        "44": 60,
        "55": 55,
        "66": 50,
        "12": 70,
        "13": 65,
        "23": 62,
    }
    text = "\n".join(f"c{name} = {values.get(name, 5)}" for name in names.split())
    known = understand(text)
    assert known.reading("class").value == key
    assert known.questions == ()
    assert np.linalg.eigvalsh(known.stiffness).min() > 0


def test_a_list_may_name_what_follows_as_long_as_it_agrees():
    """C66 = (C11 − C12)/2 = 73.2 belongs to a hexagonal crystal, 60 to a tetragonal one."""
    text = "C11 = 210.2\nC12 = 63.8\nC13 = 65\nC33 = 180\nC44 = 60\nC66 = {}"
    assert understand(text.format(73.2)).reading("class").value == "hexagonal"
    assert understand(text.format(60)).reading("class").value == "tetragonal_6"


def test_compliance_lists_follow_the_relations_of_compliances():
    """S66 = 2(S11 − S12) and S56 = 2 S14, not the relations of stiffnesses (Nye 1957)."""
    S = np.linalg.inv(CRYSTAL) * 1e3
    names = ("11", "12", "13", "14", "33", "44")
    text = "\n".join(f"S{n} = {S[int(n[0]) - 1, int(n[1]) - 1]:.10f} TPa^-1" for n in names)
    np.testing.assert_allclose(understand(text).stiffness, CRYSTAL, rtol=0, atol=1e-6)


@pytest.mark.parametrize("line", [
    "C{} = {}", "c_{} {}", "C_{{{}}} & ${}$ \\\\", "C{},{}", "| C{} | {} |", "C{}\t{}",
    "C{}^E: {}",
])
def test_list_spellings(line):
    """Copper, in GPa."""
    constants = {"11": 168.4, "12": 121.4, "44": 75.4}
    known = understand("\n".join(line.format(*item) for item in constants.items()))
    assert known.reading("class").value == "cubic"
    assert [known.stiffness[i, j] for i, j in ((1, 1), (1, 2), (5, 5))] == [168.4, 121.4, 75.4]


def test_names_above_a_row_of_numbers():
    known = understand("c11, c12, c44\n1684, 1214, 754\n")
    assert known.reading("unit").value == "kbar"
    assert known.stiffness[0, 0] == pytest.approx(168.4)
    assert known.stiffness[5, 5] == pytest.approx(75.4)


@pytest.mark.parametrize(
    ("scale", "unit"), [(1, "GPa"), (10, "kbar"), (1000, "MPa"), (1e9, None), (1e10, "dyn/cm²")]
)
def test_units_guessed_from_the_size_of_the_numbers(scale, unit):
    """Copper; 1.7e11 may be Pa, or dyn/cm² of a soft crystal, and is asked about."""
    known = understand(f"C11 = {168.4 * scale}\nC12 = {121.4 * scale}\nC44 = {75.4 * scale}")
    if unit is None:
        assert asked(known) == {"unit"}
        return
    assert known.questions == ()
    assert known.reading("unit").is_guess
    np.testing.assert_allclose(known.stiffness[0, 0], 168.4, rtol=1e-12)


def test_a_pressure_in_a_heading_is_no_unit():
    heading = "Elastic constants at 5 GPa and 300 K, all values in kbar"
    known = understand(f"{heading}\nC11 = 1684\nC12 = 1214\nC44 = 754")
    assert known.reading("unit").value == "kbar"
    assert known.stiffness[0, 0] == pytest.approx(168.4)


def test_a_stated_unit_that_makes_no_solid_is_asked_about():
    known = understand("C_ij (Mbar)\nC11 = 168.4\nC12 = 121.4\nC44 = 75.4")
    assert asked(known) == {"unit"}
    settled = understand("C_ij (Mbar)\nC11 = 168.4\nC12 = 121.4\nC44 = 75.4", {"unit": "GPa"})
    assert settled.questions == ()
    assert settled.stiffness[0, 0] == pytest.approx(168.4)


def test_choices_that_do_not_exist_are_refused():
    text = text_of("full_gpa.txt")
    for overrides in (
        {"unit": "furlong"},
        {"rows": "11 22 33"},
        {"notation": "Bond"},
        {"kind": "hardness"},
        {"unit": "1/GPa"},
    ):
        with pytest.raises(InputError):
            understand(text, overrides)
    with pytest.raises(ValueError, match="colour"):
        understand(text, {"colour": "red"})


def test_each_guess_can_be_overridden_by_itself():
    text = "\n".join(" ".join(f"{x:g}" for x in row) for row in CRYSTAL)
    assert understand(text, {"unit": "kbar"}).stiffness[0, 0] == pytest.approx(9.31)
    kelvin = understand(text, {"notation": "Kelvin"}).stiffness
    assert kelvin[3, 3] == pytest.approx(28.6)
    assert kelvin[0, 3] == pytest.approx(-16.9 / np.sqrt(2))
    rows = understand(text, {"rows": "11 22 33 12 13 23"}).stiffness
    assert rows[0, 5] == pytest.approx(-16.9)
    compliance = understand(text, {"kind": "compliance", "unit": "1/TPa"}).stiffness
    np.testing.assert_allclose(compliance, np.linalg.inv(CRYSTAL * 1e-3), rtol=1e-10, atol=1e-9)
    lower = understand(text_of("in_a_row_pa.txt"), {"shape": "21 along the lower triangle"})
    assert lower.stiffness[1, 1] == pytest.approx(13.2)


def test_an_unstable_table_is_read_and_noted():
    known = understand("C11 = 100\nC12 = 120\nC44 = 50")
    assert any("not stable" in note for note in known.notes)


@pytest.mark.parametrize(
    ("text", "rows"),
    [
        ("1 2\n3 4", [[1, 2], [3, 4]]),
        ("1\t2\n3\t4\n", [[1, 2], [3, 4]]),
        ("1,2,3\n4,5,6", [[1, 2, 3], [4, 5, 6]]),
        ("1,5 2,5\n3 4", [[1.5, 2.5], [3, 4]]),
        ("# c\n−1.5 2\n", [[-1.5, 2]]),
        ("168,4", [[168.4]]),
    ],
)
def test_blocks(text, rows):
    assert read_block(text) == rows


@pytest.mark.parametrize("text", ["", "1 2\n3", "1 x"])
def test_block_refusals(text):
    with pytest.raises(InputError):
        read_block(text)


# --- what a text says of itself -------------------------------------------------------------

LOPSIDED = "168 121 121 0 0 0\n121 168 121 0 0 0\n123 121 168 0 0 0\n" + "".join(
    " ".join("75" if i == j else "0" for j in range(6)) + "\n" for i in range(3, 6)
)
EVEN = LOPSIDED.replace("123", "121")


@pytest.mark.parametrize(("way", "c13"), [("mean", 122.0), ("upper", 121.0), ("lower", 123.0)])
def test_the_advice_about_unequal_cells_can_be_followed(way, c13):
    with pytest.raises(InputError, match="# symmetry: mean \\(or upper, lower\\)"):
        read_table(LOPSIDED)
    found = read_table(f"# symmetry: {way}\n{LOPSIDED}")
    assert found.stiffness[0, 2] == found.stiffness[2, 0] == c13


def test_a_text_chooses_kind_unit_rows_and_notation():
    compliance = np.linalg.inv(CRYSTAL)
    rows = "\n".join(" ".join(map(repr, row)) for row in compliance.tolist())
    said = understand(f"# kind: compliance\n# unit: 1/GPa\n{rows}")
    assert said.stiffness == pytest.approx(CRYSTAL)
    assert said.reading("kind").reason == "The text says so."
    assert said.questions == ()
    assert understand(f"{EVEN}# unit: kbar\n").stiffness[0, 0] == pytest.approx(16.8)
    order = [0, 1, 2, 5, 4, 3]
    swapped = CRYSTAL[np.ix_(order, order)]
    rows = "\n".join(" ".join(map(repr, row)) for row in swapped.tolist())
    said = understand(f"# rows: 11 22 33 12 13 23\n# notation: Voigt\n{rows}")
    assert said.stiffness == pytest.approx(CRYSTAL)
    assert understand(f"# unit: kbar\n{EVEN}", {"unit": "GPa"}).stiffness[0, 0] == 168.0


def test_what_is_not_understood_of_a_text_is_noted():
    notes = read_table(f"# symmetry: avarage\n{EVEN}").guesses
    assert any("“symmetry: avarage”, says nothing that is understood" in note for note in notes)


@pytest.mark.parametrize(
    "line",
    ["# density_kg_m3: 2684", "density: 2684 kg/m3", "# density: 2.684 g/cm³", "rho = 2684(1)"],
)
def test_a_text_carries_density_name_and_class(line):
    facts = read_table(f"{line}\n# name: blank 7\n# crystal_class: cubic\n{EVEN}").facts
    assert (facts.density, facts.name, facts.class_key) == (2684.0, "blank 7", "cubic")
    assert read_table(f"C11 = 168\nC12 = 121\nC44 = 75\n{line}\n").facts.density == 2684.0


def test_a_density_that_is_none_names_its_line():
    with pytest.raises(InputError, match="line 1: “heavy” is not a number"):
        read_table(f"# density_kg_m3: heavy\n{EVEN}")


@pytest.mark.parametrize("name", ["C99", "C17", "S_07", "C111"])
@pytest.mark.parametrize("sign", [" = ", ": ", " "])
def test_a_name_of_no_constant_is_refused(name, sign):
    with pytest.raises(InputError, match=f"line 4: “{name}” is the name of no constant"):
        read_table(f"C11 = 168\nC12 = 121\nC44 = 75\n{name}{sign}3\n")


def test_a_constant_that_breaks_the_class_is_named():
    listed = "C11 = 168\nC12 = 121\nC13 = 100\nC33 = 150\nC44 = 75\nC66 = 30\n"
    with pytest.raises(InputError) as error:
        read_table(f"{listed}# crystal_class: hexagonal\n")
    # (168 − 121)/2
    said = "C66 is 30.00 in the list, but by (C11 − C12)/2 it would be 23.50"
    assert said in str(error.value)
    assert read_table(listed).stiffness[5, 5] == 30.0  # tetragonal, where no class is claimed


@pytest.mark.parametrize(
    "head", ["", "| 11 | 22 | 33 | 23 | 13 | 12 |\n|---|:--:|--:|---|---|---|\n"]
)
def test_a_table_in_bars_is_read(head):
    text = head + "".join(f"| {row.replace(' ', ' | ')} |\n" for row in EVEN.splitlines())
    assert read_table(text).stiffness == pytest.approx(read_table(EVEN).stiffness)
