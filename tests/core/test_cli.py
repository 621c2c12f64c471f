"""The command line as a user meets it: output, one sentence for a fault, and no screen."""

import json
import os
import re
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from core import cli
from core.files.bench import write_bench
from core.files.specimen import write_specimen
from core.state import BenchState, OrientationChoice, Specimen, as_matrix
from core.version import VERSION
from tests.materials import cubic, hexagonal, random_stiffness

ROOT = Path(__file__).parents[2]
CUBE = Specimen("cube", as_matrix(cubic(131.0, 97.4, 86.2)), 8120.0, "cubic")
SLAB = Specimen(
    "slab", as_matrix(hexagonal(158.0, 38.2, 47.5, 54.6, 36.3)), crystal_class="hexagonal"
)
ROCK = Specimen("rock", as_matrix(random_stiffness(np.random.default_rng(2))), 2700.0)


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """Work in a folder with a few specimens."""
    monkeypatch.chdir(tmp_path)
    for specimen in (CUBE, SLAB, ROCK):
        write_specimen(tmp_path / f"{specimen.name}.json", specimen)
    return tmp_path


@pytest.fixture
def run(folder, capsys):
    """Run the command line; returns (status, stdout, stderr)."""

    def run_words(*words):
        status = cli.main(list(words))
        return (status, *capsys.readouterr())

    return run_words


