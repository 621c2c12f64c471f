"""The window side: from an edit to the painted frame, cold start, memory after many edits."""

import gc
import os
import statistics
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

from tests.benchmarks.timing import Line, at_most

_COLD_START = """
import time; start = time.perf_counter()
from gui.app import *
from PySide6.QtCore import QSettings
QApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
application = QApplication(["tricline"]); application.setStyle("Fusion")
built = build(application, first_state(open_demo(FIRST_DEMO)),
              QSettings("/nowhere/settings.ini", QSettings.Format.IniFormat))
built.window.show(); application.processEvents(); built.window.grab()
print(1e3 * (time.perf_counter() - start)); built.close()
"""


def lines() -> Iterator[Line]:
    if not os.environ.get("DISPLAY"):
        print("   no display: run under xvfb-run", flush=True)
        return
    yield at_most("cold start to a drawn window", cold_start(), 2000.0)
    app, bench, window = open_window()
    yield from frame_lines(app, bench, window)
    yield memory_line(app, bench)
    bench.close()


def cold_start() -> float:
    times = []
    for _ in range(3):
        done = subprocess.run(
            [sys.executable, "-c", _COLD_START], capture_output=True, text=True, check=True
        )
        times.append(float(done.stdout.split()[-1]))
    return statistics.median(times)


def open_window():
    """Return the Qt application, the built program and its window, shown."""
    from PySide6.QtCore import QSettings, Qt
    from PySide6.QtWidgets import QApplication

    from gui.app import build
    from gui.documents import FIRST_DEMO, first_state, open_demo

    QApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
    app = QApplication.instance() or QApplication(["tricline"])
    app.setStyle("Fusion")
    settings = QSettings(str(Path("/nowhere/settings.ini")), QSettings.Format.IniFormat)
    built = build(app, first_state(open_demo(FIRST_DEMO)), settings)
    built.window.show()
    app.processEvents()
    return app, built, built.window


def frame_lines(app, built, window) -> Iterator[Line]:
    """Time edits of the constants and turns of B, each to the painted frame."""
    cases = (
        ("one pane 800x700, one sheet, edit to painted", "A", "young", (800, 700), 16.0),
        ("one pane 800x700, three sheets, edit to painted", "A", "slowness", (800, 700), None),
        ("two panes 600x600, one sheet, edit to painted", "AB", "young", (600, 600), 16.0),
        (
            "two panes 600x600, three sheets, edit to painted",
            "AB",
            "slowness",
            (600, 600),
            25.0,
        ),
    )
    for name, layout, quantity, size, limit in cases:
        state = built.bench.state
        built.bench.load(
            replace(state, quantity=quantity, display=replace(state.display, layout=layout))
        )
        for pane in window.views.panes.values():
            pane.setFixedSize(*size)
        app.processEvents()
        stage_only = statistics.median(edit_times(app, built, whole=False))
        whole = statistics.median(edit_times(app, built, whole=True))
        yield Line(name, stage_only) if limit is None else at_most(name, stage_only, limit)
        yield Line("   ... with every panel and plot of the window", whole)


def no_axes(specimen):
    """As while the constants move: axes of degeneracy are found at rest, on the worker."""
    return ()


def edit_times(app, built, whole: bool) -> list[float]:
    """Return milliseconds of edits, of the panes alone or of the whole window."""
    from gui.presenting import stage

    panes = built.window.views.panes
    times = []
    state = built.bench.state
    for k in range(25):
        rows = [list(row) for row in state.specimen.stiffness]
        rows[0][0] += 0.01 * (k + 1)
        edited = replace(
            state, specimen=replace(state.specimen, stiffness=tuple(tuple(row) for row in rows))
        )
        start = time.perf_counter()
        if whole:
            built.bench.edit("edit", edited, merge="benchmark")
            for widget in built.window.views.painted():
                widget.repaint()
            app.processEvents()
        else:
            for side, view in stage.pane_views(edited, False, no_axes).items():
                panes[side].show_view(view)
                panes[side].repaint()
        times.append(1e3 * (time.perf_counter() - start))
    return times[5:]


def memory_line(app, built) -> Line:
    """Return the growth of memory over 1,000 edits of pane A, after some to warm up."""
    state = built.bench.state
    display = replace(state.display, layout="A")
    built.bench.load(replace(state, quantity="young", display=display))
    edits(app, built, 150)
    before = resident_megabytes()
    start = time.perf_counter()
    edits(app, built, 1000)
    elapsed = 1e3 * (time.perf_counter() - start)
    growth = resident_megabytes() - before
    return Line(
        "1,000 edits in a row", elapsed, growth, "MB more memory", "<= 5 MB", growth <= 5
    )


def edits(app, built, count: int) -> None:
    state = built.bench.state
    for k in range(count):
        rows = [list(row) for row in state.specimen.stiffness]
        rows[3][3] = 28.0 + 0.001 * (k % 500)
        built.bench.edit(
            "edit",
            replace(
                state,
                specimen=replace(state.specimen, stiffness=tuple(tuple(row) for row in rows)),
            ),
            merge="memory",
        )
        app.processEvents()
        built.pace.stop()  # what comes at rest is not part of an edit
    gc.collect()


def resident_megabytes() -> float:
    pages = int(Path("/proc/self/statm").read_text().split()[1])
    return pages * os.sysconf("SC_PAGE_SIZE") / 1e6
