"""Rows of label, value, unit and source: the form of every working, and the key of every value."""

from __future__ import annotations

from dataclasses import dataclass

from traverse.report.spec import Live, SheetSpec, Text
from traverse.units import Stated

LABEL, VALUE, UNIT, NOTE = 1, 2, 3, 4


@dataclass(slots=True)
class Ledger:
    """Writes rows downwards on a sheet; every value gets the key ``prefix.name``."""

    sheet: SheetSpec
    prefix: str
    row: int

    def key(self, name: str) -> str:
        """Return the placeholder of a value for use in a formula."""
        return f"«{self.prefix}.{name}»"

    def title(self, text: str) -> None:
        """Put a heading and leave a row free above it."""
        self.row += 1
        self.sheet.put(self.row, LABEL, Text(text), style="subtitle")
        self.row += 1

    def number(self, name: str, label: str, value: float, unit: str, note: str = "", *, fmt: str = "General") -> None:
        """Put a plain number: something stated, or a constant."""
        self._row(name, label, value, unit, note, "input", fmt)

    def live(
        self, name: str, label: str, formula: str, value: float | str, unit: str, note: str = "", *, fmt: str = "0.00000",
        style: str = "value", defined: str = "",
    ) -> None:
        """Put a formula. ``{name}`` in it stands for the value of that name in this ledger."""
        self._row(name, label, Live("=" + self.filled(formula), value), unit, note, style, fmt, defined)

    def filled(self, formula: str) -> str:
        """Return a formula with ``{name}`` replaced by the placeholders of this ledger."""
        return formula.replace("{", f"«{self.prefix}.").replace("}", "»")

    def stated(self, name: str, label: str, stated: Stated, unit: str, note: str = "") -> None:
        """Put a stated value as it was written, its conversion, and the SI value as a formula."""
        text = f"as stated: {stated.text}" + (f"; {note}" if note else "")
        self.number(f"{name}.stated", f"{label}, as stated", stated.number, stated.unit.symbol, text)
        self.number(f"{name}.factor", f"  {stated.unit.symbol} in {unit}", stated.unit.factor, f"{unit}/{stated.unit.symbol}",
                    stated.unit.source)
        formula = f"{{{name}.stated}}*{{{name}.factor}}"
        if stated.unit.offset:
            self.number(f"{name}.offset", "  zero of the scale", stated.unit.offset, unit)
            formula += f"+{{{name}.offset}}"
        self.live(name, label, formula, stated.value, unit)

    def _row(
        self, name: str, label: str, value: float | Live, unit: str, note: str, style: str, fmt: str, defined: str = ""
    ) -> None:
        self.sheet.put(self.row, LABEL, Text(label), style="label")
        if defined:
            self.sheet.put(self.row, VALUE, value, style=style, format=fmt, key=f"{self.prefix}.{name}", name=defined)
        else:
            self.sheet.put(self.row, VALUE, value, style=style, format=fmt, key=f"{self.prefix}.{name}")
        self.sheet.put(self.row, UNIT, Text("" if unit == "1" else unit), style="unit")
        if note:
            self.sheet.put(self.row, NOTE, Text(note), style="note")
        self.row += 1
