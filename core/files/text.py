"""Reading text files with care and writing files so that nothing is ever half written."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from core.errors import InputError

LARGEST_FILE = 20_000_000  # bytes; a 6x6 table with everything known of it takes some kB


def read_text(path: Path) -> str:
    """Return the text of a UTF-8 file.

    Raises
    ------
    InputError
        When the file is missing, unreadable, too large, empty or not text.
    """
    name = path.name
    try:
        size = path.stat().st_size
        if size > LARGEST_FILE:
            raise InputError(
                f"The file holds {size / 1e6:.0f} MB; files of this kind have some kilobytes.",
                f"Nothing above {LARGEST_FILE // 1_000_000} MB is read.", name)
        data = path.read_bytes()
    except FileNotFoundError:
        raise InputError("There is no such file.", where=str(path)) from None
    except IsADirectoryError:
        raise InputError("This is a folder; a file was expected.", where=str(path)) from None
    except OSError as error:
        raise InputError(f"The file cannot be read ({error.strerror}).", where=name) from None
    if not data.strip():
        raise InputError("The file is empty.", where=name)
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError("The file is not text (UTF-8).", where=name) from None


def write_text(path: Path, text: str) -> None:
    """Write a UTF-8 file atomically: the old file stays whole until the new one is complete.

    Raises
    ------
    InputError
        When the place cannot be written to; the old file is untouched then.
    """
    write_bytes(path, text.encode("utf-8"))


def write_bytes(path: Path, data: bytes) -> None:
    """Write a binary file atomically. See `write_text`."""
    temporary = None
    try:
        handle, temporary = tempfile.mkstemp(prefix=f".{path.name}.", dir=path.parent)
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        mode = path.stat().st_mode & 0o777 if path.exists() else 0o666 & ~_umask()
        Path(temporary).chmod(mode)
        Path(temporary).replace(path)
    except OSError as error:
        if temporary is not None:
            Path(temporary).unlink(missing_ok=True)
        raise InputError(
            f"The file cannot be written ({error.strerror}).",
            "Choose another folder or name; what was there before is unchanged.",
            str(path)) from None


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
