"""Files: nothing half-written, no input overwritten, no file that cannot be read leaves as a traceback."""

import errno
import hashlib
import os
from pathlib import Path

import pytest

from traverse import files
from traverse.errors import OutputError, ReadingError


def _names(folder: Path) -> set[str]:
    return {path.name for path in folder.iterdir()}


def test_a_new_file_is_written_with_the_usual_mode(tmp_path):
    target = tmp_path / "out.xlsx"
    with files.atomic(target) as stream:
        stream.write(b"new")
        assert not target.exists()
    assert target.read_bytes() == b"new"
    assert _names(tmp_path) == {"out.xlsx"}
    plain = tmp_path / "plain"
    plain.touch()
    assert target.stat().st_mode == plain.stat().st_mode


def test_an_existing_file_keeps_its_mode(tmp_path):
    target = tmp_path / "out.json"
    target.write_bytes(b"old")
    target.chmod(0o640)
    with files.atomic(target) as stream:
        stream.write(b"new")
    assert target.read_bytes() == b"new"
    assert target.stat().st_mode & 0o777 == 0o640


@pytest.mark.parametrize("problem", [RuntimeError, KeyboardInterrupt, SystemExit, OutputError])
def test_a_failure_leaves_the_old_file_and_no_litter(tmp_path, problem):
    target = tmp_path / "out.xlsx"
    target.write_bytes(b"old")
    with pytest.raises(problem), files.atomic(target) as stream:  # noqa: PT012
        stream.write(b"half")
        raise problem("stop")
    assert target.read_bytes() == b"old"
    assert _names(tmp_path) == {"out.xlsx"}


def test_trouble_with_another_file_is_not_taken_for_ours(tmp_path):
    with pytest.raises(FileNotFoundError), files.atomic(tmp_path / "out"):
        (tmp_path / "missing").read_bytes()
    assert not _names(tmp_path)


def test_a_full_disk_says_so(tmp_path):
    with pytest.raises(OutputError, match=r"cannot be written \(No space left"), files.atomic(tmp_path / "out"):
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
    assert not _names(tmp_path)


def test_a_target_held_open_by_another_program(tmp_path, monkeypatch):
    target = tmp_path / "out.xlsx"
    target.write_bytes(b"old")

    def held(self, _):
        # What Windows answers while a spreadsheet program has the file open.
        raise PermissionError(errno.EACCES, "Permission denied", str(self))

    monkeypatch.setattr(Path, "replace", held)
    with pytest.raises(OutputError, match="close it in other programs") as caught, files.atomic(target) as stream:
        stream.write(b"new")
    assert caught.value.where == str(target)
    assert target.read_bytes() == b"old"
    assert _names(tmp_path) == {"out.xlsx"}


def test_a_link_is_written_through(tmp_path):
    (tmp_path / "real").write_bytes(b"old")
    link = tmp_path / "link"
    link.symlink_to(tmp_path / "real")
    with files.atomic(link) as stream:
        stream.write(b"new")
    assert link.is_symlink()
    assert (tmp_path / "real").read_bytes() == b"new"


@pytest.mark.parametrize("name", ["missing/out", "folder", "pipe", "file/out", "long" * 80])
@pytest.mark.parametrize("force", [False, True])
def test_impossible_targets_are_refused_before_and_after_the_work(tmp_path, name, force):
    (tmp_path / "folder").mkdir()
    (tmp_path / "file").touch()
    os.mkfifo(tmp_path / "pipe")
    before = _names(tmp_path)
    with pytest.raises(OutputError) as caught:
        files.claim(tmp_path / name, [], force=force)
    assert str(tmp_path / name) in caught.value.where
    with pytest.raises(OutputError), files.atomic(tmp_path / name) as stream:
        stream.write(b"x")
    assert _names(tmp_path) == before


def test_an_existing_output_needs_force(tmp_path):
    target = tmp_path / "out.xlsx"
    files.claim(target, [], force=False)
    target.touch()
    with pytest.raises(OutputError, match="--force"):
        files.claim(target, [], force=False)
    files.claim(target, [], force=True)


