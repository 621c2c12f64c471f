"""Text files: what is refused, and that a failed write leaves nothing changed."""

from pathlib import Path

import pytest

from core.errors import InputError
from core.files.text import LARGEST_FILE, read_text, write_bytes, write_text

ZEROS = Path("/dev/zero")


def refusal(path):
    with pytest.raises(InputError) as caught:
        read_text(path)
    return str(caught.value)


def test_text_is_read_with_and_without_byte_order_mark(tmp_path):
    path = tmp_path / "a.txt"
    path.write_bytes("C₁₁ = 168,4 é\r\n".encode("utf-8-sig"))
    assert read_text(path) == "C₁₁ = 168,4 é\r\n"
    path.write_bytes(b"plain")
    assert read_text(path) == "plain"


def test_a_missing_file_a_folder_and_a_path_through_a_file_are_refused(tmp_path):
    missing = tmp_path / "none.json"
    assert refusal(missing) == f"{missing}: There is no such file."
    assert "folder" in refusal(tmp_path)
    (tmp_path / "file").write_text("x")
    assert "cannot be read (Not a directory)" in refusal(tmp_path / "file" / "below.json")


def test_a_folder_that_may_not_be_read_is_refused(tmp_path, monkeypatch):
    # Permissions do not stop the superuser, who may be running this: the system's refusal is
    # played instead.
    def denied(*_arguments, **_words):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr("pathlib.Path.open", denied)
    assert "cannot be read (Permission denied)" in refusal(tmp_path / "locked" / "a.json")


@pytest.mark.parametrize("data", [b"", b"  \n\t ", b"\xef\xbb\xbf"])
def test_an_empty_file_is_refused(tmp_path, data):
    (tmp_path / "empty").write_bytes(data)
    assert refusal(tmp_path / "empty") == "empty: The file is empty."


@pytest.mark.parametrize("data", [b"\x89PNG\r\n\x1a\n\x00", b"\xff\xfe1\x00", b"1 2\x003 4"])
def test_a_binary_file_is_refused(tmp_path, data):
    (tmp_path / "binary").write_bytes(data)
    assert "not text" in refusal(tmp_path / "binary")


def test_a_file_of_more_than_20_megabytes_is_refused(tmp_path):
    path = tmp_path / "huge.json"
    with path.open("wb") as stream:
        stream.truncate(LARGEST_FILE + 1)  # sparse: takes no room on the disk
    assert "more than 20 MB" in refusal(path)


@pytest.mark.skipif(not ZEROS.exists(), reason="this system has no such device")
def test_a_device_without_end_is_read_no_further():
    assert "more than 20 MB" in refusal(ZEROS)


# --- writing --------------------------------------------------------------------------------


def test_a_file_is_written_over_and_keeps_its_permissions(tmp_path):
    path = tmp_path / "a.json"
    write_text(path, "first é")
    assert path.read_bytes() == "first é".encode()
    path.chmod(0o640)
    write_bytes(path, b"second\n")
    assert path.read_bytes() == b"second\n"
    assert path.stat().st_mode & 0o777 == 0o640
    assert [entry.name for entry in tmp_path.iterdir()] == ["a.json"]


def test_a_new_file_has_the_permissions_of_any_new_file(tmp_path):
    (tmp_path / "plain").touch()
    write_text(tmp_path / "ours", "x")
    assert (tmp_path / "ours").stat().st_mode == (tmp_path / "plain").stat().st_mode


def test_a_link_stays_a_link(tmp_path):
    (tmp_path / "real.json").write_text("old")
    (tmp_path / "link.json").symlink_to("real.json")
    write_text(tmp_path / "link.json", "new")
    assert (tmp_path / "link.json").is_symlink()
    assert (tmp_path / "real.json").read_text() == "new"


def _full_disk(*_arguments, **_words):
    raise OSError(28, "No space left on device")


@pytest.mark.parametrize("step", ["os.fsync", "os.replace", "os.chmod"])
def test_a_failed_write_leaves_the_old_file_and_nothing_else(tmp_path, monkeypatch, step):
    path = tmp_path / "a.json"
    path.write_text("old")
    monkeypatch.setattr(step, _full_disk)
    with pytest.raises(InputError, match="No space left on device") as caught:
        write_text(path, "new")
    monkeypatch.undo()
    assert "unchanged" in str(caught.value)
    assert path.read_text() == "old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["a.json"]


def test_an_interrupted_write_leaves_the_old_file_and_nothing_else(tmp_path, monkeypatch):
    def interrupted(_handle):
        raise KeyboardInterrupt

    path = tmp_path / "a.json"
    path.write_text("old")
    monkeypatch.setattr("os.fsync", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_text(path, "new")
    assert path.read_text() == "old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["a.json"]


def test_a_folder_that_is_not_there_is_said(tmp_path):
    with pytest.raises(InputError, match="cannot be written"):
        write_text(tmp_path / "none" / "a.json", "x")
    with pytest.raises(InputError, match="cannot be written"):
        write_text(tmp_path, "x")
