"""Where `tricline` starts: a headless verb runs without Qt, anything else opens the window."""

from __future__ import annotations

import sys
from collections.abc import Sequence

from core import cli


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line of Tricline and return its exit status."""
    words = list(sys.argv[1:] if argv is None else argv)
    if words and (words[0] in cli.VERBS or words[0] in ("-h", "--help")):
        return cli.main(words)
    from gui.app import run

    return run(words)


if __name__ == "__main__":
    sys.exit(main())
