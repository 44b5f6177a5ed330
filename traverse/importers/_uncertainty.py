"""[uncertainty]: the grammar of stated uncertainties.

``"0.5 %"`` is a standard uncertainty, ``"±1 %"`` are limits (rectangular), ``"1 % (k=2)"`` is an expanded one, each
optionally with ``(df=9)``; terms add with ``+`` and each is an independent component.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

from traverse.errors import JobError, UnitError, nearest
from traverse.importers._schema import plain_number
from traverse.model import COMPONENTS, Component, Distribution, Gas, Run, Uncertainties
from traverse.physics.mixture import SPECIES
from traverse.units import unit

PARTS = ("calibration", "zero", "resolution", "repeatability")
PER_POINT = frozenset({"resolution", "repeatability"})


@dataclass(frozen=True, slots=True)
class Input:
    """An uncertain input: the dimension of its unit, and what a percentage of it means.

    ``percent`` is 'relative' (of the value), 'points' (percentage points, absolute) or 'refused'. ``single`` inputs
    have one value for all points, so that even their resolution is shared.
    """

    dimension: str
    percent: Literal["relative", "points", "refused"]
    single: bool = True


INPUTS: Mapping[str, Input] = {
    "coefficient": Input("number", "relative"),
    "differential_pressure": Input("pressure", "relative", single=False),
    "temperature": Input("temperature", "relative", single=False), "static": Input("pressure", "relative", single=False),
    "barometric": Input("pressure", "relative"),
    "moisture": Input("fraction", "points"), "relative_humidity": Input("fraction", "points"),
    **{name: Input("fraction", "points") for name in COMPONENTS},
    "wet_bulb": Input("temperature", "relative"), "dew_point": Input("temperature", "relative"),
    "humidity_ratio": Input("humidity ratio", "relative"), "density": Input("density", "relative"),
    "molar_mass": Input("molar mass", "relative"), "dimensions": Input("length", "relative"),
    "position": Input("length", "refused", single=False), "yaw": Input("angle", "refused", single=False),
    "pitch": Input("angle", "refused", single=False), "pitch_pressure": Input("pressure", "relative", single=False),
    "alignment": Input("pressure", "relative"), "static_holes": Input("pressure", "relative"),
    "layout": Input("number", "relative"),
    **{name: Input("fraction", "points") for name in SPECIES if name not in (*COMPONENTS, "water")},
    "excess_air": Input("fraction", "points"), "air_humidity_ratio": Input("humidity ratio", "relative"),
    "condensed": Input("mass", "relative"), "silica_gel": Input("mass", "relative"), "meter_volume": Input("volume", "relative"),
    "meter_temperature": Input("temperature", "relative"), "meter_pressure": Input("pressure", "relative"),
    "orifice_pressure": Input("pressure", "relative"), "meter_factor": Input("number", "relative"),
}
_VOLUME = Input("volume", "relative")
_TRAIN = ("condensed", "silica_gel", "meter_volume", "meter_temperature", "meter_pressure", "orifice_pressure", "meter_factor")
_HUMIDITY = ("moisture", "relative_humidity", "wet_bulb", "dew_point", "humidity_ratio")
_SPLIT = re.compile(r"(?<![0-9][eE])\+")
_TERM = re.compile(
    r"\s*(?P<limits>±)?\s*(?P<number>[\-\u2212]?(?:\d+\.?\d*|\.\d+)(?:[eE][+\-]?\d+)?)\s*(?P<unit>[^()]*?)\s*"
    r"(?:\((?P<extra>[^()]*)\))?\s*\Z"
)
_EXTRA = re.compile(r"\s*(k|df)\s*=\s*(\d+\.?\d*|\.\d+)\s*\Z", re.I)


@dataclass(frozen=True, slots=True)
class Term:
    """One term of a stated uncertainty, before it is known what input it belongs to."""

    number: float
    unit: str
    distribution: Distribution
    factor: float
    degrees_of_freedom: float
    text: str


def build(table: Mapping[str, Any] | None, runs: Sequence[Run]) -> Uncertainties | None:
    """Return the [uncertainty] table, None where the job has none.

    Raises
    ------
    JobError
        For an unknown input, one the job does not have, or a text outside the grammar.
    """
    if table is None:
        return None
    if not isinstance(table, dict):
        raise JobError(f"{table!r}", where="[uncertainty]", expected="a table")
    components: list[Component] = []
    layout: Literal["stated", "none", "estimate"] = "none"
    for name, stated in table.items():
        where = f"[uncertainty] {name}"
        if name == "coverage":
            continue
        if name not in INPUTS:
            guess = nearest(name, ("coverage", *INPUTS))
            raise JobError(
                f"unknown input {name!r}", where="[uncertainty]", expected=f"one of coverage, {', '.join(INPUTS)}",
                how=f"perhaps {guess}" if guess else "",
            )
        if name == "layout" and isinstance(stated, str) and stated.strip() in {"estimate", "none"}:
            layout = "estimate" if stated.strip() == "estimate" else "none"
            continue
        if name == "layout":
            layout = "stated"
        _refuse_absent(name, where, runs)
        components.extend(_components(name, stated, where, _input(name, where, runs), single=_is_single(name, runs)))
    return Uncertainties(coverage=_coverage(table), components=tuple(components), layout=layout)


def _input(name: str, where: str, runs: Sequence[Run]) -> Input:
    """Return the kind of an input; a condensate is a mass or a volume, as the job states it."""
    if name != "condensed":
        return INPUTS[name]
    volumes = {run.gas.train.by_volume for run in runs if run.gas.train is not None}
    if len(volumes) > 1:
        raise JobError("the runs state the condensate by mass and by volume", where=where, expected="one kind for all runs")
    return _VOLUME if True in volumes else INPUTS[name]


def _is_single(name: str, runs: Sequence[Run]) -> bool:
    """Return whether one value of the input serves all points, as a temperature from [conditions] does."""
    if name in {"temperature", "static"}:
        return not any(name in run.readings.columns for run in runs)
    return INPUTS[name].single


def _coverage(table: Mapping[str, Any]) -> float:
    if "coverage" not in table:
        return 0.95
    coverage = plain_number("[uncertainty] coverage", table["coverage"])
    if not 0.5 < coverage < 1.0:
        raise JobError(f"{coverage:g}", where="[uncertainty] coverage", expected="a number between 0.5 and 1, such as 0.95")
    return coverage


def _refuse_absent(name: str, where: str, runs: Sequence[Run]) -> None:
    """Raise unless every run has the input: an uncertainty of something that is not there acts on nothing."""
    for run in runs:
        gas = run.gas
        if name == "moisture" and gas.humidity in {"moisture_train", "combustion"}:
            continue
        if name in _HUMIDITY and gas.humidity != name:
            held = gas.humidity.replace("_", " ") if gas.humidity != "none" else "no humidity at all"
            raise JobError(f"run {run.name} states {held}, not {name}", where=where, expected="an input the job has")
        if (name in SPECIES and name not in gas.composition) or _lacks(name, gas):
            raise JobError(f"run {run.name} states no {name}", where=where, expected="an input the job has")
        if (name == "pitch" and run.pitot.directional is None) or (name == "pitch_pressure" and run.readings.pitch_pressure is None):
            raise JobError(f"run {run.name} has no {name} that acts", where=where, expected="an input the job has")
        if name in {"density", "molar_mass"} and getattr(gas, name) is None:
            raise JobError(f"run {run.name} states no {name}", where=where, expected="an input the job has")


def _lacks(name: str, gas: Gas) -> bool:
    """Return whether a gas lacks an input of its sampling train or of its fuel."""
    if name in _TRAIN:
        return gas.train is None or getattr(gas.train, name) is None
    if name in {"excess_air", "air_humidity_ratio"}:
        return gas.fuel is None or getattr(gas.fuel, name) is None
    return False


def _components(name: str, stated: Any, where: str, spec: Input, *, single: bool) -> Iterator[Component]:
    """Yield the components of one input, from its plain text or its table of parts.

    ``single``: one value serves all points, so that even its resolution is one deviation for all of them.
    """
    if isinstance(stated, dict) and name != "layout":
        for part, text in stated.items():
            if part not in PARTS:
                guess = nearest(part, PARTS)
                raise JobError(
                    f"unknown part {part!r}", where=where, expected=f"one of {', '.join(PARTS)}",
                    how=f"perhaps {guess}" if guess else "",
                )
            yield from _part(name, part, text, f"{where} {part}", spec, shared=single or part not in PER_POINT)
        return
    yield from _part(name, "plain", stated, where, spec, shared=name != "position")


def _part(name: str, part: str, text: Any, where: str, spec: Input, *, shared: bool) -> Iterator[Component]:
    if not isinstance(text, str):
        table = f" or a table of {', '.join(PARTS)}" if part == "plain" and name != "layout" else ""
        raise UnitError(f"{text!r}", where=where, expected=f'text such as "±1 %", "0.5 %" or "1 % (k=2)"{table}')
    found = terms(text, where)
    if part == "resolution":
        if len(found) != 1 or found[0].distribution != "standard" or (found[0].unit == "%" and _relative(name)):
            raise JobError(
                f"{text!r}", where=where, expected="the full step of the display with its unit, without ± and k",
                how='for example "0.1 Pa"; half of it is taken as limits',
            )
        step = found[0]
        found = [Term(step.number / 2.0, step.unit, "limits", math.sqrt(3.0), step.degrees_of_freedom, step.text)]
    for place, term in enumerate(found, 1):
        standard, relative = _standard(name, spec, term, where)
        # Each term has a row of its own in the budget, so each needs a name of its own.
        kind = part if place == 1 else f"{part} {place}" if part != "plain" else f"term {place}"
        yield Component(
            input=name, kind=kind, standard=standard, relative=relative, shared=shared, distribution=term.distribution,
            degrees_of_freedom=term.degrees_of_freedom, text=term.text,
        )


def _relative(name: str) -> bool:
    return INPUTS[name].percent != "points"


def _standard(name: str, spec: Input, term: Term, where: str) -> tuple[float, bool]:
    """Return the standard uncertainty and whether it is relative. A step of temperature has no offset."""
    number = term.number / term.factor
    if term.unit == "%" and spec.percent != "points":
        if spec.percent == "refused":
            raise UnitError(f"{term.text!r}", where=where, expected=f"a {spec.dimension} with its unit, not a percentage")
        return number / 100.0, True
    if spec.dimension == "number":
        if term.unit:
            raise UnitError(f"{term.text!r}", where=where, expected='a percentage, or a plain number as text such as "0.01"')
        if name == "layout":
            raise UnitError(f"{term.text!r}", where=where, expected='a percentage of the mean velocity, such as "1.5 %"')
        return number, False
    return number * unit(term.unit, spec.dimension, where).factor, False


def terms(text: str, where: str) -> list[Term]:
    """Return the terms of a stated uncertainty.

    >>> [(term.number, term.unit, term.distribution) for term in terms("+-1 % + 0.5 Pa (k=2)", "")]
    [(1.0, '%', 'limits'), (0.5, 'Pa', 'expanded')]
    """
    plain = re.sub(r"\+\s?/\s?[-\u2212]|\+[-\u2212]", "±", text)
    return [_term(part, text, where) for part in _SPLIT.split(plain)]


def _term(part: str, text: str, where: str) -> Term:
    match = _TERM.match(part)
    if match is None:
        raise JobError(
            f"{part.strip()!r} in {text!r}" if part != text else f"{text!r}", where=where,
            expected='terms such as "0.5 %" (standard), "±1 %" (limits) or "1 % (k=2)" (expanded), added with +',
        )
    number = float(match["number"].replace("\u2212", "-"))
    if number < 0 or not math.isfinite(number):
        raise JobError(f"{part.strip()!r}", where=where, expected="an uncertainty of zero or more")
    extra = _extra(match["extra"], part, where)
    if match["limits"] and "k" in extra:
        raise JobError(
            f"{part.strip()!r} is both limits and an expanded uncertainty", where=where,
            expected='"±1 %" for limits or "1 % (k=2)" for an expanded uncertainty',
        )
    distribution: Distribution = "limits" if match["limits"] else "expanded" if "k" in extra else "standard"
    factor = {"limits": math.sqrt(3.0), "expanded": extra.get("k", 1.0), "standard": 1.0}[distribution]
    return Term(number, match["unit"].strip(), distribution, factor, extra.get("df", math.inf), part.strip())


def _extra(text: str | None, part: str, where: str) -> dict[str, float]:
    found: dict[str, float] = {}
    for entry in (text or "").split(",") if text is not None else []:
        match = _EXTRA.match(entry)
        if match is None or match[1].lower() in found or not float(match[2]) > 0:
            raise JobError(f"{part.strip()!r}", where=where, expected='"(k=2)", "(df=9)" or "(k=2, df=9)"')
        found[match[1].lower()] = float(match[2])
    return found
