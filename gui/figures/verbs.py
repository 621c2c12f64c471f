"""The verbs that draw: `figure`, `report`, and `section` as a figure. No screen is needed."""

from __future__ import annotations

import hashlib
import math
import os
import shlex
import sys
from argparse import Namespace
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import cache
from pathlib import Path
from typing import Any

for _variable in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "OMP_NUM_THREADS"):
    os.environ.setdefault(_variable, "1")  # the drawing wants the other core

from PySide6.QtCore import QCoreApplication, QHashSeed  # noqa: E402 - after the threads
from PySide6.QtWidgets import QApplication  # noqa: E402

from core.command.figure_words import (  # noqa: E402
    REPORTS,
    SURFACE_FILES,
    expand,
    outputs,
)
from core.command.several import Outcome, for_each, told  # noqa: E402
from core.command.verbs import bench_as_asked  # noqa: E402
from core.directional.quantities import quantity  # noqa: E402
from core.errors import InputError  # noqa: E402
from core.files.meshes import MESHES  # noqa: E402
from core.files.origin import Origin, today  # noqa: E402
from core.files.tables import directions_csv  # noqa: E402
from core.files.text import write_bytes  # noqa: E402
from core.report.captions import (  # noqa: E402
    FIGURE_KINDS,
    SHOWN,
    SIDES,
    FigureChoice,
    one_of,
)
from core.report.content import (  # noqa: E402
    SECTIONS,
    ReportPlan,
    compared_sides,
    default_figures,
    file_note,
    report_content,
)
from core.state import SOURCE_TIMES_US, BenchState  # noqa: E402
from gui.figures.drawing import drawable  # noqa: E402
from gui.figures.export import (  # noqa: E402
    GROUNDS,
    LEAST_TEXT,
    MM,
    MOST_TEXT,
    FigureForm,
    check_form,
    figure_bytes,
    format_of,
)
from gui.figures.report import PAPERS, Press, report_steps, run  # noqa: E402
from gui.stage.camera import Camera  # noqa: E402
from gui.stage.composition import Renderer  # noqa: E402
from gui.stage.gl_probe import GlReport, probe  # noqa: E402
from gui.stage.renderer import make_renderer  # noqa: E402
from gui.theme import THEMES  # noqa: E402

_USUAL_SIZE, _WIDE_SIZE = "85x85mm", "174x95mm"
_AXES = {"X": (1.0, 0.0, 0.0), "Y": (0.0, 1.0, 0.0), "Z": (0.0, 0.0, 1.0)}


# --- a place to draw ------------------------------------------------------------------------


@contextmanager
def drawing_board() -> Iterator[tuple[Renderer, GlReport]]:
    """Give a renderer, with an application around it, on a screen or without one."""
    _application()
    report = probe()
    renderer = make_renderer(report)
    try:
        yield renderer, report
    finally:
        renderer.close()


@cache
def _application() -> QCoreApplication:
    """Return the application that fonts and pictures need, kept for good once it is made."""
    running = QApplication.instance()
    if running is not None:
        return running
    # Never through a screen, even where there seems to be one: Qt ends the program when the
    # screen does not answer. OpenGL is found without, where it works at all.
    os.environ["QT_QPA_PLATFORM"] = "offscreen"
    QHashSeed.setDeterministicGlobalSeed()  # else fonts stand in a PDF in any order
    return QApplication(sys.argv[:1])


# --- figures --------------------------------------------------------------------------------


def figure(arguments: Namespace) -> Outcome:
    """Write a figure, a mesh or a grid of directions for every file."""
    files = expand(arguments.files)
    targets = outputs(arguments.out, files)
    arguments.kind = one_of(arguments.kind, FIGURE_KINDS, "kind of figure")
    _check_time(arguments.time)
    suffix = Path(arguments.out).suffix.lower()
    write = _write_surface if suffix in SURFACE_FILES else _write_figure
    if write is _write_figure:
        format_of(Path(arguments.out))
        check_form(form_of(arguments, is_wide=False))
    with drawing_board() as (renderer, _):
        written, errors = for_each(
            list(zip(files, targets, strict=True)),
            lambda one: write(bench_as_asked(arguments, str(one[0])), arguments, one[1],
                              renderer))
    return told(written, errors, _page)


def section(arguments: Namespace) -> Outcome:
    """Write a polar section as a figure."""
    arguments.kind, arguments.shown, arguments.time = "section", None, 1.0
    target = Path(arguments.out)
    check_form(form_of(arguments, is_wide=False))
    with drawing_board() as (renderer, _):
        state = bench_as_asked(arguments, arguments.file)
        return _write_figure(state, arguments, target, renderer), _page


