"""The verbs that draw, as a terminal starts them."""

import argparse
import hashlib
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from PySide6.QtGui import QImage

from core.command.figure_words import (
    FIGURE_HELP,
    REPORT_HELP,
    SECTION_HELP,
    add_figure,
    add_report,
    add_section,
)
from core.files.specimen import write_specimen
from core.numbers import significant
from core.summary import summarise
from gui.figures import verbs
from gui.launch import main
from gui.stage.flat_scene import FlatRenderer
from tests.core.files.test_meshes import read_ply
from tests.core.files.test_tables import columns_of
from tests.gui.figures.benches import DULL, TRICLINIC, needs_poppler, pdf_text, svg_of

ROOT = Path(__file__).parents[3]


@pytest.fixture(autouse=True)
def _without_opengl(monkeypatch, qapp):
    """Draw with numpy: the verbs are tested here, not the drawing."""
    monkeypatch.setattr(verbs, "make_renderer", lambda report: FlatRenderer())


@pytest.fixture
def piece(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    write_specimen(tmp_path / "piece.json", TRICLINIC)
    return "piece.json"


def refused(capsys, *words):
    """Run a command that is refused; return the one sentence on stderr."""
    assert main(words) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert said.err.startswith("tricline: ")
    assert len(said.err.splitlines()) == 1
    return said.err


# --- section --------------------------------------------------------------------------------


def test_a_section_as_columns(piece, capsys):
    assert main(["section", piece, "--quantity", "young", "--plane", "XY"]) == 0
    found = columns_of(capsys.readouterr().out)
    along_x = summarise_along(TRICLINIC)
    assert found["young [GPa]"][0] == pytest.approx(along_x, rel=1e-12)
    assert found["Z [part]"].max() == 0.0


def summarise_along(specimen):
    from core.summary import along

    return along(specimen, "1,0,0")["young_gpa"]


def test_a_section_as_a_file_and_as_json(piece, capsys, tmp_path):
    assert main(["section", piece, "--quantity", "phase", "--out", "s.csv"]) == 0
    assert "wrote s.csv" in capsys.readouterr().out
    assert "phase fastest [km/s]" in columns_of((tmp_path / "s.csv").read_text())
    assert main(["section", piece, "--quantity", "phase", "--b", "bunge 1 2 3", "--json"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert [curve["side"] for curve in data["curves"]] == ["A"] * 3 + ["B"] * 3


def test_a_section_as_a_figure(piece, capsys, tmp_path):
    assert main(["section", piece, "--quantity", "young", "--out", "s.svg"]) == 0
    _, texts, pictures = svg_of((tmp_path / "s.svg").read_bytes())
    assert pictures == []
    assert any("plane XZ" in text for text in texts)


# --- figure ---------------------------------------------------------------------------------


def test_a_figure_in_pixels(piece, capsys, tmp_path):
    words = ["figure", piece, "--quantity", "young", "--out", "y.png", "--size", "320x240"]
    assert main([*words, "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    data = (tmp_path / "y.png").read_bytes()
    assert (told["width_px"], told["height_px"], told["bytes"]) == (320, 240, len(data))
    assert told["sha256"] == hashlib.sha256(data).hexdigest()
    image = QImage.fromData(data)
    assert (image.width(), image.height()) == (320, 240)


def test_a_figure_in_millimetres(piece, capsys, tmp_path):
    words = ["figure", piece, "--kind", "sweep", "--out", "y.png", "--size", "40x30 mm"]
    assert main([*words, "--dpi", "254", "--ground", "transparent", "--no-caption"]) == 0
    image = QImage.fromData((tmp_path / "y.png").read_bytes())
    assert (image.width(), image.height()) == (400, 300)
    assert image.hasAlphaChannel()
    assert "wrote y.png" in capsys.readouterr().out


def test_both_sides_by_a_word_for_b(piece, tmp_path):
    words = ["figure", piece, "--quantity", "young", "--b", "axis 0,0,1 15"]
    assert main([*words, "--out", "y.svg", "--dpi", "60"]) == 0
    root, texts, pictures = svg_of((tmp_path / "y.svg").read_bytes())
    assert len(pictures) == 2
    assert float(root.get("width")[:-2]) == pytest.approx(174.0, abs=0.1)
    assert "B" in texts


@pytest.mark.parametrize("look", ["X", "Z", "-30,60", "-30,60,2"])
def test_places_to_look_from(piece, tmp_path, look):
    words = ["figure", piece, "--quantity", "young", "--size", "120x120", f"--look={look}"]
    assert main([*words, "--out", "there.png"]) == 0
    assert main([*words[:-1], "--out", "usual.png"]) == 0
    there, usual = ((tmp_path / name).read_bytes() for name in ("there.png", "usual.png"))
    assert there != usual


def test_many_files_by_a_pattern(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    for name in ("one", "two"):
        write_specimen(tmp_path / f"{name}.json", TRICLINIC)
    words = ["figure", "*.json", "--kind", "section", "--size", "100x100"]
    assert main([*words, "--out", "{name}.png", "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    assert [one["file"] for one in told] == ["one.png", "two.png"]
    assert (tmp_path / "two.png").exists()
    assert "{name}" in refused(capsys, *words, "--out", "both.png")


def test_a_mesh_and_a_grid(piece, tmp_path):
    assert main(["figure", piece, "--quantity", "young", "--out", "m.ply"]) == 0
    vertex, _, comments = read_ply((tmp_path / "m.ply").read_text())
    assert len(vertex["x"]) == 10242
    assert "specimen: Test piece" in comments
    assert main(["figure", piece, "--quantity", "young", "--out", "g.csv", "--step", "30"]) == 0
    grid = columns_of((tmp_path / "g.csv").read_text())
    assert len(grid["young [GPa]"]) == 1 + 3 * 12
    assert grid["young [GPa]"].max() <= vertex["value"].max() * (1 + 1e-3)


def test_reproducible_figures_are_the_same_bytes(piece, tmp_path):
    words = ["figure", piece, "--kind", "section", "--reproducible", "--out"]
    for suffix in ("png", "svg", "pdf", "ply"):
        for name in ("a", "b"):
            assert main([*words, f"{name}.{suffix}"]) == 0
        first, second = ((tmp_path / f"{name}.{suffix}").read_bytes() for name in "ab")
        assert first == second


@pytest.mark.parametrize(("words", "sentence"), [
    (("--quantity", "yuong", "--out", "a.png"), "Did you mean 'young'"),
    (("--out", "a.png", "--size", "0x100"), "50 pixels at least"),
    (("--out", "a.png", "--size", "1x1"), "50 pixels at least"),
    (("--out", "a.png", "--size", "5x5mm"), "15 mm at least"),
    (("--out", "a.png", "--size", "nanxinf"), "85x70mm"),
    (("--out", "a.png", "--text", "2"), "4 to 40 points"),
    (("--out", "a.png", "--text", "-8"), "4 to 40 points"),
    (("--out", "a.png", "--kind", "source", "--time", "0"), "From 0.01"),
    (("--out", "a.png", "--kind", "source", "--time", "-1"), "From 0.01"),
    (("--out", "a.png", "--kind", "source", "--time", "1e9"), "to 10,000"),
    (("--out", "{nmae}.png",), "{name} becomes"),
    (("--out", "a.png", "--kind", "hemisphere", "--shown", "difference"), "no B that differs"),
    (("--out", "a.png", "--look", "nan,0"), "azimuth,elevation"),
    (("--out", "a.png", "--a", "bunge 1e300 0 0"), "±1,000,000°"),
    (("--out", "a.png", "--size", "100000x100"), "20,000 pixels"),
    (("--out", "a.png", "--size", "big"), "85x70mm"),
    (("--out", "a.png", "--dpi", "0"), "30 to 2400"),
    (("--out", "a.gif",), ".png, .svg, .pdf"),
    (("--out", "a.png", "--kind", "sektion"), "Did you mean 'section'"),
    (("--out", "a.png", "--side", "C"), "A, B, AB"),
    (("--out", "a.png", "--plane", "XX"), "section plane"),
    (("--out", "a.png", "--look", "up"), "azimuth,elevation"),
    (("--out", "a.png", "--theme", "dark"), "light, night"),
    (("--out", "a.png", "--a", "bunge 1 2"), "bunge"),
    (("--out", "nowhere/a.png", "--size", "50x50"), "cannot be written"),
    (("--out", "g.csv", "--step", "0"), "45 degrees"),
])  # fmt: skip
def test_what_cannot_be_done_is_one_sentence(piece, capsys, tmp_path, words, sentence):
    assert sentence in refused(capsys, "figure", piece, *words)
    assert [path.name for path in tmp_path.iterdir()] == ["piece.json"]


def test_waves_without_a_density(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    write_specimen(tmp_path / "dull.json", DULL.specimen)
    for out in ("a.png", "a.ply"):
        said = refused(capsys, "figure", "dull.json", "--quantity", "wave", "--out", out)
        assert "wants a density" in said
    assert "wants a density" in refused(capsys, "section", "dull.json", "--quantity", "phase")


def test_a_full_disk_leaves_the_old_figure_whole(piece, capsys, tmp_path, monkeypatch):
    (tmp_path / "a.png").write_bytes(b"old")

    def full(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    said = refused(capsys, "figure", piece, "--out", "a.png", "--size", "50x50")
    assert "No space left on device" in said
    assert (tmp_path / "a.png").read_bytes() == b"old"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["a.png", "piece.json"]


# --- report ---------------------------------------------------------------------------------


@needs_poppler
def test_a_report_holds_the_numbers_of_the_summary(piece, capsys, tmp_path):
    words = ["report", piece, "--figure", "section:young:A", "--out", "r.pdf", "--json"]
    assert main(words) == 0
    told = json.loads(capsys.readouterr().out)
    assert told["figures"] == 1
    assert told["sections"][0] == "specimen"
    text = pdf_text((tmp_path / "r.pdf").read_bytes(), tmp_path / "read.pdf")
    for value in summarise(TRICLINIC)["eigenstiffness_gpa"]:
        assert significant(value) in text
    digest = hashlib.sha256((tmp_path / "piece.json").read_bytes()).hexdigest()
    assert digest in text
    assert "tricline report piece.json --figure section:young:A --out report.pdf" in text


def test_reports_are_the_same_bytes_when_asked(piece, tmp_path):
    words = ["report", piece, "--sections", "verdict", "provenance", "--reproducible", "--out"]
    for suffix in ("pdf", "html"):
        for name in ("a", "b"):
            assert main([*words, f"{name}.{suffix}"]) == 0
        first, second = ((tmp_path / f"{name}.{suffix}").read_bytes() for name in "ab")
        assert first == second


@pytest.mark.parametrize(("words", "sentence"), [
    (("--out", "r.docx"), ".pdf or .html"),
    (("--out", "r.pdf", "--paper", "A44"), "Did you mean 'A4'"),
    (("--out", "r.pdf", "--sections", "verdikt"), "no section"),
    (("--out", "r.pdf", "--figure", "section:yung"), "Did you mean 'young'"),
    (("--out", "r.pdf", "--figure", "plot:young"), "kind of figure"),
    (("--out", "r.pdf", "--figure", "section:young:Q"), "A, B, AB"),
    (("--out", "r.pdf", "--figure", "hemisphere:young:cots"), "Did you mean 'cost'"),
    (("--out", "r.pdf", "--figure", "hemisphere:young:difference"), "no B that differs"),
])  # fmt: skip
def test_reports_that_cannot_be_made(piece, capsys, tmp_path, words, sentence):
    assert sentence in refused(capsys, "report", piece, *words)
    assert [path.name for path in tmp_path.iterdir()] == ["piece.json"]


@pytest.mark.parametrize("verb", ["section", "figure", "report"])
def test_help_teaches(verb, capsys):
    assert main([verb, "--help"]) == 0
    text = capsys.readouterr().out
    assert "Examples:" in text
    assert f"tricline {verb} " in text
    assert all(len(line) <= 100 for line in text.splitlines())


# --- no screen ------------------------------------------------------------------------------


NO_SCREENS = [
    {}, {"DISPLAY": ":98765"}, {"QT_QPA_PLATFORM": "xcb"}, {"WAYLAND_DISPLAY": "nowhere-0"},
    {"QT_QPA_PLATFORM": "no such platform", "DISPLAY": "nonsense"},
]  # fmt: skip


def run_alone(words, folder, **screen):
    """Run a verb in a process of its own, with these variables about a screen."""
    gone = ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM", "TRICLINE_REQUIRE_OPENGL")
    environment = {key: value for key, value in os.environ.items() if key not in gone}
    environment |= {"PYTHONPATH": str(ROOT)} | screen
    return subprocess.run(
        [sys.executable, "-m", "gui.launch", *words], cwd=folder, env=environment,
        capture_output=True, text=True, check=False)  # fmt: skip


@pytest.mark.slow
@pytest.mark.parametrize("screen", NO_SCREENS, ids=lambda screen: " ".join(screen) or "none")
def test_drawing_needs_no_screen_whatever_the_environment_says(piece, tmp_path, screen):
    words = ["figure", piece, "--kind", "section", "--out", "a.png"]
    found = run_alone(words, tmp_path, **screen)
    assert (found.returncode, found.stderr) == (0, "")
    assert not QImage(str(tmp_path / "a.png")).isNull()


@pytest.mark.slow
def test_a_report_without_any_screen(piece, tmp_path):
    words = ["report", piece, "--figure", "surface:young:A", "--out", "r.pdf"]
    found = run_alone(words, tmp_path)
    assert (found.returncode, found.stderr) == (0, "")
    assert (tmp_path / "r.pdf").read_bytes().startswith(b"%PDF")


@pytest.mark.slow
def test_reproducible_reports_of_several_processes_are_the_same_bytes(piece, tmp_path):
    # Two fonts, the bold one and the other, whose order in the file hung on chance.
    words = ["report", piece, "--no-figures", "--reproducible", "--out"]
    made = []
    for name in ("a.pdf", "b.pdf", "c.pdf"):
        assert run_alone([*words, name], tmp_path).returncode == 0
        made.append((tmp_path / name).read_bytes())
    assert made[0] == made[1] == made[2]


def test_one_file_that_cannot_be_used_does_not_stop_the_others(piece, capsys, tmp_path):
    (tmp_path / "broken.json").write_text("{")
    words = ["figure", "broken.json", piece, "--kind", "section", "--out", "{name}.svg"]
    assert main(words) == 2
    said = capsys.readouterr().err
    assert "broken.json" in said
    assert "1 of 2 files" in said
    assert (tmp_path / "piece.svg").exists()


def test_help_says_nothing_is_above_that_is_not():
    words = {"--quantity": "A quantity is", "--size": "A size is", "--out": "--out"}
    for text, add in ((SECTION_HELP, add_section), (FIGURE_HELP, add_figure),
                      (REPORT_HELP, add_report)):  # fmt: skip
        verb = argparse.ArgumentParser()
        add(verb)
        for action in verb._actions:
            if "see above" in (action.help or ""):
                named = action.option_strings[0]
                assert words.get(named, named) in text


def test_columns_of_numbers_need_no_qt(piece, tmp_path):
    code = (
        "import sys\n"
        "from gui.launch import main\n"
        f"status = main(['section', {piece!r}, '--out', 's.csv'])\n"
        "print(status, any(name.startswith('PySide6') for name in sys.modules))\n")
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    found = subprocess.run([sys.executable, "-c", code], cwd=tmp_path, env=environment,
                           capture_output=True, text=True, check=True)  # fmt: skip
    assert found.stdout.splitlines()[-1] == "0 False"
