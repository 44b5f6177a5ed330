"""Reading and writing files: nothing half-written, no input overwritten, every refusal with advice."""

from __future__ import annotations

import hashlib
import os
import tempfile
from collections.abc import Iterable, Iterator
from contextlib import contextmanager, suppress
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
        with path.open("rb") as stream:
            # Never more than the limit: a device or a growing file states no size that could be trusted.
            content = stream.read(LARGEST + 1)
    except FileNotFoundError as problem:
        raise ReadingError("no such file", where=str(path), expected="a file that exists") from problem
    except (OSError, ValueError) as problem:
        reason = getattr(problem, "strerror", None) or str(problem)
        raise ReadingError(f"cannot be read ({reason})", where=str(path)) from problem
    if len(content) > LARGEST:
        raise ReadingError("is too large", where=str(path), expected=f"at most {LARGEST // 10**6} MB")
    return content


def decode(content: bytes, where: str) -> tuple[str, str, str]:
    """Return text, encoding and a note: byte-order mark first, then strict UTF-8, then the Western 8-bit code page.

    The note is empty unless the encoding had to be guessed; it counts the bytes which the guess gives no character.

    Raises
    ------
    ReadingError
        If the bytes are no text: damaged after a byte-order mark, or with zero characters in them.
    """
    for mark, encoding in ((b"\xef\xbb\xbf", "utf-8-sig"), (b"\xff\xfe", "utf-16"), (b"\xfe\xff", "utf-16")):
        if content.startswith(mark):
            try:
                return _without_zeros(content.decode(encoding), where), encoding, ""
            except UnicodeDecodeError as problem:
                raise ReadingError(f"damaged {encoding} text at byte {problem.start}", where=where) from problem
    try:
        return _without_zeros(content.decode("utf-8"), where), "utf-8", ""
    except UnicodeDecodeError:
        text = _without_zeros(content.decode("cp1252", errors="replace"), where)
    note = "not UTF-8; read as the Western 8-bit code page 1252"
    if lost := text.count("\ufffd"):
        note += f", in which {lost} of its bytes mean nothing (shown as \ufffd)"
    return text, "cp1252", note


def _without_zeros(text: str, where: str) -> str:
    """Return the text; a zero character stands in no text file, only in binary data and in unmarked UTF-16 or UTF-32."""
    if "\x00" in text:
        raise ReadingError("binary data", where=where, expected="text: UTF-8, UTF-16 with its mark, or a Western 8-bit code")
    return text


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
    try:
        _examine(target, inputs, force=force)
    except OSError as problem:
        raise _refused(target, problem) from problem


def _examine(target: Path, inputs: Iterable[Path], *, force: bool) -> None:
    """Do the work of :func:`claim`; what the file system itself refuses leaves as OSError."""
    folder = target.parent
    if not folder.is_dir():
        raise OutputError(f"the folder {folder} does not exist", where=str(target), how="make it first, or name another")
    if target.is_dir():
        raise OutputError("is a folder", where=str(target), expected="the name of a file")
    exists = target.exists()
    for source in inputs:
        if exists and source.exists() and target.samefile(source):
            raise OutputError(
                "is an input of this job", where=str(target), expected="another name; an input is never overwritten"
            )
    if exists and not target.is_file():
        raise OutputError("is no ordinary file", where=str(target), expected="the name of a file")
    if not os.access(folder, os.W_OK):
        raise OutputError(f"the folder {folder} cannot be written to", where=str(target), how="choose another folder")
    if exists and not force:
        raise OutputError("exists already", where=str(target), how="choose another name, or overwrite it with --force")
    if exists and not os.access(target, os.W_OK):
        raise OutputError("is read-only", where=str(target), how="choose another name")


@contextmanager
def atomic(target: Path) -> Iterator[IO[bytes]]:
    """Write beside the target and move over it at the end; on any failure the old file stays as it was.

    Raises
    ------
    OutputError
        If the folder or the target cannot be written to, or another program holds the target open.
    """
    try:
        # Through a link to the file it stands for, as every program writes.
        place = target.resolve()
        if place.exists() and not place.is_file():
            raise OutputError("is no ordinary file", where=str(target), expected="the name of a file")
        handle, name = tempfile.mkstemp(dir=place.parent, prefix=".traverse.", suffix=".part")
    except OSError as problem:
        raise _refused(target, problem) from problem
    part = Path(name)
    try:
        with os.fdopen(handle, "wb") as stream:
            yield stream
            stream.flush()
            os.fsync(stream.fileno())
        # Some file systems keep no modes; that is no reason to give up the result.
        with suppress(PermissionError, NotImplementedError):
            part.chmod(place.stat().st_mode & 0o777 if place.exists() else 0o666 & ~_umask())
        part.replace(place)
    except OSError as problem:
        if problem.filename not in {None, name}:
            # The caller's own trouble with another file, not ours with this one.
            raise
        raise _refused(target, problem) from problem
    finally:
        part.unlink(missing_ok=True)


def _refused(target: Path, problem: OSError) -> OutputError:
    return OutputError(
        f"cannot be written ({problem.strerror or problem})", where=str(target),
        how="close it in other programs, or choose another name or folder",
    )


def _umask() -> int:
    current = os.umask(0)
    os.umask(current)
    return current
