"""One run as the chain saw it: its inputs and equations, for the values that stand beside the formulas."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from traverse.chain import Setting, composition, compressibility, ratio_of_specific_heats, resolved, roots
from traverse.model import COMPONENTS, Array
from traverse.physics import mixture
from traverse.physics.gas import wet_composition
from traverse.report.sheets._view import View
from traverse.result import RunResult
from traverse.treatment import inputs, setting


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RunView:
    """Arrays have shape (points,); ``mean`` and ``matter`` are numbers. ``compressibility`` is None for an ideal gas."""

    index: int
    result: RunResult
    inputs: dict[str, Array]
    setting: Setting
    pressure: Array
    root: Array
    mean: dict[str, float]
    matter: dict[str, float]
    ratio: float
    compressibility: Array | None

    @classmethod
    def of(cls, view: View, index: int) -> RunView:
        """Return the view of one run."""
        job, result = view.result.job, view.result.runs[index]
        equations = setting(job, result.run, view.method, signed=job.policies.negative == "signed")
        arrays = dict(resolved(inputs(job, result.run, view.method, result.treated), equations))
        pressure = arrays["barometric"] + arrays["static"]
        weight = result.treated.weight
        mean = {
            "temperature": float(np.sum(weight * arrays["temperature"])),
            "static": float(np.sum(weight * arrays["static"])), "pressure": float(np.sum(weight * pressure)),
        }
        matter = composition(arrays, equations, np.array([mean["temperature"]]), np.array([mean["pressure"]]))
        factor = compressibility(arrays, equations, matter)
        return cls(
            index=index, result=result, inputs=arrays, setting=equations, pressure=pressure,
            root=roots(arrays["differential_pressure"], signed=equations.signed), mean=mean,
            matter={name: float(np.ravel(value)[0]) for name, value in matter.items()},
            ratio=float(np.ravel(ratio_of_specific_heats(arrays, equations, matter, np.array([mean["temperature"]])))[0]),
            compressibility=None if factor is None else np.broadcast_to(factor, (view.layout.size,)),
        )

    def composition(self) -> dict[str, Array]:
        """Return the wet mole fractions of a flue gas or a mixture by species."""
        stack = self.setting.stack
        if self.setting.gas_kind == "mixture" and stack is not None:
            parts = {name: self.input(name) for name in stack.species}
            return mixture.wet(mixture.dry_fractions(parts, stack.species, stack.rest, self.input("water")), self.matter["moisture"])
        oxygen, carbon_dioxide, carbon_monoxide, sulfur_dioxide = (self.input(name) for name in COMPONENTS)
        return wet_composition(oxygen, carbon_dioxide, carbon_monoxide, sulfur_dioxide, self.matter["moisture"])

    @property
    def analysed(self) -> tuple[str, ...]:
        """The dry fractions that a flue gas is weighed by: those stated, and those that follow from its fuel."""
        stated, stack = self.result.run.gas.composition, self.setting.stack
        derived = ("oxygen", "carbon_dioxide", "sulfur_dioxide") if stack is not None and stack.fuel and stack.fuel_composition else ()
        return tuple(name for name in COMPONENTS if name in stated or name in derived) if derived else tuple(stated)

    def input(self, name: str) -> float:
        """Return an input that holds for the whole run."""
        return float(np.ravel(self.inputs[name])[0])