def program(*words, folder=None, **environment):
    """Run the installed program's entry point in a process of its own, without a screen."""
    hidden = {key: value for key, value in os.environ.items()
              if key not in ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM")}  # fmt: skip
    return subprocess.run(
        [sys.executable, "-W", "error", "-m", "gui.launch", *words],
        cwd=folder, env=hidden | {"PYTHONPATH": str(ROOT)} | environment,
        capture_output=True, text=True, encoding="utf-8", timeout=60, check=False,
    )  # fmt: skip


def failed(outcome):
    """Return the one sentence on stderr of a run that must have failed."""
    status, out, err = outcome
    assert status == 2
    assert out == ""
    assert err.startswith("tricline: ")
    assert err.count("\n") == 1
    assert "Traceback" not in err
    return err


# --- verbs ----------------------------------------------------------------------------------


def test_one_file_gives_an_object_and_several_a_list(run):
    status, out, err = run("summary", "cube.json", "--json")
    assert (status, err) == (0, "")
    assert json.loads(out)["name"] == "cube"
    status, out, _ = run("summary", "cube.json", "rock.json", "--json")
    assert [one["name"] for one in json.loads(out)] == ["cube", "rock"]


def test_one_direction_gives_an_object_and_several_a_list(run):
    _, out, _ = run("along", "cube.json", "[1 1 0]", "--json")
    assert json.loads(out)["direction"] == pytest.approx([0.5**0.5, 0.5**0.5, 0])
    _, out, _ = run("along", "cube.json", "[1 1 0]", "0,0,2", "--json")
    assert json.loads(out)[1]["direction"] == [0, 0, 1]


@pytest.mark.parametrize("text", ["-1,0,0", "-.5,0,0", "-1 0 0", "−1,0,0"])
def test_a_direction_may_begin_with_a_minus(run, text):
    status, out, _ = run("along", "rock.json", text, "--json")
    assert status == 0
    assert json.loads(out)["direction"] == [-1, 0, 0]
    status, out, _ = run("along", "rock.json", text)
    assert f"\nAlong {text.replace('−', '-')}\n" in out  # no terminal: as programs read it


def test_rotate_with_options_anywhere(run):
    words = ["--rows", "11 22 33 12 13 23", "--engineering", "--json"]
    status, out, _ = run("rotate", "cube.json", "Z=(1 1 0) X=[0 0 1]", *words)
    found = json.loads(out)
    assert status == 0
    assert found["rows"] == ["11", "22", "33", "12", "13", "23"]
    assert found["engineering"]["young_gpa"][0] == pytest.approx(
        1 / np.linalg.inv(np.array(CUBE.stiffness))[0, 0]
    )
    assert run("rotate", *words, "cube.json", "Z=(1 1 0) X=[0 0 1]")[1] == out


def test_compare_two_orientations_or_two_crystals(run):
    _, out, _ = run("compare", "cube.json", "--b", "axis [1 1 1] 15", "--json")
    found = json.loads(out)
    assert (found["a"]["orientation"], found["b"]["orientation"]) == (
        "identity",
        "axis [1 1 1] 15",
    )
    assert found["misorientation_deg"] == pytest.approx(15)
    _, out, _ = run("compare", "cube.json", "slab.json", "--a", "bunge 1 2 3", "--json")
    found = json.loads(out)
    assert (found["a"]["name"], found["b"]["name"]) == ("cube", "slab")
    assert found["b"]["orientation"] == "identity"
    rows = {row["key"]: row for row in found["rows"]}
    assert rows["speed_X_fastest_km_s"]["b"] is None  # no density


def test_a_bench_file_brings_its_own_a_and_b(run, folder):
    state = BenchState(CUBE, other=ROCK, orientation_b=OrientationChoice("bunge 1 2 3"))
    write_bench(folder / "two.tricline", state)
    _, out, _ = run("compare", "two.tricline", "--json")
    found = json.loads(out)
    assert (found["a"]["name"], found["b"]["name"]) == ("cube", "rock")
    assert found["b"]["orientation"] == "bunge 1 2 3"
    _, out, _ = run("compare", "two.tricline", "--b", "identity", "--json")
    assert json.loads(out)["b"]["orientation"] == "identity"
    _, out, _ = run("summary", "two.tricline", "--json")
    assert json.loads(out)["name"] == "cube"


def test_guesses_about_a_text_table_are_said_on_stderr(run, folder):
    (folder / "run-5.txt").write_text("C11 = 131.0\nC12 = 97.4\nC44 = 86.2\n")
    status, out, err = run("summary", "run-5.txt", "--json")
    assert status == 0
    assert json.loads(out)["symmetry"]["declared"] == "cubic"
    assert err.startswith("tricline: run-5.txt: ")
    assert "GPa" in err


def test_no_document_holds_what_json_has_not(run, folder):
    unstable = Specimen("u", as_matrix(cubic(90.0, 95.0, 40.0)), 4000.0, "cubic")
    singular = Specimen("s", as_matrix(np.zeros((6, 6))), 4000.0)
    for specimen in (unstable, singular):
        write_specimen(folder / "odd.json", specimen)
        for words in (
            ("summary", "odd.json"),
            ("along", "odd.json", "1,1,0"),
            ("rotate", "odd.json", "bunge 1 2 3", "--engineering"),
            ("compare", "odd.json", "cube.json"),
        ):
            status, out, err = run(*words, "--json")
            assert (status, err) == (0, "")
            assert not re.search(r"NaN|Infinity", out)
            status, page, _ = run(*words)
            assert status == 0
            assert not re.search(r"\bnan\b|\binf\b|None", page)


# --- faults ---------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("words", "sentence"),
    [
        (["summary", "none.json"], "none.json: There is no such file."),
        (["summary", "."], "This is a folder"),
        (["summary", "cube.json/below"], "cannot be read"),
        (
            ["summary"],
            "The following arguments are required: FILE. See tricline summary --help.",
        ),
        (["summary", "cube.json", "--jsn"], "“--jsn” is no option."),
        (["along", "cube.json"], "DIRECTION. See tricline along --help."),
        (["along", "cube.json", "up"], "'up' is not a direction"),
        (["along", "cube.json", "[1 1"], "'[1 1' must end with ']'"),
        (["along", "cube.json", "0 0 0"], "zero"),
        (["along", "cube.json", "[1 0 -1 0]"], "four indices"),
        (["along", "slab.json", "[1 0 0]"], "unit cell"),
        (["rotate", "cube.json"], "ORIENTATION"),
        (["rotate", "cube.json", "sideways"], "'sideways' is not an orientation"),
        (["rotate", "cube.json", "(YXq) 5"], "YXq"),
        (["rotate", "cube.json", "matrix 1 2 3"], "nine numbers"),
        (["rotate", "cube.json", "identity", "--rows", "11 22"], "each of 11, 22, 33"),
        (["rotate", "cube.json", "identity", "--rows"], "expected one argument"),
        (
            ["compare", "cube.json", "rock.json", "slab.json"],
            "“slab.json” is one argument too many.",
        ),
        (["compare", "cube.json", "--a", "sideways"], "not an orientation"),
        (["compare", "cube.json", "--a"], "expected one argument"),
        (["sumary", "cube.json"], "“sumary” is not a verb. Did you mean summary?"),
        (["frobnicate"], "There are summary, along, rotate, compare"),
        ([], "VERB"),
        (["--frobnicate"], "“--frobnicate” is no option. See tricline --help."),
    ],
)
def test_a_fault_is_one_sentence_and_status_2(run, words, sentence):
    assert sentence in failed(run(*words))


