"""The records of a job: frozen, keyword-only, SI inside, with what was written beside each value.

Records validate what they hold and derive what follows from it; nothing else. Arrays are float64 and read-only.
"""

from traverse.model._base import Array, Finding, Source, frozen
from traverse.model._job import (
    COMPONENTS,
    NULL,
    STATUSES,
    UNREAD,
    Column,
    Component,
    Conditions,
    Corrections,
    Design,
    Distribution,
    Equation,
    Gas,
    Gauge,
    Humidity,
    Job,
    Policies,
    Readings,
    Reference,
    Run,
    Setup,
    Status,
    Uncertainties,
)
from traverse.model._matter import Fuel, MoistureTrain
from traverse.model._place import Layout, Plane, Section, Shape
from traverse.model._probe import Calibration, Curve, Directional, Leg, Pairs, Pitot, ProbeType
from traverse.model._quality import CALIBRATED, Leak, Quality

__all__ = [
    "CALIBRATED",
    "COMPONENTS",
    "NULL",
    "STATUSES",
    "UNREAD",
    "Array",
    "Calibration",
    "Column",
    "Component",
    "Conditions",
    "Corrections",
    "Curve",
    "Design",
    "Directional",
    "Distribution",
    "Equation",
    "Finding",
    "Fuel",
    "Gas",
    "Gauge",
    "Humidity",
    "Job",
    "Layout",
    "Leak",
    "Leg",
    "MoistureTrain",
    "Pairs",
    "Pitot",
    "Plane",
    "Policies",
    "ProbeType",
    "Quality",
    "Readings",
    "Reference",
    "Run",
    "Section",
    "Setup",
    "Shape",
    "Source",
    "Status",
    "Uncertainties",
    "frozen",
]