def _write_figure(
    state: BenchState, arguments: Namespace, target: Path, renderer: Renderer
) -> dict[str, Any]:
    choice = _choice(state, arguments)
    _check_difference(state, choice)
    is_wide = len(choice.sides) == 2 and choice.kind == "surface"
    form = form_of(arguments, is_wide)
    check_form(form)
    camera = camera_of(arguments.look)
    shown = drawable(state, choice, is_coarse=form.all_vectors)
    data = figure_bytes(shown, format_of(target), form, renderer, {"A": camera, "B": camera})
    width, height = form.pixels
    return _written(target, data) | {
        "kind": choice.kind, "quantity": choice.quantity, "caption": shown.caption,
        "width_mm": form.width_mm, "height_mm": form.height_mm,
        "width_px": width, "height_px": height, "dpi": form.dpi}


def _check_difference(state: BenchState, choice: FigureChoice) -> None:
    """Refuse a difference of one crystal in one orientation."""
    if choice.kind == "hemisphere" and choice.shown == "difference" and (
            compared_sides(state) == "A"):
        raise InputError("There is no B that differs from A, and so no difference to show.",
                         "Give B's orientation with --b, or a bench file with both.")


def _check_time(time_us: float | None) -> None:
    first, last = SOURCE_TIMES_US
    if time_us is not None and not first <= time_us <= last:
        raise InputError(f"A time of {time_us:g} µs after the pulse is out of reach.",
                         f"From {first:g} to {last:,.0f} µs is accepted.", "--time")


def _choice(state: BenchState, arguments: Namespace) -> FigureChoice:
    sides = state.display.layout
    shown = arguments.shown or (state.display.hemisphere if len(sides) == 2 else sides)
    shown = one_of(shown, SHOWN, "view of a hemisphere")
    return FigureChoice(arguments.kind, state.quantity, sides, shown, arguments.time)


def form_of(arguments: Namespace, is_wide: bool) -> FigureForm:
    """Return the form that the words of a verb ask for.

    Raises
    ------
    InputError
        For a size that cannot be read.
    """
    text = arguments.size
    if not LEAST_TEXT <= arguments.text <= MOST_TEXT:
        raise InputError(f"Text of {arguments.text:g} points is out of reach.",
                         f"From {LEAST_TEXT:g} to {MOST_TEXT:g} points are accepted.", "--text")
    if is_wide and text == _USUAL_SIZE:
        text = _WIDE_SIZE
    width, height, is_mm = parse_size(text)
    per = 1.0 if is_mm else MM / arguments.dpi if arguments.dpi > 0 else 1.0
    theme = one_of(arguments.theme, dict.fromkeys(THEMES, ""), "theme")
    ground = one_of(arguments.ground, GROUNDS, "ground")
    return FigureForm(
        width * per, height * per, arguments.dpi, arguments.text if is_mm else 0.0,
        ground, theme, not arguments.no_caption,
        all_vectors=arguments.vectors, is_reproducible=arguments.reproducible)


def parse_size(text: str) -> tuple[float, float, bool]:
    """Return width, height and whether they are millimetres (else pixels) of a size."""
    plain = text.strip().lower().replace("×", "x").replace(" ", "")
    is_mm = plain.endswith("mm")
    plain = plain.removesuffix("mm").removesuffix("px")
    sides = plain.split("x")
    try:
        width, height = (float(side) for side in (sides * 2 if len(sides) == 1 else sides))
    except ValueError:
        width = height = math.nan
    if not (math.isfinite(width) and math.isfinite(height)):
        raise InputError(f"“{text}” is no size.",
                         "Write millimetres as 85x70mm or pixels as 3000x3000.", "--size")
    return width, height, is_mm


def camera_of(text: str | None) -> Camera:
    """Return the camera of --look: X, Y, Z, or azimuth,elevation[,zoom] in degrees."""
    if text is None:
        return Camera()
    if text.strip().upper() in _AXES:
        return Camera().looking_along(_AXES[text.strip().upper()])
    try:
        numbers = [float(word) for word in text.replace(",", " ").split()]
        azimuth, elevation, zoom = (*numbers, 1.0)[:3] if len(numbers) == 2 else numbers
        if not all(map(math.isfinite, numbers)) or zoom <= 0:
            raise ValueError(text)
    except ValueError:
        raise InputError(f"“{text}” says no place to look from.",
                         "Write X, Y, Z, or azimuth,elevation in degrees such as -55,22.",
                         "--look") from None
    return Camera(azimuth, min(max(elevation, -90.0), 90.0)).zoomed(zoom)