@pytest.mark.parametrize("way", ["same", "dots", "symbolic", "hard"])
@pytest.mark.parametrize("force", [False, True])
def test_an_input_is_never_overwritten(tmp_path, way, force):
    source = tmp_path / "readings.csv"
    source.write_text("dp\n1\n")
    (tmp_path / "sub").mkdir()
    target = {"same": source, "dots": tmp_path / "sub" / ".." / "readings.csv"}.get(way, tmp_path / "other")
    if way == "symbolic":
        target.symlink_to(source)
    elif way == "hard":
        target.hardlink_to(source)
    with pytest.raises(OutputError, match="never overwritten"):
        files.claim(target, [tmp_path / "absent.toml", source], force=force)


def test_a_closed_folder_and_a_read_only_file_are_refused(tmp_path, monkeypatch):
    # The permissions are pretended: they do not bind the account that many test machines run under.
    target = tmp_path / "out"
    target.touch()
    monkeypatch.setattr(os, "access", lambda path, _: Path(path) != target)
    with pytest.raises(OutputError, match="read-only"):
        files.claim(target, [], force=True)
    monkeypatch.setattr(os, "access", lambda path, _: Path(path) == target)
    with pytest.raises(OutputError, match="cannot be written to"):
        files.claim(target, [], force=True)


def test_reading_refuses_what_is_no_file(tmp_path):
    with pytest.raises(ReadingError, match="no such file"):
        files.read_bytes(tmp_path / "absent")
    with pytest.raises(ReadingError, match="is a folder"):
        files.read_bytes(tmp_path)
    with pytest.raises(ReadingError, match="cannot be read"):
        files.read_bytes(tmp_path / ("long" * 80))
    with pytest.raises(ReadingError, match="cannot be read"):
        files.read_bytes(Path("a\0b"))


def test_reading_stops_at_the_limit(tmp_path, monkeypatch):
    monkeypatch.setattr(files, "LARGEST", 10)
    (tmp_path / "ten").write_bytes(b"0123456789")
    (tmp_path / "eleven").write_bytes(b"01234567890")
    assert files.read_bytes(tmp_path / "ten") == b"0123456789"
    with pytest.raises(ReadingError, match="too large"):
        files.read_bytes(tmp_path / "eleven")


@pytest.mark.skipif(not Path("/dev/zero").exists(), reason="no such device on this system")
def test_a_device_without_an_end_is_refused(monkeypatch):
    monkeypatch.setattr(files, "LARGEST", 100)
    with pytest.raises(ReadingError, match="too large"):
        files.read_bytes(Path("/dev/zero"))


@pytest.mark.parametrize(
    ("encoded_as", "said", "guessed"),
    [("utf-8", "utf-8", False), ("utf-8-sig", "utf-8-sig", False), ("utf-16", "utf-16", False), ("cp1252", "cp1252", True)],
)
def test_text_is_read_in_the_encodings_of_the_trade(tmp_path, encoded_as, said, guessed):
    text = "Δp;°C\n" if encoded_as != "cp1252" else "dp;°C é\n"
    path = tmp_path / "a.csv"
    path.write_bytes(text.encode(encoded_as))
    found, encoding, note = files.read_text(path)
    assert (found, encoding, bool(note)) == (text, said, guessed)


def test_big_endian_text_with_its_mark(tmp_path):
    path = tmp_path / "a.csv"
    path.write_bytes(b"\xfe\xff" + "Δp".encode("utf-16-be"))
    assert files.read_text(path)[0] == "Δp"


def test_bytes_without_a_character_are_counted():
    text, encoding, note = files.decode(b"dp \x81 \x9d \xb0", "a.csv")
    assert (text, encoding) == ("dp \ufffd \ufffd °", "cp1252")
    assert "2 of its bytes" in note


@pytest.mark.parametrize(
    "content",
    [b"\x89PNG\x00\x00", b"a" * 9000 + b"\x00", "dp".encode("utf-16-le"), "dp".encode("utf-32"), b"\xff\xfea",
     b"\xef\xbb\xbf\xff", b"\xe9 \x00"],
)
def test_what_is_no_text_is_refused(content):
    with pytest.raises(ReadingError) as caught:
        files.decode(content, "a.csv")
    assert caught.value.where == "a.csv"


def test_the_digest_is_the_published_one():
    # FIPS 180-4 example, the one-block message "abc"; the digest from memory, and equal to the reference library's.
    assert files.sha256(b"abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert files.sha256(b"\x00\xff") == hashlib.sha256(b"\x00\xff").hexdigest()
