"""Files in the whole window: open, save, recent, dropped; no work is lost unasked."""

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import QApplication, QFileDialog, QMessageBox

from core.files.text import LARGEST_FILE
from core.state import BenchState
from gui.documents import demo_files, first_state, open_demo
from tests.gui.driving import (
    fill_in,
    load,
    menu,
    pick,
    pictures,
    settle,
    type_cell,
)

pytestmark = pytest.mark.usefixtures("without_spreads")
BUTTONS = QMessageBox.StandardButton


class Answers:
    """Stands for the user before dialogs: answers questions, chooses files, reads warnings."""

    def __init__(self, patch):
        self.asked, self.warned, self.answer = [], [], None
        self.open_path = self.save_path = ""
        self.kind = ""
        patch.setattr(QMessageBox, "exec", lambda box: self._question(box))
        patch.setattr(QMessageBox, "warning", lambda _parent, *words: self.warned.append(words))
        patch.setattr(QFileDialog, "getOpenFileName", lambda *_: (str(self.open_path), ""))
        patch.setattr(QFileDialog, "getSaveFileName", self._save)

    def _question(self, box):
        assert self.answer is not None, f"nobody expected {box.text()!r}"
        self.asked.append(box.text())
        return self.answer

    def _save(self, _parent, _title, suggested, _filters):
        self.suggested = suggested
        return str(self.save_path), self.kind


@pytest.fixture
def user(monkeypatch):
    return Answers(monkeypatch)


@pytest.fixture
def edited(app):
    """The program with one change that is not saved."""
    fill_in(app, "Density in kg/m³", "2700")
    assert not app.bench.history.isClean()
    return app


def demo_path(name):
    import demo_materials

    return Path(demo_materials.__file__).parent / name


def title(app):
    return app.window.windowTitle().replace("[*]", "*" if app.window.isWindowModified() else "")


# ------------------------------------------------------------------ opening
def test_a_file_is_opened_and_heads_the_recent_ones(app, user):
    user.open_path = demo_path("casting_lm40_cubic.json")
    menu(app, "Open…")
    settle(app)
    assert app.bench.state == first_state(open_demo("casting_lm40_cubic.json"))
    assert title(app) == "Lanternmoor seeded casting LM-40 (casting_lm40_cubic.json) · Tricline"
    assert not app.bench.history.canUndo()
    user.open_path = demo_path("rod_lm12_trigonal.json")
    menu(app, "Open…")
    recent = submenu(app, "Open recent")
    assert [a.text() for a in recent] == ["rod_lm12_trigonal.json", "casting_lm40_cubic.json"]
    recent[1].trigger()
    assert app.bench.state.specimen.name.endswith("LM-40")
    assert [a.text() for a in submenu(app, "Open recent")] == [
        "casting_lm40_cubic.json", "rod_lm12_trigonal.json",
    ]  # fmt: skip


def submenu(app, words):
    below = next(
        action.menu()
        for top in app.window.menuBar().actions()
        for action in top.menu().actions()
        if action.menu() is not None and action.text().replace("&", "") == words
    )
    below.aboutToShow.emit()
    return below.actions()


def test_a_recent_file_that_is_gone_is_complained_of(app, user, tmp_path):
    path = tmp_path / "gone.json"
    path.write_text(demo_path("casting_lm40_cubic.json").read_text())
    app.documents.open(path)
    path.unlink()
    before = app.bench.state
    submenu(app, "Open recent")[0].trigger()
    assert "no such file" in user.warned[0][1]
    assert app.bench.state == before


def test_every_demo_opens_from_its_menu(app, user):
    entries = submenu(app, "Open a demo")
    files = demo_files()
    assert len(files) >= 9
    # Readings, which follow, are no specimens.
    for entry, (name, words) in zip(entries[: len(files)], files, strict=True):
        assert entry.text() == words
        entry.trigger()
        assert app.bench.state == first_state(open_demo(name))
        assert app.documents.path is None
        assert app.window._message.text().startswith("Opened")
    assert [a.text() for a in submenu(app, "Open recent")] == ["nothing opened yet"]


