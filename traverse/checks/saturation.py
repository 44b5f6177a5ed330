"""No more water vapour than saturation holds."""

import numpy as np

from traverse.checks._base import Check, Verdict, View
from traverse.physics import water


def decide(view: View) -> Verdict:
    """Compare the moisture with the saturation fraction at the coldest point of the run."""
    criterion = "moisture at most saturation at the coldest point"
    source = "saturation pressure of ASHRAE Fundamentals 2017 ch. 1, eqs. 5 and 6"
    moisture = view.result.value("moisture")
    if not np.isfinite(moisture):
        return Verdict(
            status="not evaluated", observed="", message="The moisture is not stated.", criterion=criterion, source=source
        )
    readings = view.result.run.readings
    pressure = view.result.value("absolute_pressure")
    coldest = float(np.min(readings.temperature))
    limit = float(water.saturation_pressure(np.float64(coldest))) / pressure
    observed = f"{100 * moisture:.3g} % against {100 * min(limit, 1.0):.3g} % at {coldest - 273.15:.1f} degC"
    met = moisture <= limit * (1 + 1e-9)
    return Verdict(
        status="pass" if met else "fail", observed=observed, criterion=criterion, source=source,
        message="" if met else "Part of the section is below the dew point: droplets are likely and the moisture is doubtful.",
        effect="none" if met else "not estimated",
    )


CHECK = Check(id="saturation", title="Moisture against saturation", scope="run", decide=decide)
