"""What every record of a job shares: read-only arrays, the file it came from, and the finding."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]


def frozen(values: npt.ArrayLike) -> Array:
    """Return a read-only float64 copy."""
    array = np.array(values, dtype=np.float64)
    array.setflags(write=False)
    return array


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """Something the reader of the result must know: a guess, a default, a rule that acted.

    ``setting`` names the key of the job file that would decide otherwise.
    """

    level: Literal["note", "attention"]
    topic: str
    message: str
    where: str = ""
    setting: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Source:
    """A file the job was read from: shown name, SHA-256, and its text verbatim where it is text."""

    name: str
    sha256: str
    text: str = ""