def test_a_dropped_file_is_opened(app, user):
    mime = QMimeData()
    mime.setUrls([QUrl.fromLocalFile(str(demo_path(name))) for name in (
        "slab_lm18_hexagonal.json", "rod_lm12_trigonal.json")])  # fmt: skip
    at = QPointF(400, 400)
    arguments = (Qt.DropAction.CopyAction, mime, Qt.MouseButton.LeftButton,
                 Qt.KeyboardModifier.NoModifier)  # fmt: skip
    entering = QDragEnterEvent(at.toPoint(), *arguments)
    QApplication.sendEvent(app.window, entering)
    assert entering.isAccepted()
    QApplication.sendEvent(app.window, QDropEvent(at, *arguments))
    assert app.bench.state == first_state(open_demo("slab_lm18_hexagonal.json"))
    assert "first was opened" in app.window._message.text()
    words = QMimeData()
    words.setText("no file")
    refused = QDragEnterEvent(at.toPoint(), Qt.DropAction.CopyAction, words,
                              *arguments[2:])  # fmt: skip
    QApplication.sendEvent(app.window, refused)
    assert not refused.isAccepted()


def test_a_table_of_numbers_is_looked_at_before_it_is_used(app, user, tmp_path):
    path, met = tmp_path / "table.txt", []
    rows = first_state(open_demo("casting_lm40_cubic.json")).specimen.stiffness
    path.write_text("\n".join(" ".join(f"{x:g}" for x in row) for row in rows))
    before = app.bench.state
    app.documents.table_met.connect(lambda text, where: met.append(where))
    assert app.documents.open(path)
    assert met == [path]
    assert app.bench.state == before


BAD_FILES = {
    "missing": None,
    "empty": b"",
    "not JSON": b"{this is not JSON",
    "binary": bytes(range(256)) * 40,
    "a picture": b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR",
    "lacks keys": b'{"format": "tricline-specimen", "version": 1}',
    "another format": b'{"format": "somebody-else", "version": 1}',
    "a later version": b'{"format": "tricline-specimen", "version": 99, "name": "x"}',
    "a later bench": b'{"format": "tricline-bench", "version": 99}',
    "five rows": json.dumps({"format": "tricline-specimen", "version": 1, "name": "x",
                             "stiffness_gpa": [[1.0] * 6] * 5}).encode(),
    "NaN": b'{"format": "tricline-specimen", "version": 1, "name": "x", "stiffness_gpa": '
           b"[" + b",".join([b"[NaN,0,0,0,0,0]"] * 6) + b"]}",
    "a list": b"[1, 2, 3]",
}  # fmt: skip


def test_bad_files_leave_the_bench_as_it_was(app, user, tmp_path):
    for kind, content in BAD_FILES.items():
        path = tmp_path / f"{kind}.json"
        if content is not None:
            path.write_bytes(content)
        check_refused(app, user, path)


def test_a_huge_file_and_a_folder_are_refused(app, user, tmp_path):
    path = tmp_path / "huge.json"
    with path.open("wb") as stream:
        stream.seek(10 * LARGEST_FILE)
        stream.write(b"}")
    check_refused(app, user, path)
    check_refused(app, user, tmp_path)


def check_refused(app, user, path):
    before, seen, said = app.bench.state, title(app), len(user.warned)
    assert app.documents.open(path) is False
    (heading, sentence), *more = user.warned[said:]
    assert more == []
    assert heading == "The file was not opened"
    assert 10 < len(sentence) < 400
    assert path.name in sentence
    assert app.bench.state == before
    assert title(app) == seen
    assert str(path) not in app.documents.recent


