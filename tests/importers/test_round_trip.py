"""Whatever delimiter, decimal sign, encoding and unit a table is written in, the same SI values come back."""

from __future__ import annotations

import csv
import io
import tempfile
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.importers.conftest import PARTS
from traverse.errors import TraverseError
from traverse.importers import load, load_setup
from traverse.units import UNITS

PRESSURES = ["Pa", "hPa", "kPa", "mbar", "inH2O", "mmH2O", "inHg", "psi", "inH2O@60F", "torr"]
TEMPERATURES = ["degC", "degF", "K", "degR"]
HEADS = ["differential_pressure", "dp", "VP", "Velocity Pressure", "ΔP", "Staudruck"]
ENCODINGS = ["utf-8", "utf-8-sig", "utf-16", "cp1252"]
GROUPS = ["", " ", "'"]


def job_text(more: str = "") -> str:
    return "".join(f"[{name}]\n{body}\n" for name, body in PARTS.items()) + more


def shown(value: float, digits: int, decimal: str, group: str) -> str:
    text = f"{abs(value):,.{digits}f}".replace(",", "\0").replace(".", decimal).replace("\0", group)
    return ("-" if value < 0 else "") + text


@settings(max_examples=120, deadline=None)
@given(
    values=st.lists(st.integers(-20000, 900000), min_size=12, max_size=12),
    delimiter=st.sampled_from([",", ";", "\t", "|"]),
    decimal=st.sampled_from([".", ","]),
    encoding=st.sampled_from(ENCODINGS),
    pressure=st.sampled_from(PRESSURES),
    temperature=st.sampled_from(TEMPERATURES),
    head=st.sampled_from(HEADS),
    group=st.sampled_from(GROUPS),
    junk=st.integers(0, 5),
    end=st.sampled_from(["\n", "\r\n", "\r"]),
    units_row=st.booleans(),
    order=st.permutations(range(12)),
)
def test_the_same_values_come_back(
    values, delimiter, decimal, encoding, pressure, temperature, head, group, junk, end, units_row, order
):
    if encoding == "cp1252" and head == "ΔP":
        head = "Δ P".replace("Δ ", "Delta ")
    numbers = [value / 100 for value in values]
    places = [(line, point) for line in "AB" for point in range(1, 7)]
    stream = io.StringIO(newline="")
    writer = csv.writer(stream, delimiter=delimiter, lineterminator=end)
    for number in range(junk):
        writer.writerow([f"Note {number}", "Süd"])
    heads = ["Port", "Point", head if units_row else f"{head} [{pressure}]", "Temp" if units_row else f"Temp [{temperature}]"]
    writer.writerow(heads)
    if units_row:
        writer.writerow(["", "", pressure, temperature])
    for i in order:
        writer.writerow([*places[i], shown(numbers[i], 2, decimal, group), shown(300.25 + i, 2, decimal, group)])
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "job.toml"
        path.write_text(job_text(), encoding="utf-8")
        (Path(folder) / "readings.csv").write_bytes(stream.getvalue().encode(encoding))
        readings = load(path).runs[0].readings
    unit, warm = UNITS[pressure], UNITS[temperature]
    assert readings.differential_pressure == pytest.approx([unit.to_si(n) for n in numbers], rel=1e-12)
    assert readings.temperature == pytest.approx([warm.to_si(300.25 + i) for i in range(12)], rel=1e-12)
    assert readings.status == tuple("negative" if n < 0 else "read" for n in numbers)


SAMPLE = "run;line;point;dp [Pa];temp [degC];status\n" + "".join(
    f"1;{line};{point};{10 * point}.5;25.5;\n" for line in "AB" for point in range(1, 7)
)


REASONS: list[str] = []


def survive(job: bytes, readings: bytes) -> None:
    """Load; nothing but the house's own errors may come out, and each says something."""
    REASONS.clear()
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "job.toml"
        path.write_bytes(job)
        (Path(folder) / "readings.csv").write_bytes(readings)
        for function in (load, load_setup):
            try:
                function(path)
            except TraverseError as problem:
                REASONS.append(str(problem))
    assert all(REASONS)