def _write_surface(
    state: BenchState, arguments: Namespace, target: Path, _renderer: Renderer
) -> dict[str, Any]:
    """Write the surface of one side as a mesh, or its quantity over a grid of directions."""
    side = state.display.layout[0]
    origin = Origin(state.specimen_of(side), state.orientation_of(side),
                    today(arguments.reproducible))
    suffix = target.suffix.lower()
    if suffix == ".csv":
        text = directions_csv(origin, [state.quantity], arguments.step)
    else:
        text = MESHES[suffix][1](origin, state.quantity, 5)
    return _written(target, text.encode("utf-8")) | {"quantity": state.quantity, "side": side}


# --- reports --------------------------------------------------------------------------------


def report(arguments: Namespace) -> Outcome:
    """Write the report of every file."""
    files = expand(arguments.files)
    targets = outputs(arguments.out, files)
    suffix = Path(arguments.out).suffix.lower()
    if suffix not in REPORTS:
        raise InputError(f"“{Path(arguments.out).name}” names no form of a report.",
                         "A name ending in .pdf or .html is wanted.", "--out")
    paper = one_of(arguments.paper, dict.fromkeys(PAPERS, ""), "paper")
    with drawing_board() as (renderer, found):
        drawn_with = f"OpenGL, {found.renderer}" if found.ok else "numpy, without OpenGL"

        def write(one: tuple[Path, Path]) -> dict[str, Any]:
            path, target = one
            state = bench_as_asked(arguments, str(path))
            plan = _plan(arguments, state, path, drawn_with)
            press = Press(state, renderer, {}, paper, arguments.reproducible)
            content = report_content(state, plan)
            data = run(report_steps(content, suffix[1:], press))
            return _written(target, data) | {
                "sections": [section.key for section in content.sections],
                "figures": len(plan.figures)}

        written, errors = for_each(list(zip(files, targets, strict=True)), write)
    return told(written, errors, _page)


def _plan(arguments: Namespace, state: BenchState, path: Path, drawn_with: str) -> ReportPlan:
    figures = default_figures(state)
    if arguments.figure:
        figures = tuple(parse_figure(text, state) for text in arguments.figure)
    for choice in figures:
        _check_difference(state, choice)
    sections = tuple(arguments.sections or SECTIONS)
    if arguments.no_figures:
        figures, sections = (), tuple(key for key in sections if key != "figures")
    return ReportPlan(sections, figures, file_note(path), today(arguments.reproducible),
                      _again(arguments, path), drawn_with)


def parse_figure(text: str, state: BenchState) -> FigureChoice:
    """Return the figure that KIND:QUANTITY[:WHOSE] names.

    Raises
    ------
    InputError
        For an unknown kind, quantity or side; the nearest one is named.
    """
    kind, _, rest = text.partition(":")
    name, _, whose = rest.partition(":")
    kind = one_of(kind, FIGURE_KINDS, "kind of figure")
    key = quantity(name or state.quantity).key
    whose = (whose or state.display.layout).strip()
    if kind == "hemisphere":
        shown = one_of(whose if whose.upper() != "AB" else "A", SHOWN, "view of a hemisphere")
        return FigureChoice(kind, key, "AB" if shown == "difference" else "A", shown)
    return FigureChoice(kind, key, one_of(whose, SIDES, "side"))


def _again(arguments: Namespace, path: Path) -> str:
    """Return the command that makes the same report, whatever it is then called."""
    words = ["tricline", "report", path.name]
    for name in ("quantity", "plane", "a", "b", "side", "pin", "density"):
        value = getattr(arguments, name)
        words += [f"--{name}", value.strip()] if value is not None else []
    words += [word for text in arguments.figure or () for word in ("--figure", text)]
    words += ["--no-figures"] if arguments.no_figures else []
    words += ["--sections", *arguments.sections] if arguments.sections else []
    words += ["--paper", arguments.paper] if arguments.paper != "A4" else []
    words += ["--reproducible"] if arguments.reproducible else []
    return shlex.join([*words, "--out", f"report{Path(arguments.out).suffix}"])


# --- what was written -----------------------------------------------------------------------


def _written(target: Path, data: bytes) -> dict[str, Any]:
    """Write a file and return what there is to say of it."""
    write_bytes(target, data)
    return {"file": str(target), "bytes": len(data),
            "sha256": hashlib.sha256(data).hexdigest()}


def _page(found: Any) -> str:
    lines = []
    for one in found if isinstance(found, list) else [found]:
        size = "" if "width_mm" not in one else (
            f", {one['width_mm']:.4g} × {one['height_mm']:.4g} mm")
        lines.append(f"wrote {one['file']}  ({one['bytes']:,} bytes{size})\n")
    return "".join(lines)


RUN: dict[str, Callable[[Namespace], Outcome]] = {
    "figure": figure, "section": section, "report": report,
}
