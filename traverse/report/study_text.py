"""A study as text and as a table of comma-separated values."""

from __future__ import annotations

import csv
import io
import textwrap
from collections.abc import Sequence

from traverse import layouts
from traverse.report.numbers import plain
from traverse.report.text import table
from traverse.study import FAMILIES, TOLD_APART, Comparison, Row, Study

# Rules in the order in which the quarrel is usually had.
WIDTH = 110
RIVALS = ("log-tchebycheff", "log-linear")
RANGES = {"single": "One line alone", "rotated": "The same diameters turned", "shifted": "All points off along the probe as tried"}


def study(result: Study) -> str:
    """Return the study: a table grouped by family, the verdict, the limits."""
    heads = ["layout", "points", "mean velocity", "difference %", "u %", "from used %", "u %"]
    rows: list[list[str]] = [heads]
    breaks: list[tuple[int, str]] = []
    for family, title in FAMILIES.items():
        own = result.of(family)
        if own:
            breaks.append((len(rows), title))
            rows.extend(_cells(result, row) for row in own)
    lines = table(rows, right=range(1, len(heads))).split("\n")
    for place, title in reversed(breaks):
        lines[place:place] = ["", title]
    parts = [result.title, f"What other layouts would have given, from the {_basis(result)}", "", *lines, ""]
    basis = "Difference from the section mean of the fitted field; u: standard uncertainty, of the layout alone." if measured(result) \
        else "Difference from the exact mean of the formula; velocities over that in the middle."
    parts += [basis, "", *_wrapped(verdict(result)), "", "Limits"]
    return "\n".join([*parts, *(line for note in result.notes for line in _wrapped(f"- {note}", "  "))])


def _wrapped(paragraph: str, indent: str = "") -> list[str]:
    """Return a paragraph as lines; a number stays with its percent sign."""
    kept = paragraph.replace(" %", "\u00a0%")
    lines = textwrap.wrap(kept, WIDTH, subsequent_indent=indent, break_long_words=False, break_on_hyphens=False)
    return [line.replace("\u00a0", " ") for line in lines]


def measured(result: Study) -> bool:
    """Return whether the study is of readings, not of a formula."""
    return result.formula is None


def _basis(result: Study) -> str:
    return f"readings, {result.basis}" if measured(result) else result.basis


def _cells(result: Study, row: Row) -> list[str]:
    return [
        f"  {name(row)}", str(row.total) if row.total else "", speed(result, row.value), _percent(row.difference),
        _plain_percent(row.uncertainty), _percent(row.from_used), _plain_percent(row.from_used_uncertainty if not row.read else None),
    ]


def name(row: Row) -> str:
    """Return the name of a layout, with the other rules that have the same points, or their number."""
    if not row.also:
        return row.name
    return f"{row.name} (= {', '.join(row.also) if len(row.also) < 3 else f'{len(row.also)} more rules'})"


def speed(result: Study, value: float) -> str:
    """Return a velocity in the units of the job; of a formula, the number."""
    return plain("mean_velocity", value, result.units) if measured(result) else f"{value:.4f}"


def _percent(value: float) -> str:
    return f"{100.0 * value + 0.0:+.2f}"


def _plain_percent(value: float | None) -> str:
    return "" if value is None else f"{100.0 * value:.2f}"


def verdict(result: Study) -> str:
    """Return in one paragraph what the study comes to."""
    parts = [_of_used(result), *_of_rules(result), *_of_quarrel(result)]
    for family, words in RANGES.items():
        parts += _range(result.of(family), words)
    told = [row for row in result.rows if row.uncertainty is not None]
    if told:
        beyond = sum(abs(row.difference) > TOLD_APART * (row.uncertainty or 0.0) for row in told)
        parts.append(f"{beyond} of {len(told)} differences exceed twice their standard uncertainty.")
    return " ".join(parts)


def _of_used(result: Study) -> str:
    used = result.used
    mean = speed(result, result.section_mean)
    if result.section_uncertainty is None:
        return f"The exact mean is {mean}; the points of the job would give {_percent(used.difference)} %."
    doubt = f"u {_plain_percent(result.section_uncertainty / result.section_mean)} %"
    own = _with(used.difference, used.uncertainty)
    return f"The fitted field has a section mean of {mean} ({doubt}); the layout used lies {own} from it."


def _of_rules(result: Study) -> list[str]:
    rules = sorted(result.of("rules"), key=lambda row: abs(row.difference))
    if len(rules) < 2:
        return []
    least, most = rules[0], rules[-1]
    return [
        f"Of the rules, {most.name}, would have been furthest off, {_with(most.difference, most.uncertainty)}, and {least.name}, least, "
        f"{_with(least.difference, least.uncertainty)}."
    ]


def _of_quarrel(result: Study) -> list[str]:
    """Say equal area or not, with about as many points as were used."""
    found = []
    for rival in RIVALS:
        own = [one for one in result.comparisons if one.second == rival]
        if own:
            found.append(_quarrel(min(own, key=lambda one: abs(one.lines * one.points - result.used.total)), layouts.rules()[rival].title))
    return found


def _quarrel(one: Comparison, rival: str) -> str:
    side = "above" if one.difference > 0 else "below"
    doubt = f" (u {_plain_percent(one.uncertainty)} %)" if one.uncertainty is not None else ""
    text = f"With {one.lines} x {one.points} points equal areas would read {100 * abs(one.difference):.2f} %{doubt} {side} {rival}"
    if not one.told_apart:
        return f"{text}: not to be told apart on these readings."
    both = f"({_percent(one.first_difference)} % against {_percent(one.second_difference)} %)"
    if not one.nearer:
        return f"{text}; which of them is nearer to the section mean {both} these readings do not tell."
    return f"{text}; {'equal areas' if one.nearer == one.first else rival} would have been nearer to the section mean {both}."


def _range(rows: Sequence[Row], words: str) -> list[str]:
    if not rows:
        return []
    low, high = min(row.difference for row in rows), max(row.difference for row in rows)
    return [f"{words}: {_percent(low)} % to {_percent(high)} %."]


def _with(difference: float, uncertainty: float | None) -> str:
    return f"{_percent(difference)} %" + ("" if uncertainty is None else f" (u {_plain_percent(uncertainty)} %)")


def csv_bytes(result: Study) -> bytes:
    """Return the rows as comma-separated values, SI units, differences in parts of 1."""
    stream = io.StringIO()
    records = [row.to_dict() | {"same_points": " ".join(row.also)} for row in result.rows]
    writer = csv.DictWriter(stream, fieldnames=list(records[0]), lineterminator="\n")
    writer.writeheader()
    writer.writerows(records)
    return stream.getvalue().encode()