@pytest.mark.parametrize(
    ("name", "data"),
    [
        ("empty.json", b""),
        ("binary.json", bytes(range(256))),
        ("cut.json", b'{"format": "tricline-specimen", "version": 1, "name": "x", "stiff'),
        ("later.json", b'{"format": "tricline-specimen", "version": 99}'),
        ("bare.json", b'{"format": "tricline-specimen", "version": 1}'),
        ("list.json", b"[]"),
        ("deep.json", b"[" * 50_000),
        ("bench.tricline", b'{"format": "tricline-bench", "version": 1, "specimen": 5}'),
        ("words.txt", "no numbers in here ✓".encode()),
        ("few.txt", b"1 2 3"),
        ("latin.txt", "C11 = 168.4 \xb5".encode("latin-1")),
    ],
)
def test_a_bad_file_is_one_sentence_and_status_2(run, folder, name, data):
    (folder / name).write_bytes(data)
    assert name in failed(run("summary", name))


def test_a_huge_file_is_refused_unread(run, folder):
    with (folder / "huge.json").open("wb") as stream:
        stream.truncate(3_000_000_000)  # sparse
    assert "more than 20 MB" in failed(run("summary", "huge.json"))


def test_an_interrupt_ends_quietly(folder, capsys, monkeypatch):
    def interrupted(_arguments):
        raise KeyboardInterrupt

    monkeypatch.setattr("core.command.verbs.RUN", {"summary": interrupted})
    assert cli.main(["summary", "cube.json"]) == 130
    assert capsys.readouterr() == ("", "")


# --- several files, other ends --------------------------------------------------------------


def test_of_several_files_the_good_ones_are_finished_and_the_bad_named(run):
    status, out, err = run("summary", "none.json", "cube.json", "--json")
    assert status == 2
    assert [one["name"] for one in json.loads(out)] == ["cube"]
    assert err.splitlines() == [
        "tricline: none.json: There is no such file.",
        "tricline: 1 of 2 files cannot be used.",
    ]
    status, out, err = run("summary", "none.json", "gone.json")
    assert (status, out) == (2, "")
    assert "2 of 2 files" in err


def test_a_pattern_in_quotes_means_its_files(run):
    _, out, _ = run("summary", "*.json", "--json")
    assert [one["name"] for one in json.loads(out)] == ["cube", "rock", "slab"]
    assert "No file matches" in failed(run("summary", "*.none"))


def test_a_density_of_the_command_line_goes_before_that_of_the_file(run):
    for words in ("8.12(1) g/cm3", "8120"):
        _, out, _ = run("along", "cube.json", "0,0,1", "--density", words, "--json")
        speed = json.loads(out)["sheets"][0]["speed_km_s"]
        assert speed == pytest.approx((131.0 / 8.120) ** 0.5)  # √(C11/ρ)
    _, out, _ = run("summary", "slab.json", "--density", "3000", "--json")
    assert json.loads(out)["density_kg_m3"] == 3000.0
    assert "“much” is not a number" in failed(run("summary", "slab.json", "--density", "much"))


def test_control_characters_in_a_name_do_not_reach_the_terminal(run, folder):
    odd = Specimen("a\x1b[2Jb\x9bc\u202ed", CUBE.stiffness)
    write_specimen(folder / "odd.json", odd)
    _, page, _ = run("summary", "odd.json")
    assert page.startswith("a\\u001b[2Jb\\u009bc\\u202ed\n")
    _, out, _ = run("summary", "odd.json", "--json")
    assert not set(out) & {"\x1b", "\x9b", "\u202e"}
    assert json.loads(out)["name"] == odd.name
    assert "\x1b" not in failed(run("summary", "no\x1bfile.json"))


