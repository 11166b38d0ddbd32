"""The load cases of a job as one grid: the values of each case and its loads on the surfaces, trusses side by side."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from rooftruss.design.design import Design
from rooftruss.loads.roof import ActionCase, SurfaceLoad
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Cell, Column, Grid, Measure
from rooftruss.output.truss_grids import ACTS

ROUND_OFF = 1e-9  # [m] less is zero
ACTIONS = {"D": "dead", "L": "ceiling live", "Lr": "roof live", "S": "snow", "W": "wind", "A": "accidental"}
SURFACES = ("left tail", "left slope", "right slope", "right tail", "ceiling", "self-weight")
TOGETHER = {
    SURFACES[:4]: "whole roof",
    SURFACES[1:3]: "both slopes",
    (SURFACES[0], SURFACES[3]): "both tails",
}
FROM_LEFT = "from the middle of the left bearing"
Quantity = tuple[str, str, str]  # what, kind, clause or how it acts
Found = dict[Quantity, float]


@dataclass(frozen=True, slots=True)
class _Cases:
    """The cases of trusses that are alike: case name -> values of the standard, and case name -> loads."""

    marks: tuple[str, ...]
    action: Mapping[str, str]
    values: Mapping[str, Found]
    loads: Mapping[str, Found]


def cases_grids(designs: Sequence[Design], numbering: Numbering, abreast: int = 6) -> list[Grid]:
    """Grids of all load cases, at most `abreast` trusses (or groups of like ones) side by side in each."""
    alike = _alike(designs)
    return [_grid(alike[k : k + abreast], numbering, named=len(alike) > 1) for k in range(0, len(alike), abreast)]


def _alike(designs: Sequence[Design]) -> list[_Cases]:
    groups: dict[object, _Cases] = {}
    for design in designs:
        heads = design.run.cases.heads
        values, loads = {h.name: _values(h) for h in heads}, {h.name: _loads(h, design) for h in heads}
        key = tuple(tuple(found[name].items()) for name in values for found in (values, loads))
        before = groups.get((tuple(values), key))
        marks = (*(before.marks if before else ()), design.spec.mark)
        groups[tuple(values), key] = _Cases(marks, {h.name: h.action for h in heads}, values, loads)
    return list(groups.values())


def _grid(groups: Sequence[_Cases], numbering: Numbering, *, named: bool) -> Grid:
    columns = (
        Column("Case"),
        Column("Load case"),
        Column("Quantity"),
        Column("Unit", "unit"),
        *(Column(", ".join(g.marks) if named else "All trusses", "measure") for g in groups),
        Column("Clause, or how it acts"),
    )
    action = {name: a for g in groups for name, a in g.action.items()}
    names = [name for name in numbering.cases if name in action]
    rows: list[tuple[Cell, ...]] = []
    for a in dict.fromkeys(action[name] for name in names):
        own = [name for name in names if action[name] == a]
        common = [_common([g.values[name] for name in own if name in g.values]) for g in groups]
        shared = [q for q in dict.fromkeys(q for c in common for q in c) if _everywhere(q, groups, common, own)]
        rows += _rows(f"all {a}", f"{ACTIONS.get(a, a)} load, where it enters", shared, common)
        for name in own:
            found = [{**g.values.get(name, {}), **g.loads.get(name, {})} for g in groups]
            rest = dict.fromkeys(q for f in found for q in f if q not in shared)
            rows += _rows(str(numbering.cases[name]), name, list(rest), found)
    return Grid("Cases", columns, tuple(rows))


def _common(cases: Sequence[Found]) -> Found:
    """Values that are the same in all cases of one truss that have them, and that most of the cases have.

    Of a single case that is every value: it may be listed with those that other trusses share between their cases.
    """
    out: Found = {}
    for q in dict.fromkeys(q for case in cases for q in case):
        having = [case[q] for case in cases if q in case]
        if 2 * len(having) > len(cases) and len(set(having)) == 1:
            out[q] = having[0]
    return out


def _everywhere(q: Quantity, groups: Sequence[_Cases], common: Sequence[Found], names: Sequence[str]) -> bool:
    """Whether a value can be listed once for all: it is common in every truss that has it, and not to one case only."""
    repeated = any(sum(q in g.values.get(n, {}) for n in names) > 1 for g in groups)
    return repeated and all(
        q in c or not any(q in g.values.get(n, {}) for n in names) for g, c in zip(groups, common, strict=True)
    )


def _rows(number: str, name: str, quantities: Sequence[Quantity], found: Sequence[Found]) -> Iterator[tuple[Cell, ...]]:
    for k, quantity in enumerate(quantities):
        what, kind, clause = quantity
        cells = (Measure(f[quantity], kind) if quantity in f else None for f in found)
        yield (number if k == 0 else None, name if k == 0 else None, what, kind, *cells, clause)


def _values(head: ActionCase) -> Found:
    return {(v.symbol, v.kind, v.clause): float(v.value) for v in head.values}


def _loads(head: ActionCase, design: Design) -> Found:
    """Uniform loads by surface, those of equal size together; point loads by their note; where a walked load stands.

    Strips of one surface are numbered from its left end.
    """
    out: Found = {}
    groups = _surfaces(head)
    places = [surfaces for surfaces, _ in groups]
    for surfaces, load in groups:
        if load.surface == "self-weight":
            out["self-weight of one truss", "mass", "volume on centre lines times density"] = float(design.outcome.mass)
            continue
        place = surfaces if places.count(surfaces) == 1 else f"{surfaces}, strip {_strip(load, surfaces, groups)}"
        out[f"load on {place}", "pressure", ACTS[load.kind]] = float(load.pressure)
        for word, end in (("from", load.x_from), ("to", load.x_to)):
            if end is not None:
                out[f"{word} x, {place}", "length", FROM_LEFT] = float(end) if abs(end) > ROUND_OFF else 0.0
    points = list(_points(head, design))
    if not points and not head.loads:
        points += _stop(head, design)
    for what, force, on, x in points:
        out[f"{what}, force", "force", f"down, {on}"] = force
        out[f"{what}, at x", "length", FROM_LEFT] = x
    return out


def _strip(load: SurfaceLoad, surfaces: str, groups: Sequence[tuple[str, SurfaceLoad]]) -> int:
    """Number of a load among those on the same surfaces, from the left."""

    def start(one: SurfaceLoad) -> float:
        return -np.inf if one.x_from is None else float(one.x_from)

    ordered = sorted((other for words, other in groups if words == surfaces), key=start)
    return next(k for k, other in enumerate(ordered, 1) if other is load)


def _points(head: ActionCase, design: Design) -> Iterator[tuple[str, float, str, float]]:
    """(what, force, where, x) of the job's own point loads in a case: its own, or those that join its action."""
    family = design.run.family
    own = [p for p in family.points if head.name == (p.case or f"point loads, {p.action}")]
    for k, point in enumerate(own, 1):
        chord = "bottom" if family.topology.members[point.member].surface == "ceiling" else "top"
        yield point.note or f"point load {k}", float(point.force), f"on the {chord} chord", float(point.x)


