"""The records of what was measured and how: probe, gas, state, readings, rules, and the job that holds them."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

import numpy as np

from traverse.errors import DomainError, ReadingError
from traverse.model._base import Array, Finding, Source, frozen
from traverse.model._matter import Fuel, MoistureTrain
from traverse.model._place import Layout, Plane, check_ports
from traverse.model._probe import Pitot
from traverse.model._quality import Quality
from traverse.units import Stated

Status = Literal["read", "missing", "obstructed", "below range", "negative", "over range", "plugged", "excluded"]
STATUSES: tuple[Status, ...] = ("read", "missing", "obstructed", "below range", "negative", "over range", "plugged", "excluded")
# Statuses of a point that gave no usable number: `[readings] missing` says what happens to them.
UNREAD: frozenset[str] = frozenset({"missing", "obstructed", "plugged", "over range", "excluded"})
# Statuses whose recorded pressure is no measurement: null in the result.
NULL: frozenset[str] = frozenset({"missing", "obstructed", "plugged", "excluded"})
_EMPTY: Mapping[str, Stated] = MappingProxyType({})


Humidity = Literal[
    "relative_humidity", "wet_bulb", "dew_point", "humidity_ratio", "dry", "moisture", "saturated", "none", "moisture_train", "combustion",
]
Equation = Literal["ideal", "cipm-2007", "virial", "real"]
COMPONENTS = ("oxygen", "carbon_dioxide", "carbon_monoxide", "sulfur_dioxide")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Gas:
    """What flows. Fractions are dry mole fractions, moisture is a wet mole fraction.

    ``humidity`` names the form the water was stated in and ``water`` its SI value ('none': not stated, only for a
    given gas; 'dry': none present; 'combustion': it follows from the fuel). The composition of a mixture is wet and leaves
    its water out; ``rest`` is the gas that makes up what is not stated. ``equation`` is that of humid air: 'real' takes CIPM-2007 where
    it holds and the virial equation elsewhere.
    """

    kind: Literal["air", "flue-gas", "given", "mixture"]
    humidity: Humidity
    water: Stated | None = None
    composition: Mapping[str, Stated] = field(default_factory=lambda: _EMPTY)
    density: Stated | None = None
    density_temperature: Stated | None = None
    density_pressure: Stated | None = None
    molar_mass: Stated | None = None
    ratio_of_specific_heats: float | None = None
    psychrometer: str = ""
    train: MoistureTrain | None = None
    fuel: Fuel | None = None
    rest: str = ""
    equation: Equation = "ideal"

    def fraction(self, name: str) -> float:
        """Return a component's dry mole fraction; 0 where none was stated."""
        return self.composition[name].value if name in self.composition else 0.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Conditions:
    """The state at the plane where no column of the readings says otherwise.

    ``barometric`` is absolute and at the station; ``static`` is gauge; ``temperature`` is the flowing gas.
    """

    barometric: Stated
    barometric_source: str
    static: Stated | None
    temperature: Stated | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Column:
    """One column of a run's readings exactly as recorded: the numbers in their own unit, and the texts.

    ``number`` has shape (points,) in the plan's order, NaN where the text is no number.
    """

    name: str
    header: str
    unit: str
    number: Array
    text: tuple[str, ...]
    where: tuple[str, ...]

    def __post_init__(self) -> None:
        object.__setattr__(self, "number", frozen(self.number))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Readings:
    """One run's readings over the points of the plan, in SI. Arrays have shape (points,).

    ``differential_pressure`` [Pa] is NaN where nothing was read; for a reading below range it is the limit.
    ``temperature`` [K], ``static`` [Pa, gauge], ``yaw`` (counted from the axis, offsets of the probe taken off) and ``pitch`` [rad]
    are complete. ``columns`` keeps what was recorded; a name that is absent there was filled from the job's conditions.
    ``pitch_pressure`` [Pa], of a three-dimensional probe, is NaN where nothing was read.
    """

    differential_pressure: Array
    temperature: Array
    static: Array
    yaw: Array
    pitch: Array
    status: tuple[Status, ...]
    reason: tuple[str, ...]
    line: tuple[str, ...]
    point: tuple[int, ...]
    columns: Mapping[str, Column]
    meter_density: Stated | None = None
    standard_error: Array | None = None
    mean_root: Array | None = None
    pitch_pressure: Array | None = None

    def __post_init__(self) -> None:
        for name in ("differential_pressure", "temperature", "static", "yaw", "pitch"):
            object.__setattr__(self, name, frozen(getattr(self, name)))
        if np.any(self.temperature <= 0) or not np.all(np.isfinite(self.temperature)):
            where = int(np.argmin(np.where(np.isfinite(self.temperature), self.temperature, -np.inf)))
            raise ReadingError(
                f"a temperature of {self.temperature[where]:g} K at point {self.line[where]}{self.point[where]}",
                where="temperature", expected="a temperature above absolute zero",
            )

    @property
    def text(self) -> tuple[str, ...]:
        """The text each pressure (or velocity) was read from."""
        column = self.columns.get("differential_pressure") or self.columns.get("velocity")
        return column.text if column else ("",) * len(self.status)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Run:
    """One pass over all points, with the state, gas and probe that held for it."""

    name: str
    conditions: Conditions
    gas: Gas
    pitot: Pitot
    readings: Readings


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Reference:
    """Standard conditions. Either temperature and pressure, or a standard air density."""

    temperature: Stated | None = None
    pressure: Stated | None = None
    density: Stated | None = None
    source: str = ""


