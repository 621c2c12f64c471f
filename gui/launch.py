"""Where `tricline` starts: a headless verb runs without Qt, anything else opens the window."""

from __future__ import annotations

import sys
from collections.abc import Sequence
from pathlib import Path

from core import cli


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line of Tricline and return its exit status."""
    words = list(sys.argv[1:] if argv is None else argv)
    if words and is_headless(words[0]):
        return cli.main(words)
    try:
        from gui.app import run  # Qt: only where a window is wanted
    except ImportError as error:
        sys.stderr.write(
            f"tricline: the window cannot be opened ({error}). The headless verbs work: "
            "see tricline --help.\n"
        )
        return cli.UNUSABLE
    return run(words)


def is_headless(word: str) -> bool:
    """Return whether a first word is a verb or an option, well or badly spelt, and no file."""
    if word in cli.VERBS:
        return True
    meant = word.startswith("-") or bool(cli.nearest_verb(word))
    return meant and not Path(word).exists()


if __name__ == "__main__":
    sys.exit(main())
