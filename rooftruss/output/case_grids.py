"""The load cases of a job as one grid: the values of each case and its loads on the surfaces, trusses side by side."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from rooftruss.basis.job import PointLoad
from rooftruss.design.design import Design
from rooftruss.loads.roof import ActionCase, SurfaceLoad
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Cell, Column, Grid, Measure
from rooftruss.output.truss_grids import ACTS

ACTIONS = {"D": "dead", "L": "ceiling live", "Lr": "roof live", "S": "snow", "W": "wind"}
SURFACES = ("left tail", "left slope", "right slope", "right tail", "ceiling", "self-weight")
TOGETHER = {
    SURFACES[:4]: "whole roof",
    SURFACES[1:3]: "both slopes",
    (SURFACES[0], SURFACES[3]): "both tails",
}
Quantity = tuple[str, str, str]  # what, kind, clause or how it acts
Found = dict[Quantity, float]


@dataclass(frozen=True, slots=True)
class _Cases:
    """Everything known of the cases of trusses that are alike: case name -> quantities."""

    marks: tuple[str, ...]
    action: Mapping[str, str]
    found: Mapping[str, Found]


def cases_grids(designs: Sequence[Design], numbering: Numbering, abreast: int = 6) -> list[Grid]:
    """Grids of all load cases, at most `abreast` trusses (or groups of like ones) side by side in each."""
    alike = _alike(designs)
    return [_grid(alike[k : k + abreast], numbering, named=len(alike) > 1) for k in range(0, len(alike), abreast)]


def _alike(designs: Sequence[Design]) -> list[_Cases]:
    groups: dict[object, _Cases] = {}
    for design in designs:
        heads = design.run.cases.heads
        found = {h.name: {**_values(h), **_loads(h, design)} for h in heads}
        key = tuple((name, tuple(quantities.items())) for name, quantities in found.items())
        before = groups.get(key)
        marks = (*(before.marks if before else ()), design.spec.mark)
        groups[key] = _Cases(marks, {h.name: h.action for h in heads}, found)
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
    names = [name for name in numbering.cases if any(name in g.found for g in groups)]
    action = {name: g.action[name] for g in groups for name in g.found}
    rows: list[tuple[Cell, ...]] = []
    for a in dict.fromkeys(action[name] for name in names):
        own = [name for name in names if action[name] == a]
        shared = _shared(groups, own)
        rows += _rows(f"all {a}", f"every case of {ACTIONS.get(a, a)} load", shared, [g.found[_first(g, own)] if _first(g, own) else {} for g in groups])
        for name in own:
            found = [g.found.get(name, {}) for g in groups]
            rest = dict.fromkeys(q for f in found for q in f if q not in shared)
            rows += _rows(str(numbering.cases[name]), name, list(rest), found)
    return Grid("Cases", columns, tuple(rows))


def _first(group: _Cases, names: Sequence[str]) -> str:
    return next((name for name in names if group.found.get(name)), "")


def _shared(groups: Sequence[_Cases], names: Sequence[str]) -> list[Quantity]:
    """Quantities that all cases of one action have, with the same value in all cases of a truss."""
    if len(names) < 2:
        return []
    lists = [[g.found[name] for name in names if g.found.get(name)] for g in groups]
    first = next((cases[0] for cases in lists if cases), {})
    return [q for q in first if all(q in f and f[q] == cases[0].get(q) for cases in lists for f in cases)]


def _rows(number: str, name: str, quantities: Sequence[Quantity], found: Sequence[Found]) -> Iterator[tuple[Cell, ...]]:
    for k, quantity in enumerate(quantities):
        what, kind, clause = quantity
        cells = (Measure(f[quantity], kind) if quantity in f else None for f in found)
        yield (number if k == 0 else None, name if k == 0 else None, what, kind, *cells, clause)


def _values(head: ActionCase) -> Found:
    return {(v.symbol, v.kind, v.clause): float(v.value) for v in head.values}


def _loads(head: ActionCase, design: Design) -> Found:
    """Uniform loads by surface; those of equal size are listed together. Point loads by their note."""
    out: Found = {}
    for surfaces, load in _surfaces(head):
        if load.surface == "self-weight":
            out["self-weight of one truss", "mass", "volume on centre lines times density"] = float(design.outcome.mass)
            continue
        out[f"load on {surfaces}", "pressure", ACTS[load.kind]] = float(load.pressure)
        for word, x in (("from", load.x_from), ("to", load.x_to)):
            if x is not None:
                out[f"{word} x, {surfaces}", "length", "from the middle of the left bearing"] = float(x)
    if not head.loads:
        for k, point in enumerate(p for p in design.spec.loads.points if p.action == head.action):
            out.update(_point(k, point, design.spec.bearing))
    return out


def _point(k: int, point: PointLoad, bearing: float) -> Found:
    what = point.note or f"point load {k + 1}"
    return {
        (f"{what}, force", "force", f"down, on the {point.chord} chord"): point.force,
        (f"{what}, at x", "length", "from the middle of the left bearing"): point.position - bearing / 2,
    }


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
