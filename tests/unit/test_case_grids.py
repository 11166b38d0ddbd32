"""The sheet of load cases holds every load of every case: strips of wind, walked loads, point loads of the job."""

from collections.abc import Iterator

import pytest

from rooftruss.basis.jobform import read_job
from rooftruss.design.design import Design
from rooftruss.design.sizing import size_truss
from rooftruss.output.case_grids import cases_grids
from rooftruss.output.numbering import numbering_of
from rooftruss.output.schedule import Measure
from tests.en_jobs import BARN

OWN = """
[[loads.case]]
name = "snow sliding from the tower"
action = "S"
[[loads.case.loads]]
surface = "left slope"
kind = "plan"
pressure = "0.9 kPa"
[[loads.case.points]]
chord = "top"
position = "2 m"
force = "0.7 kN"

[[loads.point]]
action = "D"
chord = "bottom"
position = "4 m"
force = "0.4 kN"
note = "tank"

[[truss]]"""


@pytest.fixture(scope="module")
def design(tmp_path_factory) -> Design:
    """The barn with a case of its own and a point load, and a load that is walked along the ceiling, too."""
    text = BARN.read_text("utf-8").replace("[[truss]]", OWN, 1)
    text = text.replace('ceiling_live = "0 kPa"', 'ceiling_live = "0 kPa"\nceiling_point_load = "0.9 kN"')
    path = tmp_path_factory.mktemp("job") / "barn.toml"
    path.write_text(text, "utf-8")
    job = read_job(path)
    return size_truss(job, job.trusses[0])


@pytest.fixture(scope="module")
def sheet(design) -> dict[str, list[tuple[str, float]]]:
    """Case name -> (quantity, SI value) of the rows below it; "all S" and the like for what cases share."""
    (grid,) = cases_grids([design], numbering_of([design]))
    found: dict[str, list[tuple[str, float]]] = {}
    for number, name, quantity, _, value, _ in grid.rows:
        if number is not None:
            rows = found.setdefault(str(number if str(number).startswith("all") else name), [])
        assert isinstance(value, Measure)
        rows.append((str(quantity), value.value))
    return found


def test_every_case_stands_there_with_its_number(design, sheet):
    names = [name for name in sheet if not name.startswith("all ")]
    assert sorted(names) == sorted(design.run.cases.names)


def stretches(design: Design) -> Iterator[tuple[str, float, float | None, float | None]]:
    """(case, pressure, from, to) of every surface load."""
    for head in design.run.cases.heads:
        for load in head.loads:
            if load.surface != "self-weight":
                ends = (None if x is None else float(x) for x in (load.x_from, load.x_to))
                yield head.name, float(load.pressure), *ends


def test_no_strip_of_wind_is_lost(design, sheet):
    """Two strips of one slope once shared a line of the sheet."""
    strips = 0
    for case, pressure, start, end in stretches(design):
        rows = sheet[case]
        loads = [q for q, value in rows if q.startswith("load on ") and value == pytest.approx(pressure)]
        assert loads, (case, pressure)
        if start is not None:
            places = [q.removeprefix("load on ") for q in loads]
            assert any({(f"from x, {p}", start), (f"to x, {p}", end)} <= set(rows) for p in places), (case, start, end)
            strips += 1
    assert strips > 50


def test_strips_are_numbered_from_the_left(sheet):
    for rows in sheet.values():
        ends = {q: value for q, value in rows if q.startswith("from x, ") and "strip" in q}
        for q, value in ends.items():
            if q.endswith("strip 2"):
                assert value > ends[q.removesuffix("2") + "1"]


def test_a_walked_load_says_where_it_stands(design, sheet):
    run = design.run
    middle = dict(sheet["person on roof, middle of top 2"])
    k = run.members.names.index("top 2")
    ends = run.truss.start_xy[k, 0], run.truss.end_xy[k, 0]
    assert middle == {
        "person on roof, force": pytest.approx(1000.0),  # EN 1991-1-1, Table 6.10: Q_k = 1.0 kN
        "person on roof, at x": pytest.approx(sum(ends) / 2),
    }
    node = run.family.topology.nodes.index("E")
    assert dict(sheet["person on roof, at E"])["person on roof, at x"] == pytest.approx(run.truss.xy[node, 0])
    assert ("Q_k", 1000.0) in sheet["all Lr"]
    assert ("load on ceiling, force", pytest.approx(900.0)) in [
        row for name, rows in sheet.items() if name.startswith("load on ceiling, ") for row in rows
    ]


def test_each_walked_load_balances_what_the_sheet_says(design, sheet):
    for c, head in enumerate(design.run.cases.heads):
        if head.name.startswith("person on roof"):
            rows = dict(sheet[head.name])
            up = design.run.solution.reactions[c, :, 1]
            span = design.run.truss.xy[design.run.family.topology.supports[1].node, 0]
            assert up.sum() == pytest.approx(rows["person on roof, force"])
            assert up[1] * span == pytest.approx(rows["person on roof, force"] * rows["person on roof, at x"])


def test_point_loads_of_the_job_stand_in_their_own_cases_only(sheet):
    assert [name for name, rows in sheet.items() if any(q.startswith("tank") for q, _ in rows)] == ["point loads, D"]
    assert dict(sheet["point loads, D"]) == {"tank, force": 400.0, "tank, at x": pytest.approx(3.95)}
    own = dict(sheet["snow sliding from the tower"])
    assert own["point load 1, force"] == 700.0
    assert own["point load 1, at x"] == pytest.approx(1.95)
    assert own["load on left slope"] == pytest.approx(900.0)
    assert [name for name, rows in sheet.items() if any(q.startswith("point load 1") for q, _ in rows)] == [
        "snow sliding from the tower"
    ]
