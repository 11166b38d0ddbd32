"""The check of one member or bearing as a grid: every number with its letter and clause."""

from collections.abc import Sequence

import numpy as np

from rooftruss.design.case_values import case_values
from rooftruss.design.design import Design
from rooftruss.design.members import take_members
from rooftruss.design.stages import bearing_members, durations_of
from rooftruss.errors import JobError, nearest
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Cell, Column, Grid, Measure
from rooftruss.timber.terms import Step
from rooftruss.units import shown

BEARING = "bearing "


def explanation(design: Design, name: str, numbering: Numbering, combination: str | None = None) -> tuple[str, Grid]:
    """Heading and steps of the check of a member ("top 1") or bearing ("bearing A"), or of a load case by its name.

    combination: its number in the job or its name; None is the governing one. Raises JobError for an unknown member or
    combination, or a combination of the deflections.
    """
    if name.lower().startswith(BEARING):
        return _bearing(design, name[len(BEARING) :].strip(), numbering, combination)
    names = design.run.members.names
    if name.casefold() in (case.casefold() for case in design.run.cases.names):
        return _case(design, name, numbering)
    if name not in names:
        known = [*names, *(BEARING + n for n in _bearing_names(design)), *design.run.cases.names]
        raise JobError(f"truss {design.spec.mark} has no member, bearing or load case {name!r}; {nearest(name, known)}")
    member = names.index(name)
    governing = int(design.outcome.utilisation.combination[member])
    number = _combination(design, numbering, combination, governing)
    run = design.run
    row = run.strength.index(number)
    steps = run.family.timber.explain(run.members, run.demand, durations_of(run.combinations), member, row)
    option = design.sizes[run.family.topology.groups[member]]
    size = f"{name}, {option.section.name} {option.grade.name} ({option.grade.table})"
    return _heading(design, size, numbering, number, number == governing), _grid(steps)


def _bearing(design: Design, node: str, numbering: Numbering, combination: str | None) -> tuple[str, Grid]:
    nodes = _bearing_names(design)
    if node not in nodes:
        raise JobError(f"truss {design.spec.mark} has no bearing at {node!r}; {nearest(node, nodes)}")
    support = nodes.index(node)
    governing = int(design.outcome.bearing.combination[support])
    number = _combination(design, numbering, combination, governing)
    run = design.run
    steps = run.family.timber.explain_bearing(
        np.maximum(run.reactions[..., 1], 0.0),
        take_members(run.members, bearing_members(run.family.topology)),
        run.bearing_lengths,
        durations_of(run.combinations),
        support,
        run.strength.index(number),
    )
    return _heading(design, f"bearing {node}", numbering, number, number == governing), _grid(steps)


def _case(design: Design, name: str, numbering: Numbering) -> tuple[str, Grid]:
    """The values behind a load case, and what it puts on members and joints."""
    found = case_values(design, name)
    rows: list[tuple[Cell, ...]] = [
        (v.symbol, Measure(float(v.value), v.kind), v.clause, "") for v in found.head.values
    ]
    for member, start, end, qx, qy in found.stretches:
        where = f"{member}, from its start {_metres(design, start)} to {_metres(design, end)}"
        rows += [(q, Measure(value, "line load"), "", where) for q, value in (("q_x", qx), ("q_y", qy)) if value]
    for member, at, fx, fy in found.points:
        where = f"{member}, {_metres(design, at)} from its start"
        rows += [(f, Measure(value, "force"), "", where) for f, value in (("F_x", fx), ("F_y", fy)) if value]
    for joint, fx, fy in found.joints:
        rows += [(f, Measure(value, "force"), "", f"joint {joint}") for f, value in (("F_x", fx), ("F_y", fy)) if value]
    rows += [
        (letter, Measure(value, "force"), "", f"sum of all loads {way}")
        for letter, value, way in zip(("sum F_x", "sum F_y"), found.resultant, ("to the right", "upwards"), strict=True)
    ]
    number = f"{design.spec.mark} load case {numbering.cases[found.head.name]}"
    columns = (Column("symbol"), Column("value", "own"), Column("clause"), Column("where"))
    heading = f"{number}, action {found.head.action}: {found.head.name}, unfactored"
    return heading, Grid("Load case", columns, tuple(rows))


def _metres(design: Design, length: float) -> str:
    return shown(length, "length", design.run.family.job.units)


def _bearing_names(design: Design) -> list[str]:
    made = design.run.family.topology
    return [made.nodes[s.node] for s in made.supports]


def _combination(design: Design, numbering: Numbering, asked: str | None, governing: int) -> int:
    """Strength combination asked for, as its number within the truss; the governing one, the first if nothing acts."""
    names, strength = design.run.combinations.names, design.run.strength
    own = numbering.combinations_of(design)
    if asked is None:
        return governing if governing >= 0 else strength[0]
    found = own.index(int(asked)) if asked.isdecimal() and int(asked) in own else -1
    found = names.index(asked) if asked in names else found
    if found not in strength:
        hint = "" if asked.isdecimal() else nearest(asked, [names[k] for k in strength])
        listed = f"numbers {own[strength[0]]} to {own[strength[-1]]}; `rooftruss envelope` and the workbook list them"
        raise JobError(f"no strength combination {asked!r}; {hint if hint.startswith('did you mean') else listed}")
    return found


def _heading(design: Design, what: str, numbering: Numbering, number: int, governs: bool) -> str:
    combinations = design.run.combinations
    return (
        f"{design.spec.mark} {what}; combination {numbering.combinations_of(design)[number]} "
        f"({combinations.clauses[number]}): {combinations.names[number]}{', governing' if governs else ''}"
    )


def _grid(steps: Sequence[Step]) -> Grid:
    rows = tuple((s.symbol, Measure(s.value, s.kind), s.clause, s.text) for s in steps)
    return Grid("Check", (Column("symbol"), Column("value", "own"), Column("clause"), Column("what it is")), rows)