Distribution = Literal["standard", "limits", "expanded"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Component:
    """One stated component of uncertainty of one input.

    ``standard`` is the standard uncertainty: a fraction of the value when ``relative``, else in SI of the input.
    ``shared`` components hold for all points and all runs at once; the others are independent from point to point.
    """

    input: str
    kind: str
    standard: float
    relative: bool
    shared: bool
    distribution: Distribution
    degrees_of_freedom: float
    text: str


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Uncertainties:
    """The ``[uncertainty]`` table. ``layout`` is ``stated``, ``none`` or ``estimate``."""

    coverage: float
    components: tuple[Component, ...]
    layout: Literal["stated", "none", "estimate"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Design:
    """What the flow should be, for balancing work and for planning.

    ``velocity`` is the mean velocity where the job states that in place of the flow. ``profile`` is the exponent n of the
    profile (wall distance)^(1/n) that a plan expects.
    """

    actual_flow: Stated
    tolerance: Stated | None
    velocity: Stated | None = None
    profile: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Gauge:
    """The gauge that will be used: highest reading and smallest division, as far as stated. [Pa]"""

    range: Stated | None = None
    division: Stated | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Corrections:
    """Corrections that the job asked for by name. None means not applied."""

    wall_factor: float | None = None
    wall_factor_source: str = ""
    turbulence: Stated | None = None
    blockage: bool = False
    displacement: Literal["", "macmillan", "mckeon"] = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Policies:
    """How readings that are not plain numbers enter the mean."""

    negative: Literal["method", "zero", "signed", "omit"] = "method"
    missing: Literal["error", "neighbour", "field", "omit"] = "error"
    below: Literal["half", "zero", "limit"] = "half"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Setup:
    """What is known before the first reading: enough to plan a traverse. Parts the job does not state are None."""

    title: str
    date: dt.date | None
    method: str
    units: Literal["si", "us"]
    plane: Plane
    layout: Layout
    pitot: Pitot | None
    gas: Gas | None
    conditions: Conditions | None
    design: Design | None
    sources: tuple[Source, ...]
    findings: tuple[Finding, ...] = ()
    gauge: Gauge | None = None

    def __post_init__(self) -> None:
        check_ports(self.plane, self.layout)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Job:
    """Everything the reduction needs, and where it came from."""

    title: str
    date: dt.date | None
    method: str
    units: Literal["si", "us"]
    plane: Plane
    layout: Layout
    runs: tuple[Run, ...]
    reference: Reference | None
    uncertainties: Uncertainties | None
    design: Design | None
    corrections: Corrections
    policies: Policies
    sources: tuple[Source, ...]
    findings: tuple[Finding, ...] = ()
    quality: Mapping[str, Quality] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if not self.runs:
            raise ReadingError("no run", where="[readings]", expected="at least one run of readings")
        check_ports(self.plane, self.layout)
        for run in self.runs:
            lowest = run.conditions.barometric.value + float(np.min(run.readings.static))
            if lowest <= 0:
                raise DomainError(
                    f"an absolute pressure of {lowest:.0f} Pa", where=f"run {run.name}, static pressure",
                    expected="a gauge pressure above minus the barometric pressure",
                    how="give [conditions] static as gauge pressure at the plane",
                )

    @property
    def source(self) -> Source:
        """The job file itself."""
        return self.sources[0]
