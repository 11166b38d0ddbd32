"""The check of one member, bearing or deflection as a grid: every number with its letter and clause."""

from collections.abc import Sequence

import numpy as np

from rooftruss.design.case_values import case_values
from rooftruss.design.design import Design
from rooftruss.design.members import take_members
from rooftruss.design.serviceability import about, deflected, of_variable_loads_alone
from rooftruss.design.stages import bearing_members, durations_of
from rooftruss.errors import JobError, nearest
from rooftruss.output.explain_names import asked_text, deflection_place, unknown
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Cell, Column, Grid, Measure
from rooftruss.timber.terms import Step
from rooftruss.units import shown

BEARING = "bearing "


def explanation(design: Design, name: str, numbering: Numbering, combination: str | None = None) -> tuple[str, Grid]:
    """Heading and steps of the check of a member ("top 1"), a bearing ("bearing A") or a deflection ("B", "deflection
    at top 1", "sideways movement at G"), or of a load case by its name.

    combination: its number in the job or its name; None is the governing one. Raises JobError for an unknown name or
    combination, or one of the other kind: deflections go by service combinations, all else by strength combinations.
    """
    if name.lower().startswith(BEARING):
        return _bearing(design, name[len(BEARING) :].strip(), numbering, combination)
    names = design.run.members.names
    if name.casefold() in (case.casefold() for case in design.run.cases.names):
        return _case(design, name, numbering)
    if name not in names:
        place = deflection_place(design, name)
        if place is None:
            raise unknown(design, name)
        return _deflection(design, place, numbering, combination)
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


def _deflection(design: Design, place: int, numbering: Numbering, combination: str | None) -> tuple[str, Grid]:
    found, run = design.outcome.deflection, design.run
    service = [k for k, strength in enumerate(run.combinations.strength) if not strength]
    if not service:
        raise JobError(
            f"scheme {run.family.scheme.name} has no service combinations, so there are no deflections to explain"
        )
    governing = int(found.combination[place])
    number = _combination(design, numbering, combination, governing, service)
    governs = number == governing
    kind = found.kinds[int(found.kind[place])] if governs else None
    moved = deflected(run, place, number, kind)
    sideways = found.places[place].direction == "horizontal"
    alone = of_variable_loads_alone(run, moved.kind)
    what = f"{asked_text(found.places[place])}, {about(moved.kind, moved.rule, sideways=sideways, alone=alone)}"
    return _heading(design, what, numbering, number, governs), _grid(run.family.timber.explain_deflection(moved))


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


def _combination(
    design: Design, numbering: Numbering, asked: str | None, governing: int, service: Sequence[int] = ()
) -> int:
    """Strength combination asked for (or service combination, where these are given), as its number within the truss;
    the governing one, the first if nothing acts."""
    names, allowed = design.run.combinations.names, service or design.run.strength
    own = numbering.combinations_of(design)
    if asked is None:
        return governing if governing >= 0 else allowed[0]
    found = own.index(int(asked)) if asked.isdecimal() and int(asked) in own else -1
    found = names.index(asked) if asked in names else found
    if found not in allowed:
        hint = "" if asked.isdecimal() else nearest(asked, [names[k] for k in allowed])
        listed = f"numbers {own[allowed[0]]} to {own[allowed[-1]]}; `rooftruss envelope` and the workbook list them"
        kind = "service" if service else "strength"
        raise JobError(f"no {kind} combination {asked!r}; {hint if hint.startswith('did you mean') else listed}")
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
