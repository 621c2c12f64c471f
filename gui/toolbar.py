"""The controls above the stage: what is drawn, how, and from where."""

from __future__ import annotations

from typing import NamedTuple

from PySide6.QtCore import QPoint, QRect, QSize, Qt, Signal
from PySide6.QtGui import QAction, QResizeEvent, QStandardItemModel
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QMenu,
    QSizePolicy,
    QToolButton,
    QWidget,
)

from gui.viewdata import ToolbarView
from gui.widgets.forms import Choice, label

MARGIN = 8
SPACING = 10
ROW_SPACING = 6
COMBO_FRAME = 34  # of a choice around its words, pixels
WORDS_GAP = 3  # after the words before a control
NARROW_BUTTON = "QToolButton { padding: 3px 4px; }"  # for buttons of one letter


class Option(NamedTuple):
    """Something that is on or off: its name, words, tooltip, and what it is good for."""

    name: str
    words: str
    tooltip: str
    on_row: bool = False  # has a button on the row when there is room
    waves_only: bool = False
    pairs_only: bool = False  # means nothing while one pane is shown


OPTIONS = (
    Option(
        "linked_cameras",
        "Turn together",
        "Turn A and B with one camera.",
        on_row=True,
        pairs_only=True,
    ),
    Option(
        "shared_scale",
        "Same scale",
        "Draw A and B at one size and with one range of colours.",
        on_row=True,
        pairs_only=True,
    ),
    Option(
        "cut_away",
        "Cut open",
        "Open the surfaces at the section plane to see inside.",
        on_row=True,
    ),
    Option("crystal_axes", "Crystal axes a, b, c", "Draw a, b, c beside the part axes."),
    Option(
        "marks",
        "Axes of degeneracy",
        "Mark the directions in which two sheets touch.",
        waves_only=True,
    ),
    Option(
        "ticks",
        "Polarisation ticks",
        "Draw the direction of motion on the sheets.",
        waves_only=True,
    ),
)
LAYOUTS = (
    ("A", "A", "Show A alone."),
    ("AB", "A + B", "Show A and B side by side."),
    ("B", "B", "Show B alone."),
)
SHEETS = (
    ("1", "Show the fastest sheet."),
    ("2", "Show the middle sheet."),
    ("3", "Show the slowest sheet."),
)
VIEWPOINTS = (
    ("X", "Look along part X"),
    ("Y", "Look along part Y"),
    ("Z", "Look along part Z"),
    ("home", "Look from the corner"),
)


def flow(sizes: list[QSize], width: int) -> tuple[list[QRect], int]:
    """Place boxes in rows from left to right; return their places and the height in all."""
    places: list[QRect] = []
    x, y, row_height = MARGIN, ROW_SPACING, 0
    for size in sizes:
        if x > MARGIN and x + size.width() > width - MARGIN:
            x, y, row_height = MARGIN, y + row_height + ROW_SPACING, 0
        places.append(QRect(QPoint(x, y), size))
        x += size.width() + SPACING
        row_height = max(row_height, size.height())
    return places, y + row_height + ROW_SPACING


def _tool(words: str, tooltip: str) -> QToolButton:
    button = QToolButton()
    button.setText(words)
    button.setToolTip(tooltip)
    button.setAccessibleName(tooltip.rstrip("."))
    button.setCheckable(True)
    button.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
    return button


class Group(QWidget):
    """Controls that stay together, with words before them that may be left out."""

    def __init__(self, words: str, *controls: QWidget, spacing: int = 3) -> None:
        super().__init__()
        self._words = label(words, "secondary") if words else None
        self._controls = controls
        self._spacing = spacing
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(spacing)
        if self._words is not None:
            self._words.setContentsMargins(0, 0, WORDS_GAP, 0)
            row.addWidget(self._words)
        for control in controls:
            row.addWidget(control)

    def size_at(self, is_bare: bool) -> QSize:
        """Return the size with or without the words."""
        sizes = [control.sizeHint() for control in self._controls]
        if self._words is not None and not is_bare:
            sizes.append(self._words.sizeHint())
        width = sum(size.width() for size in sizes) + self._spacing * (len(sizes) - 1)
        return QSize(width, max(size.height() for size in sizes))

    def set_bare(self, is_bare: bool) -> None:
        """Leave the words out, or put them in."""
        if self._words is not None:
            self._words.setVisible(not is_bare)


def _height(groups: list[Group], is_bare: bool, width: int) -> int:
    return flow([box.size_at(is_bare) for box in groups], width)[1]


def _row_width(groups: list[Group], is_bare: bool) -> int:
    widths = [box.size_at(is_bare).width() for box in groups]
    return sum(widths) + SPACING * (len(widths) - 1) + 2 * MARGIN


