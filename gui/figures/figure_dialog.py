"""The dialog that makes a figure: what, how large, in which format, with a true preview."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from PySide6.QtCore import QRectF, QSettings, Qt, QTimer, Signal
from PySide6.QtGui import QCloseEvent, QGuiApplication, QImage, QPainter, QPixmap
from PySide6.QtWidgets import (
    QDialog,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QVBoxLayout,
    QWidget,
)

from core.errors import InputError
from core.files.text import write_bytes
from core.report.captions import FIGURE_KINDS, FigureChoice
from core.state import BenchState
from gui.figures.controls import (
    ask_target,
    choice_of,
    close_box,
    file_stem,
    key_of,
    number_field,
    push,
    quantity_names,
    remembered_flag,
    remembered_number,
    remembered_text,
    show_key,
    shown_names,
    side_names,
    tick_box,
)
from gui.figures.drawing import Drawable, Look, draw_figure, drawable
from gui.figures.export import (
    COLUMN_WIDTHS,
    FORMATS,
    GROUNDS,
    MM,
    FigureForm,
    check_form,
    figure_bytes,
    text_scale,
)
from gui.stage.camera import Camera
from gui.stage.composition import Renderer
from gui.widgets.forms import label, set_or_hide

_PREVIEW = 500  # pixels of the preview's longer side
_PAUSE_MS = 120  # after the last change, before the preview is drawn
_OWN_WIDTH = "own"


@dataclass(frozen=True, eq=False)
class Studio:
    """What figures are made from: the bench as it is, and what draws it.

    Attributes
    ----------
    state : BenchState
    renderer : Renderer
    cameras : mapping of side to Camera
    theme : str
        Name of the theme that the window wears.
    settings : QSettings
    """

    state: BenchState
    renderer: Renderer
    cameras: Mapping[str, Camera]
    theme: str
    settings: QSettings


class FigureDialog(QDialog):
    """Chooses, previews and saves one figure.

    Signals
    -------
    saved(path)
        A file has been written.
    """

    saved = Signal(str)

    def __init__(self, studio: Studio, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Save figure")
        self._studio = studio
        self._drawable: tuple[FigureChoice, bool, Drawable] | None = None
        self._pause = QTimer(self)
        self._pause.setSingleShot(True)
        self._pause.setInterval(_PAUSE_MS)
        self._pause.timeout.connect(self.draw_preview)
        self._make_controls()
        self._lay_out()
        self._recall()
        self._connect()
        self._enable()
        self.draw_preview()

    # ------------------------------------------------------------ building
    def _make_controls(self) -> None:
        state = self._studio.state
        widths = {f"{width:g}": words for words, width in COLUMN_WIDTHS.items()}
        self.kind = choice_of(FIGURE_KINDS, "Kind of figure")
        self.quantity = choice_of(quantity_names(state), "Quantity")
        self.sides = choice_of(side_names(state), "Whose")
        self.shown = choice_of(shown_names(state), "Shown on the hemisphere")
        self.columns = choice_of({**widths, _OWN_WIDTH: "another width"}, "Column width",
                                 "Widths that journals and slides have room for")
        self.width_mm = number_field("Width", "mm", 10.0, 1000.0, 1)
        self.height_mm = number_field("Height", "mm", 10.0, 1000.0, 1)
        self.dpi = number_field("Resolution", "dpi", 72.0, 1200.0, 0, "Of a PNG, and of a "
                                "shaded surface inside SVG and PDF")
        self.text_pt = number_field("Text height", "pt", 4.0, 24.0, 1)
        self.format = choice_of(FORMATS, "Format")
        self.ground = choice_of(GROUNDS, "Ground")
        self.captioned = tick_box("Caption", "Specimen, source, quantity, unit, axes and "
                                  "orientation under the figure")
        self.vectors = tick_box("Surface as vectors", "Triangles of the coarse mesh instead of "
                                "a fine picture inside SVG and PDF")
        self.preview = QLabel()
        self.preview.setAccessibleName("Preview of the figure")
        self.preview.setFixedSize(_PREVIEW + 12, _PREVIEW + 12)
        self.preview.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.words = label(role="secondary", wrap=True)
        self.message = label(role="error", wrap=True)

    def _lay_out(self) -> None:
        form = QFormLayout()
        for words, field in (
            ("What", self.kind), ("Quantity", self.quantity), ("Whose", self.sides),
            ("Hemisphere of", self.shown), ("Column", self.columns), ("Width", self.width_mm),
            ("Height", self.height_mm), ("Text", self.text_pt), ("Format", self.format),
            ("Resolution", self.dpi), ("Ground", self.ground), ("", self.captioned),
            ("", self.vectors),
        ):
            form.addRow(words, field)
        self._buttons = close_box()
        self.save_button = push(self._buttons, "&Save…", "Choose where the figure goes")
        self.copy_button = push(self._buttons, "&Copy picture", "Put it on the clipboard")
        self.save_button.setDefault(True)
        left, right = QVBoxLayout(), QVBoxLayout()
        left.addLayout(form)
        left.addStretch(1)
        left.addWidget(self.message)
        right.addWidget(self.preview)
        right.addWidget(self.words)
        columns = QHBoxLayout()
        columns.addLayout(left, 1)
        columns.addLayout(right)
        whole = QVBoxLayout(self)
        whole.addLayout(columns)
        whole.addWidget(self._buttons)
        self.setMinimumWidth(880)

    def _connect(self) -> None:
        for box in (self.kind, self.quantity, self.sides, self.shown, self.format, self.ground):
            box.activated.connect(self._changed)
        for field in (self.height_mm, self.dpi, self.text_pt):
            field.valueChanged.connect(self._changed)
        self.width_mm.valueChanged.connect(self._width_changed)
        self.columns.activated.connect(self._column_chosen)
        self.captioned.toggled.connect(self._changed)
        self.vectors.toggled.connect(self._changed)
        self.save_button.clicked.connect(self.save)
        self.copy_button.clicked.connect(self.copy)
        self._buttons.rejected.connect(self.reject)

    # ------------------------------------------------------------ what is chosen
    def choice(self) -> FigureChoice:
        """Return the figure that is chosen."""
        return FigureChoice(key_of(self.kind), key_of(self.quantity), key_of(self.sides),
                            key_of(self.shown))

    def form(self) -> FigureForm:
        """Return its form."""
        return FigureForm(
            self.width_mm.value(), self.height_mm.value(),
            self.dpi.value(), self.text_pt.value(),
            key_of(self.ground), self._studio.theme, self.captioned.isChecked(),
            all_vectors=self.vectors.isEnabled() and self.vectors.isChecked())

    def _recall(self) -> None:
        """Show what was used last, and the quantity of the stage."""
        settings, state = self._studio.settings, self._studio.state
        show_key(self.kind, remembered_text(settings, "figure/kind", "surface"))
        show_key(self.quantity, state.quantity)
        show_key(self.sides, state.display.layout)
        show_key(self.shown, state.display.hemisphere)
        self.width_mm.setValue(remembered_number(settings, "figure/width", 174.0))
        self.height_mm.setValue(remembered_number(settings, "figure/height", 100.0))
        self.dpi.setValue(remembered_number(settings, "figure/dpi", 300.0))
        self.text_pt.setValue(remembered_number(settings, "figure/text", 8.0))
        show_key(self.format, remembered_text(settings, "figure/format", "png"))
        show_key(self.ground, remembered_text(settings, "figure/ground", "white"))
        self.captioned.setChecked(remembered_flag(settings, "figure/caption", True))
        self.vectors.setChecked(remembered_flag(settings, "figure/vectors", False))
        self._show_column()

    def _remember(self) -> None:
        form, settings = self.form(), self._studio.settings
        for key, value in (
            ("kind", key_of(self.kind)), ("width", form.width_mm), ("height", form.height_mm),
            ("dpi", form.dpi), ("text", form.text_pt), ("format", key_of(self.format)),
            ("ground", form.ground), ("caption", form.has_caption),
            ("vectors", self.vectors.isChecked()),
        ):
            settings.setValue(f"figure/{key}", value)

    # ------------------------------------------------------------ reacting
    def _changed(self, _value: object = None) -> None:
        self._enable()
        self._pause.start()

    def _width_changed(self, _value: float) -> None:
        self._show_column()
        self._changed()

    def _column_chosen(self, _index: int) -> None:
        if key_of(self.columns) != _OWN_WIDTH:
            self.width_mm.setValue(float(key_of(self.columns)))

    def _show_column(self) -> None:
        index = self.columns.findData(f"{self.width_mm.value():g}")
        self.columns.setCurrentIndex(
            index if index >= 0 else self.columns.findData(_OWN_WIDTH))

    def _enable(self) -> None:
        """Let only be changed what has an effect."""
        kind = key_of(self.kind)
        self.quantity.setEnabled(kind != "source")
        self.shown.setEnabled(kind == "hemisphere")
        self.sides.setEnabled(kind != "hemisphere" and self.sides.count() > 1)
        self.vectors.setEnabled(kind == "surface" and key_of(self.format) != "png")

    def draw_preview(self) -> None:
        """Draw the figure small, with the proportions it will have."""
        self._pause.stop()
        form = self.form()
        try:
            check_form(form)
            shown = self._shown(form)
        except InputError as error:
            self._refuse(str(error))
            return
        self._refuse("")
        dpi = _PREVIEW * MM / max(form.width_mm, form.height_mm)
        width, height = (max(round(side / MM * dpi), 1)
                         for side in (form.width_mm, form.height_mm))
        image = QImage(width, height, QImage.Format.Format_ARGB32_Premultiplied)
        image.fill(0)
        painter = QPainter(image)
        look = Look(form.look_theme, form.ground, self._studio.renderer,  # type: ignore[arg-type]
                    self._studio.cameras, has_caption=form.has_caption)
        draw_figure(painter, QRectF(0, 0, width, height), shown, look, text_scale(form, dpi))
        painter.end()
        self.preview.setPixmap(QPixmap.fromImage(image))
        across, down = form.pixels
        pixels = f", {across:,} × {down:,} pixels" if key_of(self.format) == "png" else ""
        size = f"{form.width_mm:g} × {form.height_mm:g} mm"
        left_out = "" if form.has_caption else f"\n{shown.caption}"
        self.words.setText(f"{size}{pixels}{left_out}")

    def _shown(self, form: FigureForm) -> Drawable:
        """Return the computed figure, from memory while only its form changes."""
        choice = self.choice()
        if self._drawable is None or self._drawable[:2] != (choice, form.all_vectors):
            found = drawable(self._studio.state, choice, is_coarse=form.all_vectors)
            self._drawable = (choice, form.all_vectors, found)
        return self._drawable[2]

    def _refuse(self, message: str) -> None:
        set_or_hide(self.message, message)
        for button in (self.save_button, self.copy_button):
            button.setEnabled(not message)
        if message:
            self.preview.clear()

    # ------------------------------------------------------------ saving
    def save(self) -> None:
        """Ask where the figure goes, make it and write it."""
        kind, form = key_of(self.format), self.form()
        stem = file_stem(self._studio.state.specimen.name, key_of(self.quantity),
                         key_of(self.kind))
        target = ask_target(self, "Save figure", self._studio.settings, stem, f".{kind}",
                            FORMATS[kind])
        if target is None:
            return
        QGuiApplication.setOverrideCursor(Qt.CursorShape.WaitCursor)
        try:
            write_bytes(target, figure_bytes(self._shown(form), kind, form,
                                             self._studio.renderer, self._studio.cameras))
        except InputError as error:
            set_or_hide(self.message, f"The figure was not saved. {error}")
            return
        finally:
            QGuiApplication.restoreOverrideCursor()
        self._remember()
        self.saved.emit(str(target))
        self.accept()

    def copy(self) -> None:
        """Put the figure on the clipboard as a picture."""
        form = self.form()
        data = figure_bytes(self._shown(form), "png", form, self._studio.renderer,
                            self._studio.cameras)
        QGuiApplication.clipboard().setImage(QImage.fromData(data))
        self.words.setText("Copied as a picture.")

    def done(self, result: int) -> None:
        """Leave no timer running."""
        self._pause.stop()
        super().done(result)

    def closeEvent(self, event: QCloseEvent) -> None:
        """Leave no timer running."""
        self._pause.stop()
        super().closeEvent(event)
