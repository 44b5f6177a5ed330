"""Reading and writing files: nothing half-written, no input overwritten, every refusal with advice."""

from __future__ import annotations

import hashlib
import os
import tempfile
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import IO

from traverse.errors import OutputError, ReadingError

# A traverse or a job is a few kilobytes; a file beyond this is not one.
LARGEST = 50_000_000


def sha256(content: bytes) -> str:
    """Return the SHA-256 digest in hexadecimal."""
    return hashlib.sha256(content).hexdigest()


def read_bytes(path: Path) -> bytes:
    """Return a file's bytes.

    Raises
    ------
    ReadingError
        If it does not exist, is a folder, is too large or cannot be read.
    """
    try:
        if path.is_dir():
            raise ReadingError("is a folder", where=str(path), expected="a file")
        size = path.stat().st_size
        if size > LARGEST:
            raise ReadingError(f"{size / 1e6:.0f} MB", where=str(path), expected=f"at most {LARGEST // 10**6} MB")
        return path.read_bytes()
    except FileNotFoundError as problem:
        raise ReadingError("no such file", where=str(path), expected="a file that exists") from problem
    except (OSError, ValueError) as problem:
        reason = getattr(problem, "strerror", None) or str(problem)
        raise ReadingError(f"cannot be read ({reason})", where=str(path)) from problem


def decode(content: bytes, where: str) -> tuple[str, str, str]:
    """Return text, encoding and a note: byte-order mark first, then strict UTF-8, then the Western 8-bit code page.

    The note is empty unless the encoding had to be guessed.
    """
    for mark, encoding in ((b"\xef\xbb\xbf", "utf-8-sig"), (b"\xff\xfe", "utf-16"), (b"\xfe\xff", "utf-16")):
        if content.startswith(mark):
            try:
                return content.decode(encoding), encoding, ""
            except UnicodeDecodeError as problem:
                raise ReadingError(f"damaged {encoding} text at byte {problem.start}", where=where) from problem
    if b"\x00" in content[:4096]:
        raise ReadingError("binary data", where=where, expected="text: UTF-8, UTF-16 with its mark, or a Western 8-bit code")
    try:
        return content.decode("utf-8"), "utf-8", ""
    except UnicodeDecodeError:
        note = "not UTF-8; read as the Western 8-bit code page 1252"
        return content.decode("cp1252", errors="replace"), "cp1252", note


def read_text(path: Path) -> tuple[str, str, str]:
    """Return a file's text, its encoding and a note, see :func:`decode`."""
    return decode(read_bytes(path), str(path))


def claim(target: Path, inputs: Iterable[Path], *, force: bool) -> None:
    """Make sure before the work that an output can be written after it.

    Raises
    ------
    OutputError
        If the folder is missing or closed, the target is an input, a folder, or exists and ``force`` is not given.
    """
    folder = target.parent if str(target.parent) else Path()
    if not folder.is_dir():
        raise OutputError(f"the folder {folder} does not exist", where=str(target), how="make it first, or name another")
    if target.is_dir():
        raise OutputError("is a folder", where=str(target), expected="the name of a file")
    for source in inputs:
        if target.exists() and source.exists() and target.samefile(source):
            raise OutputError("is an input of this job", where=str(target), expected="another name; an input is never overwritten")
    if not os.access(folder, os.W_OK):
        raise OutputError(f"the folder {folder} cannot be written to", where=str(target), how="choose another folder")
    if target.exists():
        if not force:
            raise OutputError("exists already", where=str(target), how="choose another name, or overwrite it with --force")
        if not os.access(target, os.W_OK):
            raise OutputError("is read-only", where=str(target), how="choose another name")


@contextmanager
def atomic(target: Path) -> Iterator[IO[bytes]]:
    """Write beside the target and move over it at the end; on any failure the old file stays as it was.

    Raises
    ------
    OutputError
        If the folder or the target cannot be written to, or another program holds the target open.
    """
    name = ""
    try:
        handle, name = tempfile.mkstemp(dir=target.parent, prefix=f".{target.name}.", suffix=".part")
        with os.fdopen(handle, "wb") as stream:
            yield stream
            stream.flush()
            os.fsync(stream.fileno())
        Path(name).chmod(target.stat().st_mode & 0o777 if target.exists() else 0o666 & ~_umask())
        Path(name).replace(target)
        name = ""
    except OSError as problem:
        raise OutputError(
            f"cannot be written ({problem.strerror})", where=str(target),
            how="close it in other programs, or choose another name or folder",
        ) from problem
    finally:
        if name:
            Path(name).unlink(missing_ok=True)


def _umask() -> int:
    current = os.umask(0)
    os.umask(current)
    return current
