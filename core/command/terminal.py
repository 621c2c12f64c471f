"""What reaches the terminal or a pipe: one place for signs, control characters and ends."""

from __future__ import annotations

import io
import os
import re
import sys
from typing import TextIO

from core.errors import InputError
from core.numbers import MINUS

_PLAIN_SIGNS = str.maketrans({"−": "-", "–": "-", "×": "x", "⁻": "-", "ν": "nu"})
_LOWERED = str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")
_POWER = re.compile(r"(?<=\d)×10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)")
# Everything that a terminal obeys instead of showing, line ends and tabs excepted; the marks
# that turn the direction of writing hide what stands behind them just as well.
_CONTROL = re.compile(
    "[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u200e\u200f\u202a-\u202e\u2066-\u2069]|\r(?!\n)"
)


def say(sentence: str) -> None:
    """Say a sentence on stderr, on one line, where there is a stderr."""
    if sys.stderr is None:
        return
    line = without_controls(" ".join(f"tricline: {sentence}".split()))
    try:
        sys.stderr.write(f"{line}\n")
        sys.stderr.flush()
    except OSError:
        pass  # nobody listens


def write(text: str, is_page: bool = True) -> None:
    """Print results; a reader that has seen enough, or a closed stdout, is no error.

    Parameters
    ----------
    text : str
    is_page : bool
        Written for a person: into a pipe its numbers go as other programs read them.

    Raises
    ------
    InputError
        When the results cannot be written, as on a full disk.
    """
    out = sys.stdout
    if out is None:  # it was closed before the program began
        return
    if isinstance(out, io.TextIOWrapper):
        out.reconfigure(errors="replace")
    text = without_controls(text)
    if is_page and not out.isatty():
        text = plain_numbers(text)
    if not takes_unicode():
        text = text.translate(_PLAIN_SIGNS)  # a lost minus would be a wrong number
    _send(out, text)


def _send(out: TextIO, text: str) -> None:
    try:
        out.write(text)
        out.flush()
    except OSError as error:
        # Python flushes once more when it ends; let that go nowhere.
        os.dup2(os.open(os.devnull, os.O_WRONLY), out.fileno())
        if not isinstance(error, BrokenPipeError):
            raise InputError(f"The results cannot be written ({error.strerror}).") from None


def takes_unicode() -> bool:
    """Tell whether stdout takes every sign."""
    encoding = getattr(sys.stdout, "encoding", None) or "ascii"
    return str(encoding).lower().startswith("utf")


def plain_numbers(text: str) -> str:
    """Return a page with "-1.2e-5" in place of "−1.2×10⁻⁵", its columns where they were."""
    shorter = re.compile(rf"( *)([{MINUS}\d.]+){_POWER.pattern}")

    def plain(found: re.Match[str]) -> str:
        number = f"{found[2]}e{found[3].translate(_LOWERED)}"
        return number.rjust(len(found[0])) if found[1] else number

    return shorter.sub(plain, text).replace(MINUS, "-")


def without_controls(text: str) -> str:
    r"""Return a text with control characters written out as "\u001b", which JSON reads too."""
    return _CONTROL.sub(lambda found: f"\\u{ord(found[0]):04x}", text)
