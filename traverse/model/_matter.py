"""How the water and the composition of a stack gas were found: the sampling train, the fuel and its air."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from traverse.physics.combustion import Atoms
from traverse.units import Stated


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MoistureTrain:
    """What a sampling train collected and metered.

    ``condensed`` is a mass or a volume of water. The pressure at the meter is ``meter_pressure`` (absolute), or the barometric
    pressure (``barometric``, else that of the run) plus ``orifice_pressure`` (gauge).
    """

    condensed: Stated
    silica_gel: Stated | None
    meter_volume: Stated
    meter_temperature: Stated
    meter_factor: float
    meter_pressure: Stated | None = None
    orifice_pressure: Stated | None = None
    barometric: Stated | None = None
    approximation: bool = False

    @property
    def by_volume(self) -> bool:
        """Whether the condensate was measured as a volume."""
        return self.condensed.unit.dimension == "volume"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Fuel:
    """A fuel and the air it burns in.

    ``parts`` are fractions by mass or by volume (``basis``) and ``texts`` what was written. ``excess_air`` is None where the
    oxygen was measured; ``air_humidity_ratio`` is None where the air was taken as dry. ``measured`` says that the analysis of the
    gas counts for its composition, the fuel only for the moisture and the comparison.
    """

    name: str
    basis: str
    parts: Mapping[str, float]
    texts: Mapping[str, str]
    atoms: Atoms
    source: str
    excess_air: Stated | None = None
    air_humidity_ratio: Stated | None = None
    measured: bool = False