def test_a_pipe_gets_numbers_that_programs_read(run):
    _, page, _ = run("rotate", "rock.json", "bunge 1 2 3", "--engineering")
    assert "−" not in page
    assert re.search(r" -\d", page)
    block = page.split("rows 11 22 33 23 13 12\n")[1].splitlines()[:6]
    shown = np.array([row.split() for row in block], dtype=float)
    assert shown == pytest.approx(shown.T)
    points = {tuple(found.start() for found in re.finditer(r"\.", row)) for row in block}
    assert len(points) == 1  # decimal points below each other


def test_a_rotated_table_can_be_read_back(run, folder):
    _, page, _ = run("rotate", "rock.json", "bunge 10 20 30", "--rows", "11 22 33 12 13 23")
    (folder / "turned.txt").write_text(page, encoding="utf-8")
    wanted = json.loads(run("rotate", "rock.json", "bunge 10 20 30", "--json")[1])
    found = json.loads(run("rotate", "turned.txt", "identity", "--json")[1])
    assert np.array(found["stiffness_gpa"]) == pytest.approx(
        np.array(wanted["stiffness_gpa"]), rel=1e-4
    )


@pytest.mark.parametrize(
    ("verb", "name", "said"),
    [
        ("summary", "speeds.csv", "This is a file of measured speeds, not a table of constants."
                                  " Use: tricline recover speeds.csv"),
        ("recover", "cube.json", "a specimen or a bench file, not a table of measured speeds."
                                 " Use: tricline summary"),
    ],
)  # fmt: skip
def test_a_file_for_another_verb_is_sent_there(run, folder, verb, name, said):
    (folder / "speeds.csv").write_text("# density: 1\ndirection,speed_m_s\n1 0 0,5000\n")
    assert said in failed(run(verb, name))


@pytest.mark.skipif(os.name != "posix", reason="a shell closes stdout with >&- there only")
def test_a_closed_stdout_is_no_traceback(folder):
    found = subprocess.run(
        ["sh", "-c", f'"{sys.executable}" -m core.cli summary cube.json >&-'], cwd=folder,
        env=os.environ | {"PYTHONPATH": str(ROOT)}, stderr=subprocess.PIPE, check=False,
    )  # fmt: skip
    assert (found.returncode, found.stderr) == (0, b"")


# --- help -----------------------------------------------------------------------------------


def test_help_teaches(run):
    status, out, err = run("--help")
    assert (status, err) == (0, "")
    for verb in cli.VERBS:
        assert re.search(rf"^ +{verb} ", out, re.MULTILINE)
        status, text, _ = run(verb, "--help")
        assert status == 0
        assert text.startswith(f"usage: tricline {verb} ")
        assert "Examples:\n" in text
        assert "--json" in text
    assert all(len(line) <= 100 for line in out.splitlines())


def _examples(text):
    return re.findall(r'^  (?:"([^"]+)") {2,}', text, re.MULTILINE)


def test_what_help_shows_can_be_typed(run):
    shown = _examples(run("along", "--help")[1])
    assert "[1 1 0]" in shown
    for text in shown:
        if text != "[2 -1 -1 0]":  # needs a hexagonal cell
            assert run("along", "cube.json", text)[0] == 0
    shown = [text for text in _examples(run("rotate", "--help")[1]) if "..." not in text]
    assert len(shown) == 5
    for text in shown:
        assert run("rotate", "cube.json", f"{text} turn 0.5 0 -1")[0] == 0


def test_the_version_is_that_of_the_project(run):
    assert run("--version")[1] == f"tricline {VERSION}\n"
    stated = re.search(
        r'^version = "(.*)"$', (ROOT / "pyproject.toml").read_text(), re.MULTILINE
    )
    assert stated[1] == VERSION


# --- in a process of its own ----------------------------------------------------------------