@settings(max_examples=150, deadline=None)
@given(st.binary(max_size=400))
def test_random_bytes_as_readings(content):
    survive(job_text().encode(), content)


@settings(max_examples=150, deadline=None)
@given(st.data())
def test_damaged_readings(data):
    content = bytearray(SAMPLE.encode())
    for _ in range(data.draw(st.integers(1, 4))):
        place = data.draw(st.integers(0, len(content) - 1))
        content[place : place + data.draw(st.integers(0, 3))] = data.draw(
            st.sampled_from(
                [
                    b"",
                    b"\x00",
                    b"\xff",
                    b'"',
                    b";",
                    b"\n",
                    b"<",
                    b"1e9",
                    b"-",
                    b",",
                    b"OBS",
                    b"\xc2\xa0",
                    b"e400",
                    b"=",
                    b"9" * 400,
                    b"\xe2\x88\x92",
                ]
            )
        )
    survive(job_text().encode(), bytes(content[: data.draw(st.integers(1, len(content)))]))


@settings(max_examples=150, deadline=None)
@given(st.data())
def test_damaged_job_files(data):
    more = '[[run]]\nname = "1"\nstatic = "1 Pa"\n[uncertainty]\ncoefficient = "±1 % + 2 % (k=2)"\n'
    more += 'position = "1 mm"\n[design]\nactual_flow = "1 m3/s"\n'
    content = bytearray(job_text(more).encode())
    for _ in range(data.draw(st.integers(1, 3))):
        place = data.draw(st.integers(0, len(content) - 1))
        content[place : place + data.draw(st.integers(0, 6))] = data.draw(
            st.sampled_from(
                [
                    b"",
                    b"\x00",
                    b"\xff",
                    b'"',
                    b"[",
                    b"]",
                    b"=",
                    b"1",
                    b"-",
                    b"1e400",
                    b"{}",
                    b"[]",
                    b"true",
                    b"0",
                    b'"\n',
                    b"9" * 400,
                    b"nan",
                    b"inf",
                ]
            )
        )
    survive(bytes(content), SAMPLE.encode())


VALUES = st.recursive(
    st.one_of(
        st.booleans(),
        st.integers(-(10**400), 10**400),
        st.floats(),
        st.text(max_size=6),
        st.sampled_from(["1 m", "1 Pa", "5 %", "custom"]),
    ),
    lambda inner: (
        st.lists(inner, max_size=2)
        | st.dictionaries(st.sampled_from(["depth", "weight", "line", "calibration"]), inner, max_size=2)
    ),
    max_leaves=4,
)


@settings(max_examples=300, deadline=None)
@given(st.data())
def test_any_value_at_any_key(data):
    from traverse.importers._schema import SCHEMA

    table = data.draw(st.sampled_from([*SCHEMA, "run"]))
    known = [*SCHEMA.get(table, {}), "name", "coverage", "coefficient", "layout"]
    key, value = data.draw(st.sampled_from(known)), data.draw(VALUES)
    tables = dict(PARTS.items())
    own = "\n".join(row for row in tables.get(table, "").splitlines() if row.split(" = ")[0] != key)
    tables[table] = f"{own}\n{key} = {toml(value)}\n"
    body = "".join(f"[{name}]\n{text}\n" if name != "run" else f"[[run]]\n{text}\n" for name, text in tables.items())
    survive(body.encode("utf-8", "replace"), SAMPLE.encode())


def toml(value: object) -> str:
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, str):
        return '"' + "".join(c if c.isalnum() or c in " %/" else "_" for c in value) + '"'
    if isinstance(value, list):
        return "[" + ", ".join(toml(entry) for entry in value) + "]"
    if isinstance(value, dict):
        return "{" + ", ".join(f"{name} = {toml(entry)}" for name, entry in value.items()) + "}"
    return repr(value)