class StageToolbar(QWidget):
    """One row where there is room, more rows where there is not.

    Before a second row is begun the buttons of the options give way one by one, for the View
    menu has them all, and then the words before the choices. The first two choices need none:
    the quantity says what it is, and each colour begins with that word.
    """

    quantity_chosen = Signal(str)
    layout_chosen = Signal(str)
    sheet_toggled = Signal(int, bool)
    plane_chosen = Signal(str)
    option_toggled = Signal(str, bool)
    colour_chosen = Signal(str)
    linked_toggled = Signal(bool)
    look_from = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        policy = QSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        policy.setHeightForWidth(True)
        self.setSizePolicy(policy)
        self._quantity = Choice("quantity", "Quantity", "The quantity on the stage.")
        self._colour = Choice("colour", "Colour", "What the colours of the surface tell.")
        self._plane = Choice("plane", "Section plane", "The plane of the section.")
        self._layouts = QButtonGroup(self)
        self._sheets: list[QToolButton] = []
        self._actions: dict[str, QAction] = {}
        self._option_buttons: dict[str, QToolButton] = {}
        self._in_use: dict[Group, bool] = {}
        self._make_groups()
        self._connect()

    # ------------------------------------------------------------ building
    def _make_groups(self) -> None:
        self._quantity.setMinimumContentsLength(14)
        self._quantity.elide_mode = Qt.TextElideMode.ElideMiddle
        self._colour.setMinimumContentsLength(10)
        self._plane.setMinimumContentsLength(7)
        self._colour_group = Group("", self._colour)
        self._plane_group = Group("Section", self._plane)
        self._sheets_group = self._make_sheets()
        self._option_groups = self._make_options()
        self._groups = [
            Group("", self._quantity),
            self._sheets_group,
            self._make_layouts(),
            self._colour_group,
            self._plane_group,
            *self._option_groups.values(),
            Group("", self._make_view_button()),
        ]
        for group in self._groups:
            group.setParent(self)

    def _make_layouts(self) -> Group:
        buttons = []
        for key, words, tooltip in LAYOUTS:
            button = _tool(words, tooltip)
            button.setStyleSheet(NARROW_BUTTON)
            button.setProperty("key", key)
            self._layouts.addButton(button)
            buttons.append(button)
        return Group("", *buttons, spacing=2)

    def _make_sheets(self) -> Group:
        for words, tooltip in SHEETS:
            button = _tool(words, tooltip)
            button.setStyleSheet(NARROW_BUTTON)
            self._sheets.append(button)
        return Group("Sheets", *self._sheets, spacing=2)

    def _make_options(self) -> dict[str, Group]:
        for option in OPTIONS:
            action = QAction(option.words, self)
            action.setCheckable(True)
            action.setToolTip(option.tooltip)
            action.setData(option.name)
            self._actions[option.name] = action
            if option.on_row:
                button = _tool(option.words, option.tooltip)
                button.setDefaultAction(action)
                self._option_buttons[option.name] = button
        return {name: Group("", button) for name, button in self._option_buttons.items()}

    def _make_view_button(self) -> QToolButton:
        self._view_menu = QMenu(self)
        self._view_menu.setToolTipsVisible(True)
        self._view_menu.addActions(list(self._actions.values()))
        self._view_menu.addSeparator()
        for key, words in VIEWPOINTS:
            look = self._view_menu.addAction(words)
            look.setData(key)
            look.triggered.connect(self._look)
        button = _tool("View ▾", "More choices for the drawing, and where to look from.")
        button.setAccessibleName("View")
        button.setCheckable(False)
        button.setMenu(self._view_menu)
        button.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        button.setStyleSheet(NARROW_BUTTON + "QToolButton::menu-indicator { image: none; }")
        return button

    def _connect(self) -> None:
        self._quantity.chosen.connect(self._choose_quantity)
        self._colour.chosen.connect(self._choose_colour)
        self._plane.chosen.connect(self._choose_plane)
        self._layouts.buttonClicked.connect(self._choose_layout)
        for button in self._sheets:
            button.clicked.connect(self._toggle_sheet)
        for action in self._actions.values():
            action.triggered.connect(self._toggle_option)

    # ------------------------------------------------------------ showing
    def show_view(self, view: ToolbarView) -> None:
        """Show what is chosen and what can be chosen."""
        pairs = tuple((key, words) for key, words, _ in view.quantities)
        self._quantity.show_choices(pairs, view.quantity)
        self._show_quantity_items(view)
        self._colour.show_choices(view.colours, view.colour_by)
        self._plane.show_choices(view.planes, view.plane)
        for button in self._layouts.buttons():
            button.setChecked(button.property("key") == view.layout)
        has_sheets = view.sheets is not None
        for button, is_shown in zip(self._sheets, view.sheets or (False,) * 3, strict=True):
            button.setChecked(is_shown)
        self._in_use = {
            self._sheets_group: has_sheets,
            self._colour_group: len(view.colours) > 1,
            self._plane_group: bool(view.planes),
        }
        for option in OPTIONS:
            action = self._actions[option.name]
            action.setChecked(bool(getattr(view, option.name)))
            is_apt = has_sheets or not option.waves_only
            is_apt = is_apt and (view.layout == "AB" or not option.pairs_only)
            action.setEnabled(is_apt)
            if group := self._option_groups.get(option.name):
                self._in_use[group] = is_apt or not option.pairs_only
        self._place()

    def _show_quantity_items(self, view: ToolbarView) -> None:
        """Give every quantity its definition, and grey those that cannot be drawn yet."""
        model = self._quantity.model()
        if not isinstance(model, QStandardItemModel):
            return
        for row, (key, _, tooltip) in enumerate(view.quantities):
            item = model.item(row)
            item.setEnabled(key in view.enabled)
            item.setToolTip(tooltip)
            if key == view.quantity:
                self._quantity.setToolTip(tooltip)

    # ------------------------------------------------------------ placing
    def hasHeightForWidth(self) -> bool:
        """Say that a narrow toolbar is a higher one."""
        return True

    def heightForWidth(self, width: int) -> int:
        """Return the height of the rows at a width."""
        groups, is_bare = self._arrangement(width)
        return flow([box.size_at(is_bare) for box in groups], width)[1]

    def sizeHint(self) -> QSize:
        """Ask for one row with everything."""
        width = _row_width(self._used_groups(), is_bare=False)
        return QSize(width, self.heightForWidth(width))

    def minimumSizeHint(self) -> QSize:
        """Make do with the widest group a row."""
        widest = max(box.size_at(True).width() for box in self._groups[:5]) + 2 * MARGIN
        return QSize(widest, self.heightForWidth(max(self.width(), widest)))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place the groups in the new width."""
        super().resizeEvent(event)
        self._place()

    def _used_groups(self) -> list[Group]:
        """Return the groups that offer a choice now."""
        return [box for box in self._groups if self._in_use.get(box, True)]

    def _arrangement(self, width: int) -> tuple[list[Group], bool]:
        """Return the groups that stand in a width, and whether they go without their words."""
        ways = [(self._used_groups(), False)]
        for optional in self._option_groups.values():  # Cut open, the last, stays longest
            ways.append(([box for box in ways[-1][0] if box is not optional], False))
        ways.append((ways[-1][0], True))
        heights = [_height(groups, is_bare, width) for groups, is_bare in ways]
        return ways[heights.index(min(heights))]  # the fullest of those with fewest rows

    def _place(self) -> None:
        groups, is_bare = self._arrangement(self.width())
        for box in self._groups:
            box.setVisible(box in groups)
        places, height = flow([box.size_at(is_bare) for box in groups], self.width())
        self._widen_quantity(places)
        for box, place in zip(groups, places, strict=True):
            box.set_bare(is_bare)
            box.setGeometry(place)
        if height != self.height():
            self.updateGeometry()

    def _widen_quantity(self, places: list[QRect]) -> None:
        """Give the room left in a single row to the name of the quantity, as far as wanted."""
        if places[-1].top() > places[0].top():
            return
        metrics = self._quantity.fontMetrics()
        names = [self._quantity.itemText(row) for row in range(self._quantity.count())]
        longest = max((metrics.horizontalAdvance(name) for name in names), default=0)
        wanted = longest + COMBO_FRAME - self._quantity.sizeHint().width()
        spare = min(self.width() - MARGIN - places[-1].right() - 1, max(wanted, 0))
        if spare > 0:
            places[0].setWidth(places[0].width() + spare)
            for place in places[1:]:
                place.translate(spare, 0)

    # ------------------------------------------------------------ intents
    def _choose_quantity(self, field: str, key: str) -> None:
        self.quantity_chosen.emit(key)

    def _choose_colour(self, field: str, key: str) -> None:
        self.colour_chosen.emit(key)

    def _choose_plane(self, field: str, key: str) -> None:
        self.plane_chosen.emit(key)

    def _choose_layout(self, button: QToolButton) -> None:
        self.layout_chosen.emit(str(button.property("key")))

    def _toggle_sheet(self, is_shown: bool) -> None:
        button = self.sender()
        if isinstance(button, QToolButton):
            self.sheet_toggled.emit(self._sheets.index(button), is_shown)

    def _toggle_option(self, is_on: bool) -> None:
        action = self.sender()
        if not isinstance(action, QAction):
            return
        name = str(action.data())
        if name == "linked_cameras":
            self.linked_toggled.emit(is_on)
        else:
            self.option_toggled.emit(name, is_on)

    def _look(self) -> None:
        action = self.sender()
        if isinstance(action, QAction):
            self.look_from.emit(str(action.data()))
