"""Reading text files with care and writing files so that nothing is ever half written."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from core.errors import InputError

LARGEST_FILE = 20_000_000  # bytes; a 6x6 table with everything known of it takes some kB


def read_text(path: Path) -> str:
    """Return the text of a UTF-8 file, pipes and devices included.

    Raises
    ------
    InputError
        When the file is missing, unreadable, too large, empty or not text.
    """
    data = _read_bytes(path)
    if len(data) > LARGEST_FILE:
        raise InputError(
            f"The file holds more than {LARGEST_FILE // 1_000_000} MB; "
            "files of this kind have some kilobytes.",
            "It was not read.",
            path.name,
        )
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError("The file is not text (UTF-8).", where=path.name) from None
    if not text.strip():
        raise InputError("The file is empty.", where=path.name)
    if "\0" in text:
        raise InputError("The file is not text: it holds zero bytes.", where=path.name)
    return text


def _read_bytes(path: Path) -> bytes:
    """Return what a file holds, and of a longer one than is accepted one byte too many."""
    try:
        with path.open("rb") as stream:
            return stream.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        raise InputError("There is no such file.", where=str(path)) from None
    except IsADirectoryError:
        raise InputError("This is a folder; a file was expected.", where=str(path)) from None
    except OSError as error:
        sentence = f"The file cannot be read ({reason(error)})."
        raise InputError(sentence, where=str(path)) from None


def write_text(path: Path, text: str) -> None:
    """Write a UTF-8 file atomically. See `write_bytes`."""
    write_bytes(path, text.encode("utf-8"))


def write_bytes(path: Path, data: bytes) -> None:
    """Write a file atomically: the old one stays whole until the new one is complete.

    A link is followed, so that what it points to is written. An existing file keeps its
    permissions.

    Raises
    ------
    InputError
        When the place cannot be written to; the old file is untouched then, and nothing else
        is left behind.
    """
    try:
        target = path.resolve()
        handle, name = tempfile.mkstemp(prefix=f".{target.name[:64]}.", dir=target.parent)
        temporary = Path(name)
        try:
            _fill(handle, data)
            temporary.chmod(_mode_for(target))
            temporary.replace(target)
        finally:
            temporary.unlink(missing_ok=True)  # it is gone where it took the file's place
    except OSError as error:
        raise InputError(
            f"The file cannot be written ({reason(error)}).",
            "Choose another folder or name; what was there before is unchanged.",
            str(path),
        ) from None


def _fill(handle: int, data: bytes) -> None:
    with os.fdopen(handle, "wb") as stream:
        stream.write(data)
        stream.flush()
        os.fsync(stream.fileno())


def _mode_for(path: Path) -> int:
    """Return the permissions of a file, or those that a new one would have."""
    if path.exists():
        return path.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask


def reason(error: OSError) -> str:
    """Return in words why the system refused, without the path that it adds."""
    return error.strerror or str(error) or type(error).__name__
