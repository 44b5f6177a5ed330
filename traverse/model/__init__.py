"""The records of a job: frozen, keyword-only, SI inside, with what was written beside each value.

Records validate what they hold and derive what follows from it; nothing else. Arrays are float64 and read-only.
"""

from traverse.model._base import Array, Finding, frozen
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
    Gas,
    Gauge,
    Humidity,
    Job,
    Pitot,
    Policies,
    Readings,
    Reference,
    Run,
    Setup,
    Source,
    Status,
    Uncertainties,
)
from traverse.model._matter import Fuel, MoistureTrain
from traverse.model._place import Layout, Plane, Section, Shape
from traverse.model._quality import CALIBRATED, Leak, Quality

__all__ = [
    "CALIBRATED",
    "COMPONENTS",
    "NULL",
    "STATUSES",
    "UNREAD",
    "Array",
    "Column",
    "Component",
    "Conditions",
    "Corrections",
    "Design",
    "Distribution",
    "Finding",
    "Fuel",
    "Gas",
    "Gauge",
    "Humidity",
    "Job",
    "Layout",
    "Leak",
    "MoistureTrain",
    "Pitot",
    "Plane",
    "Policies",
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
