"""The error taxonomy: every refusal says where, what was found, what would be right and how to say so."""

from __future__ import annotations


class TraverseError(Exception):
    """Base of every error a user can cause or cure.

    Parameters
    ----------
    found : str
        What was found, in the user's own words where there are any.
    where : str
        The place: file, row and column, or table and key of the job file.
    expected : str
        What would be right.
    how : str
        How to say so: the setting or spelling that answers the question.
    """

    def __init__(self, found: str, *, where: str = "", expected: str = "", how: str = "") -> None:
        self.found = found
        self.where = where
        self.expected = expected
        self.how = how
        text = "; ".join(part for part in (found, expected, how) if part)
        super().__init__(f"{where}: {text}" if where else text)

    def __reduce__(self) -> tuple[object, ...]:
        return (_rebuild, (type(self), self.found, self.where, self.expected, self.how))


def _rebuild(kind: type[TraverseError], found: str, where: str, expected: str, how: str) -> TraverseError:
    return kind(found, where=where, expected=expected, how=how)


class JobError(TraverseError):
    """The job file cannot be understood, or says something that cannot be."""


class ReadingError(TraverseError):
    """A reading, or the file that holds the readings, cannot be understood."""


class UnitError(TraverseError):
    """A unit is missing, unknown, or of the wrong kind."""


class DomainError(TraverseError):
    """The inputs are readable but describe something physically impossible."""


class LayoutError(TraverseError):
    """The layout rule does not exist for what was asked of it."""


class TableError(TraverseError):
    """A table of published numbers lacks its source or is damaged."""


class OutputError(TraverseError):
    """An output cannot be written; nothing that was there has been touched."""


def nearest(word: str, known: object) -> str:
    """Return the known word that looks most like ``word``, or an empty string."""
    import difflib

    names = [str(name) for name in known]  # type: ignore[attr-defined]
    found = difflib.get_close_matches(word, names, n=1, cutoff=0.6)
    return found[0] if found else ""