def test_the_program_needs_no_screen_and_no_qt(folder):
    found = program("summary", "cube.json", "--json", folder=folder)
    assert (found.returncode, found.stderr) == (0, "")
    assert json.loads(found.stdout)["stable"] is True
    report = (
        "import sys\nfrom gui.launch import main\n"
        "for words in (['summary', 'cube.json'], ['along', 'cube.json', '[1 1 0]'],\n"
        "              ['rotate', 'cube.json', 'identity'], ['compare', 'cube.json']):\n"
        "    assert main(words) == 0\n"
        "loaded = {name.split('.')[0] for name in sys.modules}\n"
        "print('LOADED', sorted(loaded & {'PySide6', 'shiboken6', 'pyqtgraph', 'OpenGL'}))\n"
    )
    found = subprocess.run(
        [sys.executable, "-c", report], cwd=folder, text=True, encoding="utf-8",
        env=os.environ | {"PYTHONPATH": str(ROOT)}, capture_output=True, check=True,
    )  # fmt: skip
    assert found.stdout.endswith("LOADED []\n")


def test_help_comes_without_loading_the_kernels(folder):
    report = (
        "import sys\nfrom core.cli import main\nstatus = main(['--help'])\n"
        "print('LOADED', [name for name in ('numpy', 'scipy') if name in sys.modules])\n"
    )
    found = subprocess.run(
        [sys.executable, "-c", report], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert found.stdout.endswith("LOADED []\n")


def test_only_what_integrates_loads_scipy(folder):
    report = (
        "import sys\nfrom core.cli import main\n"
        "main(['along', 'cube.json', '[1 1 0]'])\nprint('LOADED', 'scipy' in sys.modules)\n"
    )
    found = subprocess.run(
        [sys.executable, "-c", report], cwd=folder, env=os.environ | {"PYTHONPATH": str(ROOT)},
        capture_output=True, text=True, encoding="utf-8", check=True,
    )  # fmt: skip
    assert found.stdout.endswith("LOADED False\n")


def test_the_program_refuses_in_one_sentence(folder):
    for words in (["sumary", "cube.json"], ["summary", "none.json"], ["--frobnicate"]):
        found = program(*words, folder=folder)
        failed((found.returncode, found.stdout, found.stderr))


def test_a_window_without_a_screen_is_refused_in_one_sentence(folder):
    found = program("cube.json", folder=folder)
    failed((found.returncode, found.stdout, found.stderr))
    assert "no screen" in found.stderr


def test_a_reader_that_has_seen_enough_is_no_error(folder):
    directions = ["[1 1 0]"] * 200  # more than any pipe holds
    words = [sys.executable, "-m", "gui.launch", "along", "cube.json", *directions, "--json"]
    reading = subprocess.Popen(
        words, cwd=folder, env=os.environ | {"PYTHONPATH": str(ROOT)},
        stdout=subprocess.PIPE, stderr=subprocess.PIPE,
    )  # fmt: skip
    reading.stdout.read(1)
    reading.stdout.close()
    err = reading.stderr.read()
    reading.stderr.close()
    assert reading.wait(timeout=60) == 0
    assert err == b""


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="this system has no such device")
def test_a_full_disk_is_said(folder):
    with Path("/dev/full").open("wb") as full:
        found = subprocess.run(
            [sys.executable, "-m", "core.cli", "along", "cube.json", "[1 1 0]"], cwd=folder,
            env=os.environ | {"PYTHONPATH": str(ROOT)}, stdout=full, stderr=subprocess.PIPE,
            check=False,
        )  # fmt: skip
    failed((found.returncode, "", found.stderr.decode()))


def test_a_terminal_without_utf_8_gets_what_it_can_show(folder):
    found = program("along", "cube.json", "[1 -1 0]", folder=folder, PYTHONIOENCODING="ascii")
    assert found.returncode == 0
    assert " 0.70711 -0.70711 " in found.stdout  # a lost minus would be a wrong number
    found = program("summary", "cube.json", "--json", folder=folder, PYTHONIOENCODING="ascii")
    assert json.loads(found.stdout)["verdict"].endswith("GPa (Hill).")