def test_a_bad_file_is_refused_before_unsaved_work_is_asked_about(edited, user, tmp_path):
    path = tmp_path / "bad.json"
    path.write_bytes(b"{")
    state = edited.bench.state
    assert edited.documents.open(path) is False
    assert user.asked == []
    assert len(user.warned) == 1
    assert edited.bench.state == state
    assert edited.bench.history.canUndo()


# ------------------------------------------------------------------ saving
def test_a_saved_bench_reopens_to_the_same_state_and_picture(app, user, tmp_path):
    fill_in(app, "Orientation A", "(YXl) 35.25")
    pick(app, "Quantity", "slowness")
    type_cell(app, 0, 0, "91.5")
    app.stage.move_pin((0.0, 0.6, 0.8))
    app.stage.choose_plane("XY")
    app.stage.toggle("crystal_axes", True)
    app.window.setFocus()
    settle(app)
    saved, seen = app.bench.state, pictures(app)
    user.save_path = tmp_path / "mine"
    menu(app, "Save as…")
    assert (tmp_path / "mine.tricline").exists()
    assert app.bench.history.isClean()
    assert title(app) == "Lanternmoor blank LM-7 (mine.tricline) · Tricline"
    load(app, "casting_lm40_cubic.json")
    assert app.documents.open(tmp_path / "mine.tricline")
    app.window.setFocus()
    settle(app)
    assert app.bench.state == saved
    for name, reopened in pictures(app).items():
        # Smoothed edges may come out a shade otherwise; nothing that an eye could see.
        apart = np.abs(reopened.astype(int) - seen[name]).max(axis=2)
        assert apart.max() <= 8, name
        assert (apart > 0).mean() < 1e-3, name


def test_save_writes_to_the_file_it_came_from(app, user, tmp_path):
    path = tmp_path / "rod.json"
    path.write_bytes(demo_path("rod_lm12_trigonal.json").read_bytes())
    app.documents.open(path)
    fill_in(app, "Density in kg/m³", "2700")
    assert title(app).split(" (")[1] == "rod.json)* · Tricline"
    menu(app, "Save")
    assert json.loads(path.read_text())["density_kg_m3"] == 2700.0
    assert app.bench.history.isClean()
    assert title(app).endswith("(rod.json) · Tricline")
    menu(app, "Undo")
    assert app.window.isWindowModified()


def test_a_specimen_alone_is_saved_as_such_and_it_is_said(app, user, tmp_path):
    user.save_path, user.kind = tmp_path / "crystal", "Specimen only (*.json)"
    menu(app, "Save as…")
    path = tmp_path / "crystal.json"
    assert json.loads(path.read_text())["format"] == "tricline-specimen"
    assert "specimen only" in app.window._message.text()
    app.documents.open(path)
    specimen = first_state(open_demo("two_cuts_lm7.tricline")).specimen
    assert app.bench.state == BenchState(specimen)


def test_a_demo_is_saved_to_a_place_that_is_asked_for(app, user, tmp_path):
    original = demo_path("two_cuts_lm7.tricline").read_bytes()
    user.save_path = ""
    menu(app, "Save")
    assert user.suggested.endswith("Lanternmoor_blank_LM-7.tricline")
    assert app.documents.path is None
    assert demo_path("two_cuts_lm7.tricline").read_bytes() == original


def test_a_place_that_cannot_be_written_is_complained_of(edited, user, tmp_path):
    user.save_path = tmp_path / "no such folder" / "mine.tricline"
    menu(edited, "Save as…")
    assert user.warned[0][0] == "The file was not saved"
    assert not edited.bench.history.isClean()
    assert edited.documents.path is None


def test_unknown_keys_of_a_bench_survive(app, user, tmp_path):
    path = tmp_path / "later.tricline"
    data = json.loads(demo_path("two_cuts_lm7.tricline").read_text())
    path.write_text(json.dumps({**data, "remarks_of_a_friend": [1, 2]}))
    app.documents.open(path)
    fill_in(app, "Density in kg/m³", "2700")
    menu(app, "Save")
    assert json.loads(path.read_text())["remarks_of_a_friend"] == [1, 2]


