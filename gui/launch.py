"""Where `tricline` starts: a headless verb runs without Qt, anything else opens the window."""

from __future__ import annotations

import os
import sys
from argparse import Namespace
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

# Before numpy is loaded: the kernels are too small for two BLAS threads, and on a busy machine
# the second one costs more than it brings.
for _variable in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "OMP_NUM_THREADS"):
    os.environ.setdefault(_variable, "1")

from core import cli  # noqa: E402 - after the threads are set
from core.command.figure_words import PICTURES  # noqa: E402 - likewise


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line of Tricline and return its exit status."""
    words = list(sys.argv[1:] if argv is None else argv)
    if words and is_headless(words[0]):
        return cli.main(words, DRAWING)
    try:
        from gui.app import run  # Qt: only where a window is wanted
    except ImportError as error:
        sys.stderr.write(
            f"tricline: the window cannot be opened ({error}). The headless verbs work: "
            "see tricline --help.\n"
        )
        return cli.UNUSABLE
    return run(words)


def _draw(arguments: Namespace) -> Any:
    """Run a verb that always draws."""
    from gui.figures import verbs  # Qt: only where something is drawn

    return verbs.RUN[arguments.verb](arguments)


def _section(arguments: Namespace) -> Any:
    """Draw a section where a picture is wanted; columns of numbers need no Qt."""
    is_picture = bool(arguments.out) and Path(arguments.out).suffix.lower() in PICTURES
    if is_picture and not arguments.csv:
        return _draw(arguments)
    from core.command import verbs

    return verbs.RUN["section"](arguments)


DRAWING: dict[str, Callable[[Namespace], Any]] = {
    "figure": _draw, "report": _draw, "section": _section,
}
"""The headless verbs that draw, or may."""


def is_headless(word: str) -> bool:
    """Return whether a first word is a verb or an option, well or badly spelt, and no file."""
    if word in cli.VERBS:
        return True
    meant = word.startswith("-") or bool(cli.nearest_verb(word))
    return meant and not Path(word).exists()


if __name__ == "__main__":
    sys.exit(main())
