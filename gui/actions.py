"""Menus and their actions: one table, so that every command has its words, key and place."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

from PySide6.QtCore import QObject
from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMainWindow, QMenu

Command = Callable[[], object]


@dataclass(frozen=True)
class Entry:
    """One line of a menu.

    Attributes
    ----------
    words : str
        With & before the mnemonic; empty for a separating line.
    run : callable or None
    keys : str
        Shortcut, portable text; empty for none.
    tip : str
        Shown in the status line and in Help.
    submenu : callable or None
        Fills a submenu each time it is about to open.
    group, is_on : str, callable or None
        Exclusive choice: the group's name, and whether this one is chosen.
    """

    words: str
    run: Command | None = None
    keys: str = ""
    tip: str = ""
    submenu: Callable[[QMenu], None] | None = None
    group: str = ""
    is_on: Callable[[], bool] | None = None


LINE = Entry("")
Menus = tuple[tuple[str, tuple[Entry, ...]], ...]


class MenuBar(QObject):
    """Fills a window's menu bar from a table and keeps the ticks of choices right."""

    def __init__(self, window: QMainWindow, menus: Menus) -> None:
        super().__init__(window)
        self._window = window
        self._groups: dict[str, QActionGroup] = {}
        self.actions: dict[str, QAction] = {}
        for title, entries in menus:
            menu = window.menuBar().addMenu(title)
            menu.setToolTipsVisible(True)
            for entry in entries:
                self._add(menu, entry)

    def _add(self, menu: QMenu, entry: Entry) -> None:
        if not entry.words:
            menu.addSeparator()
        elif entry.submenu is not None:
            below = menu.addMenu(entry.words)
            below.aboutToShow.connect(partial(_refill, below, entry.submenu))
            entry.submenu(below)
        elif entry.run is not None:
            action = self._action(menu, entry, entry.run)
            if entry.is_on is not None:
                menu.aboutToShow.connect(partial(_tick, action, entry.is_on))

    def _action(self, menu: QMenu, entry: Entry, run: Command) -> QAction:
        action = menu.addAction(entry.words)
        action.setToolTip(entry.tip or entry.words.replace("&", ""))
        action.setStatusTip(entry.tip)
        if entry.keys:
            action.setShortcut(QKeySequence(entry.keys))
        action.triggered.connect(partial(_call, run))
        if entry.is_on is not None:
            action.setCheckable(True)
            action.setChecked(entry.is_on())
        if entry.group:
            group = self._groups.setdefault(entry.group, QActionGroup(self))
            group.addAction(action)
        self.actions[entry.words.replace("&", "")] = action
        return action


def _call(run: Command, _checked: bool = False) -> None:
    run()


def _refill(menu: QMenu, fill: Callable[[QMenu], None]) -> None:
    menu.clear()
    fill(menu)


def _tick(action: QAction, is_on: Callable[[], bool]) -> None:
    action.setChecked(is_on())