# ------------------------------------------------------------------ questions
def test_cancel_keeps_the_work_and_the_window(edited, user):
    user.answer = BUTTONS.Cancel
    state = edited.bench.state
    assert edited.documents.open(demo_path("casting_lm40_cubic.json")) is False
    submenu(edited, "Open a demo")[1].trigger()
    assert edited.window.close() is False
    assert edited.window.isVisible()
    assert len(user.asked) == 3
    assert "Lanternmoor blank LM-7 has changes" in user.asked[0]
    assert edited.bench.state == state


def test_discard_lets_the_work_go(edited, user):
    user.answer = BUTTONS.Discard
    assert edited.documents.open(demo_path("casting_lm40_cubic.json"))
    assert edited.bench.state.specimen.name.endswith("LM-40")
    assert edited.bench.history.isClean()


def test_save_saves_first(edited, user, tmp_path):
    user.answer, user.save_path = BUTTONS.Save, tmp_path / "kept.tricline"
    assert edited.documents.open(demo_path("casting_lm40_cubic.json"))
    kept = json.loads((tmp_path / "kept.tricline").read_text())
    assert kept["specimen"]["density_kg_m3"] == 2700.0
    assert edited.bench.state.specimen.name.endswith("LM-40")


def test_a_save_that_is_broken_off_keeps_everything(edited, user):
    user.answer, user.save_path = BUTTONS.Save, ""
    state = edited.bench.state
    assert edited.documents.open(demo_path("casting_lm40_cubic.json")) is False
    assert edited.bench.state == state


def test_a_closed_window_asks_only_when_something_is_unsaved(app, user):
    from PySide6.QtGui import QCloseEvent

    quiet = QCloseEvent()
    app.window.closeEvent(quiet)
    assert quiet.isAccepted()
    assert user.asked == []
    fill_in(app, "Density in kg/m³", "2700")
    menu(app, "Undo")
    app.window.closeEvent(QCloseEvent())
    assert user.asked == []


# ------------------------------------------------------------------ another crystal
def test_another_crystal_for_b_from_a_file(app, user, tmp_path):
    user.open_path = demo_path("slab_lm18_hexagonal.json")
    menu(app, "Another crystal in B…")
    assert app.bench.state.other.name.endswith("LM-18")
    path = tmp_path / "bad.json"
    path.write_text("{")
    user.open_path, before = path, app.bench.state
    menu(app, "Another crystal in B…")
    assert app.bench.state == before
    assert len(user.warned) == 1


def test_two_crystals_are_saved_together(app, user, tmp_path):
    user.open_path = demo_path("slab_lm18_hexagonal.json")
    menu(app, "Another crystal in B…")
    saved = app.bench.state
    user.save_path = tmp_path / "two.tricline"
    menu(app, "Save as…")
    load(app, "casting_lm40_cubic.json")
    app.documents.open(tmp_path / "two.tricline")
    assert app.bench.state == saved


def test_a_bench_whose_orientation_cannot_be_read_is_refused(app, user, tmp_path):
    path = tmp_path / "odd.tricline"
    data = json.loads(demo_path("two_cuts_lm7.tricline").read_text())
    data["orientation_b"]["text"] = "sideways"
    path.write_text(json.dumps(data))
    check_refused(app, user, path)


# ------------------------------------------------------------------ pictures
def test_two_panes_make_one_picture(app):
    menu(app, "Copy stage picture")
    image = QApplication.clipboard().image()
    assert (image.width(), image.height()) == (2800, 1200)
    state = app.bench.state
    same = replace(state, orientation_b=state.orientation_a)
    assert same != state
    from tests.gui.driving import pixels_of

    pixels = pixels_of(image)
    left, right = pixels[100:1000, 5:1395], pixels[100:1000, 1405:2795]
    assert (np.abs(left.astype(int) - right).max(axis=2) > 20).mean() > 0.02
