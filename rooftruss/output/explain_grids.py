"""The check of one member or bearing as a grid: every number with its letter and clause."""

from collections.abc import Sequence

import numpy as np

from rooftruss.design.design import Design
from rooftruss.design.stages import bearing_members, durations_of, take_members
from rooftruss.errors import JobError, nearest
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Column, Grid, Measure
from rooftruss.timber.check import Step

BEARING = "bearing "


def explanation(design: Design, name: str, numbering: Numbering, combination: str | None = None) -> tuple[str, Grid]:
    """Heading and steps of the check of a member ("top 1") or of a bearing ("bearing A").

    combination: its number in the job or its name; None is the governing one. Raises JobError for an unknown member or
    combination, or a combination of the deflections.
    """
    if name.lower().startswith(BEARING):
        return _bearing(design, name[len(BEARING) :].strip(), numbering, combination)
    names = design.run.members.names
    if name not in names:
        known = [*names, *(BEARING + n for n in _bearing_names(design))]
        raise JobError(f"truss {design.spec.mark} has no member {name!r}; {nearest(name, known)}")
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
        np.broadcast_to(run.truss.bearing, (len(nodes),)),
        durations_of(run.combinations),
        support,
        run.strength.index(number),
    )
    return _heading(design, f"bearing {node}", numbering, number, number == governing), _grid(steps)


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
