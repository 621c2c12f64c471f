"""The composition root: it alone builds the bench, the window and everything between."""

from __future__ import annotations

import faulthandler
import logging
import signal
import sys
import traceback
from dataclasses import dataclass
from functools import partial
from importlib import resources
from pathlib import Path
from types import TracebackType

from PySide6.QtCore import QSettings, Qt, QTimer
from PySide6.QtGui import QIcon
from PySide6.QtWidgets import QApplication, QMessageBox

from core.errors import InputError
from core.files.opening import open_file, table_text
from core.state import BenchState
from gui.actions import Entry, MenuBar, Menus
from gui.bench import Bench
from gui.cameras import Cameras
from gui.commands import Commands
from gui.documents import FIRST_DEMO, Documents, first_state, open_demo
from gui.dressing import Dressing
from gui.figures.exports import Exports
from gui.help import HelpDialog
from gui.intake import Intake
from gui.intents.deck import DeckIntents
from gui.intents.ledger import LedgerIntents
from gui.intents.speeds import SpeedsIntents
from gui.intents.stage import StageIntents
from gui.intents.trust import TrustIntents
from gui.pace import Pace
from gui.presenters.speeds import SpeedsPresenter
from gui.presenters.window import Presenter
from gui.scheduler import Scheduler
from gui.screen import has_screen
from gui.speeds_files import SpeedFiles
from gui.stage.composition import Renderer
from gui.stage.gl_probe import GlReport, probe
from gui.stage.renderer import make_renderer
from gui.window import Window, build_views

NO_SCREEN = (
    "there is no screen to open a window on; the headless verbs work without one: "
    "try “tricline summary FILE”."
)
_LEAVES = (  # of Help: words in the menu, leaf, key
    ("&Quantities and formulas", "Quantities", "F1"),
    ("&Conventions", "Conventions", ""),
    ("&Keys", "Keys", ""),
    ("Ca&utions", "Cautions", ""),
    ("&About", "About", ""),
)
log = logging.getLogger("tricline")


@dataclass(eq=False)
class Application:
    """Everything that a running window consists of."""

    bench: Bench
    scheduler: Scheduler
    pace: Pace
    window: Window
    presenter: Presenter
    documents: Documents
    cameras: Cameras
    dressing: Dressing
    renderer: Renderer
    menu_bar: MenuBar
    help: HelpDialog
    ledger: LedgerIntents
    stage: StageIntents
    deck: DeckIntents
    trust: TrustIntents
    intake: Intake
    speeds: SpeedsPresenter
    speed_files: SpeedFiles

    def set_title(self, *_ignored: object) -> None:
        """Write the specimen, its file and whether it is saved into the title."""
        path, name = self.documents.path, self.bench.state.specimen.name
        self.window.setWindowTitle(f"{name}{f' ({path.name})' if path else ''}[*] · Tricline")
        self.window.setWindowModified(not self.bench.history.isClean())

    def close(self) -> None:
        """Stop timers and workers and give back what the drawing holds; the window goes."""
        # The stack tells of its own end, when the window it would tell is gone.
        self.bench.history.blockSignals(True)
        self.pace.stop()
        self.scheduler.close()
        self.speeds.close()
        self.help.close()
        for pane in self.window.views.panes.values():
            pane.close()
        self.renderer.close()
        # The menus' actions hold what they call, the window among it.
        self.help.deleteLater()
        self.window.deleteLater()


def build(
    application: QApplication, state: BenchState, settings: QSettings, force_sync: bool = False
) -> Application:
    """Return a whole bench with its window, not yet shown."""
    report = probe()
    renderer = make_renderer(report)
    bench = Bench(state)
    views = build_views(renderer)
    window = Window(views)
    scheduler, pace = Scheduler(window, force_sync), Pace(window)
    presenter = Presenter(bench, scheduler, pace, window, window)
    documents = Documents(bench, window, settings)
    cameras = Cameras(views.panes, window)
    dressing = Dressing(application, window, settings)
    ledger = LedgerIntents(bench, views, window)
    stage = StageIntents(bench, views, window)
    deck = DeckIntents(bench, views, stage, window)
    trust = TrustIntents(bench, views, presenter.trust, window)
    intake = Intake(bench, documents, scheduler, window, window)
    speeds = SpeedsPresenter(bench, Scheduler(window, force_sync), window, window)
    speed_files = SpeedFiles(
        bench, window, documents, SpeedsIntents(bench, views.speeds, speeds, window)
    )
    words = drawing_words(report)
    exports = Exports(bench, window, settings, renderer, lambda: documents.path, words)
    commands = Commands(
        bench, window, documents, intake, exports, speed_files, ledger, stage, cameras, dressing
    )
    help_dialog, menu_bar = _menus(window, commands, words)
    built = Application(
        bench,
        scheduler,
        pace,
        window,
        presenter,
        documents,
        cameras,
        dressing,
        renderer,
        menu_bar,
        help_dialog,
        ledger,
        stage,
        deck,
        trust,
        intake,
        speeds,
        speed_files,
    )
    _connect(built)
    if not report.ok:
        window.show_note("drawn without OpenGL")
    dressing.put_on()
    window.restore_layout(settings)
    presenter.show_all()
    speeds.show_page()
    return built