def _stop(head: ActionCase, design: Design) -> Iterator[tuple[str, float, str, float]]:
    """(what, force, where, x) of a load that is walked along a chord, at the one place of this case."""
    run = design.run
    made, c, what = run.family.topology, run.cases.names.index(head.name), head.name.split(",")[0]
    for point in run.cases.points:
        if point.case == c:
            x = run.truss.start_xy[point.member, 0] + point.at * run.truss.direction[point.member, 0]
            yield what, -float(point.fy), f"on {made.members[point.member].name}", float(x)
    for node in np.flatnonzero(run.cases.nodal[c, :, 1]):
        force, x = -float(run.cases.nodal[c, node, 1]), float(run.truss.xy[node, 0])
        yield what, force, f"at panel point {made.nodes[node]}", x


def _surfaces(head: ActionCase) -> list[tuple[str, SurfaceLoad]]:
    """Loads of a case, each with the words for all surfaces that carry the same."""
    groups: dict[tuple[object, ...], list[SurfaceLoad]] = {}
    for load in head.loads:
        reach = tuple(None if x is None else float(x) for x in (load.x_from, load.x_to))
        groups.setdefault((load.kind, float(load.pressure), *reach), []).append(load)
    return [(_words([load.surface for load in loads]), loads[0]) for loads in groups.values()]


def _words(surfaces: Sequence[str]) -> str:
    ordered = tuple(sorted(surfaces, key=SURFACES.index))
    return TOGETHER.get(ordered, ", ".join(ordered))
