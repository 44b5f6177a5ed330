"""A measured wall-effect factor through a whole job."""

import math

import pytest

import traverse
from tests.support import jobs
from traverse.errors import TraverseError
from traverse.physics import wall_effects as we

DIAMETER = 2.4
POINTS = 8
HEAD = "line,point,differential_pressure [Pa]\n"
STEP = 0.025


def velocity(distance):
    return 20.0 * (2 * distance / DIAMETER) ** (1 / 7)


def depths():
    return [0.5 * (1 - math.sqrt(1 - (2 * k - 1) / POINTS)) * DIAMETER for k in range(1, POINTS // 2 + 1)]


def readings():
    half = [velocity(d) for d in depths()]
    rows = [f"{line},{k},{v * v!r}\n" for line in "AB" for k, v in enumerate([*half, *half[::-1]], 1)]
    return HEAD + "".join(rows)


def wall(kept):
    last = we.last_step(DIAMETER / 2, POINTS, STEP, 1.0)
    rest = we.remainder_distance(DIAMETER / 2, POINTS, last * STEP)
    rows = []
    for line in "AB":
        for point in (1, POINTS):
            rows += [f"{line},{point},{1000 * STEP * d},{velocity(d * STEP) ** 2!r}\n" for d in range(1, last + 1) if d in kept]
            rows.append(f"{line},{point},{1000 * rest},{velocity(rest) ** 2!r}\n")
    return "line,point,depth [mm],differential_pressure [Pa]\n" + "".join(rows), last, rest


def change(kind):
    return {"plane": {"diameter": f"{DIAMETER} m"}, "layout": {"points": POINTS}, "corrections": {"wall_factor": "measured"},
            "wall_effects": {"file": "wall.csv", "kind": kind}}


def found(folder, kind, kept, text=None):
    table, last, rest = wall(kept)
    (folder / "wall.csv").write_text(text or table, encoding="utf-8")
    return jobs.reduced(folder, change(kind), readings()), last, rest


def by_hand(kept, last, rest):
    """The factor from the equations written out once more, all four sectors alike."""
    radius = DIAMETER / 2
    values = [0.0] + [velocity(d * STEP) for d in range(1, last + 1)]
    for d in range(last, 0, -1):
        if d not in kept:
            values[d] = values[d + 1] if d < last else velocity(rest)
    flow = sum((values[d - 1] + values[d]) / 2 * math.pi / 4 * ((radius - d * STEP + STEP) ** 2 - (radius - d * STEP) ** 2) for d in range(1, last + 1))
    flow += velocity(rest) * (math.pi / 4 * (radius - last * STEP) ** 2 - (POINTS - 2) / (4 * POINTS) * math.pi * radius**2)
    mean = flow / (math.pi * radius**2 / (2 * POINTS))
    inner = sum(velocity(d) for d in depths())
    return (inner - velocity(depths()[0]) + mean) / inner


@pytest.mark.parametrize(("kind", "kept"), [("partial", {1}), ("partial", {1, 2, 3}), ("complete", set(range(1, 30)))])
def test_the_factor_of_a_traverse(tmp_path, kind, kept):
    result, last, rest = found(tmp_path, kind, kept)
    expected = round(by_hand(kept, last, rest), 4)
    quantities = result["runs"][0]["quantities"]
    assert 0.98 < expected < 1.0 and quantities["wall_factor"]["value"] == expected
    plain = jobs.reduced(tmp_path, {"plane": {"diameter": f"{DIAMETER} m"}, "layout": {"points": POINTS}}, readings())
    assert quantities["mean_velocity"]["value"] == pytest.approx(expected * plain["runs"][0]["quantities"]["mean_velocity"]["value"], rel=1e-13)
    said = " ".join(finding["message"] for finding in result["findings"] if finding["topic"] == "wall factor")
    assert "Method 2H" in said and (("not measured (NM)" in said) == (kind == "partial"))


def test_the_floor(tmp_path):
    """Nearly still air at the wall: the partial traverse is raised to 0.9800 (Method 2H, 12.6)."""
    table, *_ = wall({1})
    slow = "\n".join(",".join([*row.split(",")[:3], "0.01"]) if k and row else row for k, row in enumerate(table.split("\n")))
    result, *_ = found(tmp_path, "partial", {1}, slow)
    assert result["runs"][0]["quantities"]["wall_factor"]["value"] == 0.98


@pytest.mark.parametrize(("spoil", "message"), [
    (lambda job, table: job["wall_effects"].pop("file"), "no file"),
    (lambda job, table: job["corrections"].clear() or job["corrections"].update(turbulence="1 %"), "without its use"),
    (lambda job, table: job["plane"].update(diameter="0.9 m"), "at least 3.3 ft"),
    (lambda job, table: job["layout"].update(rule="log-linear"), "equal-area"),
    (lambda job, table: job["wall_effects"].update(kind="complete"), "not measured"),
    (lambda job, table: job["wall_effects"].update(run="9"), "run '9'"),
    (lambda job, table: table.append("A,3,25,300"), "an outermost point"),
    (lambda job, table: table.append("A,1,40,300"), "a wall point at 1.57 in"),
    (lambda job, table: table.__setitem__(slice(1, None), [row.replace(row.rsplit(",", 1)[1], "900") for row in table[1:] if row]), "at most 1"),
    (lambda job, table: table.__setitem__(slice(3, None), []), "wall points"),
])
def test_what_cannot_be_a_factor(tmp_path, spoil, message):
    job, table = change("partial"), wall({1})[0].split("\n")
    spoil(job, table)
    (tmp_path / "wall.csv").write_text("\n".join(table), encoding="utf-8")
    with pytest.raises(TraverseError, match=message):
        traverse.load(jobs.write(tmp_path, job, readings()))