def _menus(window: Window, commands: Commands, words: str) -> tuple[HelpDialog, MenuBar]:
    """Return Help and the menu bar; each reads the other's table of keys or leaves."""
    plain: Menus = commands.menus(tuple(Entry(title, keys=keys) for title, _, keys in _LEAVES))
    dialog = HelpDialog(plain, words)
    entries = tuple(
        Entry(title, partial(dialog.open_leaf, leaf), keys) for title, leaf, keys in _LEAVES
    )
    return dialog, MenuBar(window, commands.menus(entries))


def drawing_words(report: GlReport) -> str:
    """Return which drawing is in use, for the about leaf."""
    if report.ok:
        return f"OpenGL {report.version}, {report.renderer}"
    return f"without OpenGL ({report.reason})"


def _connect(app: Application) -> None:
    """Join what belongs to no single part."""
    window, history = app.window, app.bench.history
    app.bench.changed.connect(app.set_title)
    app.documents.named.connect(app.set_title)
    history.cleanChanged.connect(app.set_title)
    app.window.cancel_asked.connect(app.scheduler.cancel)
    app.window.cancel_asked.connect(app.speeds.stop)
    app.window.switch.page_chosen.connect(app.speed_files.intents.choose_page)
    for intents in (app.ledger, app.trust, app.intake):
        intents.said.connect(app.window.show_message)
    app.ledger.table_asked.connect(app.intake.take_in)
    window.views.cell.file_asked.connect(app.intake.ask_cell)
    app.trust.refused.connect(app.window.show_refusal)
    bar = window.views.toolbar
    bar.linked_toggled.connect(app.cameras.set_linked)
    bar.linked_toggled.connect(app.presenter.set_linked)
    bar.look_from.connect(app.cameras.look_from)
    undo, redo = app.menu_bar.actions["Undo"], app.menu_bar.actions["Redo"]
    for action, can, text_changed, can_changed, word in (
        (undo, history.canUndo(), history.undoTextChanged, history.canUndoChanged, "&Undo"),
        (redo, history.canRedo(), history.redoTextChanged, history.canRedoChanged, "&Redo"),
    ):
        action.setEnabled(can)
        can_changed.connect(action.setEnabled)
        text_changed.connect(partial(_name_step, action, word))
    app.set_title()


def _name_step(action: object, word: str, text: str) -> None:
    words = f"{word}: {text[0].lower()}{text[1:]}" if text else word
    action.setText(words)  # type: ignore[attr-defined]


# ------------------------------------------------------------------ running
def run(words: list[str]) -> int:
    """Open the window, on a file or on the first demo specimen, and stay until it is closed."""
    if not has_screen():
        sys.stderr.write(f"tricline: {NO_SCREEN}\n")
        return 2
    path = Path(words[0]) if words else None
    try:
        # A text is looked at in the window: a table in its dialog, speeds on their page.
        is_text = path is not None and table_text(path) is not None
        state = first_state(
            open_demo(FIRST_DEMO) if path is None or is_text else open_file(path)
        )
    except InputError as error:
        sys.stderr.write(f"tricline: {error}\n")
        return 2
    faulthandler.enable()
    QApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
    application = QApplication(["tricline"])
    application.setApplicationName("Tricline")
    application.setApplicationDisplayName("")
    application.setStyle("Fusion")
    with resources.as_file(resources.files("assets") / "tricline.svg") as icon:
        application.setWindowIcon(QIcon(icon.as_posix()))
    settings = QSettings("Tricline", "Tricline")
    built = build(application, state, settings)
    built.documents.path = None if is_text else path
    built.set_title()
    sys.excepthook = partial(_report, built.window)
    _obey_interrupts(application)
    built.window.show()
    if is_text and path is not None:
        QTimer.singleShot(0, partial(built.documents.open, path))
    status = application.exec()
    built.window.save_layout(settings)
    built.close()
    return status


def _obey_interrupts(application: QApplication) -> None:
    """Let Ctrl+C in the terminal close the window: Python needs a moment now and then."""
    signal.signal(signal.SIGINT, lambda *_: application.closeAllWindows())
    timer = QTimer(application, interval=250)
    timer.timeout.connect(_breathe)
    timer.start()


def _breathe() -> None:
    """Do nothing: reaching Python is enough for a waiting signal to be seen."""


def _report(
    window: Window, kind: type[BaseException], error: BaseException, trace: TracebackType | None
) -> None:
    """Log a defect of the program and say so; the state on the bench is untouched."""
    text = "".join(traceback.format_exception(kind, error, trace))
    log.error("%s", text)
    box = QMessageBox(window)
    box.setIcon(QMessageBox.Icon.Critical)
    box.setWindowTitle("Tricline")
    box.setText(
        "Something in the program went wrong. Your work is as it was; saving it now is "
        "a good idea."
    )
    box.setDetailedText(text)
    box.exec()
