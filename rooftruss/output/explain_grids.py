"""The check of one member or bearing as a grid: every number with its letter and clause."""

from collections.abc import Sequence

import numpy as np

from rooftruss.design.design import Design
from rooftruss.design.stages import bearing_members, durations_of, take_members
from rooftruss.errors import JobError, nearest
from rooftruss.output.schedule import Column, Grid, Measure
from rooftruss.timber.check import Step

BEARING = "bearing "


def explanation(design: Design, name: str, combination: str | None = None) -> tuple[str, Grid]:
    """Heading and steps of the check of a member ("top 1") or of a bearing ("bearing A").

    combination: number (from 1) or name; None is the governing one. Raises JobError for an unknown member or
    combination, or a combination of the deflections.
    """
    if name.lower().startswith(BEARING):
        return _bearing(design, name[len(BEARING) :].strip(), combination)
    names = design.run.members.names
    if name not in names:
        known = [*names, *(BEARING + n for n in _bearing_names(design))]
        raise JobError(f"truss {design.spec.mark} has no member {name!r}; {nearest(name, known)}")
    member = names.index(name)
    governing = int(design.outcome.utilisation.combination[member])
    number = _combination(design, combination, governing)
    run = design.run
    row = run.strength.index(number)
    steps = run.family.timber.explain(run.members, run.demand, durations_of(run.combinations), member, row)
    option = design.sizes[run.family.topology.groups[member]]
    return _heading(design, f"{name}, {option.section.name} {option.grade.name}", number, number == governing), _grid(
        steps
    )


def _bearing(design: Design, node: str, combination: str | None) -> tuple[str, Grid]:
    nodes = _bearing_names(design)
    if node not in nodes:
        raise JobError(f"truss {design.spec.mark} has no bearing at {node!r}; {nearest(node, nodes)}")
    support = nodes.index(node)
    governing = int(design.outcome.bearing.combination[support])
    number = _combination(design, combination, governing)
    run = design.run
    steps = run.family.timber.explain_bearing(
        np.maximum(run.reactions[..., 1], 0.0),
        take_members(run.members, bearing_members(run.family.topology)),
        np.broadcast_to(run.truss.bearing, (len(nodes),)),
        durations_of(run.combinations),
        support,
        run.strength.index(number),
    )
    return _heading(design, f"bearing {node}", number, number == governing), _grid(steps)


def _bearing_names(design: Design) -> list[str]:
    made = design.run.family.topology
    return [made.nodes[s.node] for s in made.supports]


def _combination(design: Design, asked: str | None, governing: int) -> int:
    """Number of the strength combination asked for; the governing one, or the first where nothing acts."""
    names, strength = design.run.combinations.names, design.run.strength
    if asked is None:
        return governing if governing >= 0 else strength[0]
    number = int(asked) - 1 if asked.isdecimal() else names.index(asked) if asked in names else -1
    if number not in strength:
        hint = nearest(asked, [names[k] for k in strength]) if not asked.isdecimal() else ""
        hint = (
            hint if hint.startswith("did you mean") else f"numbers 1 to {len(strength)}, listed by `rooftruss envelope`"
        )
        raise JobError(f"no strength combination {asked!r}; {hint}")
    return number


def _heading(design: Design, what: str, number: int, governs: bool) -> str:
    combinations = design.run.combinations
    return (
        f"{design.spec.mark} {what}; combination {number + 1} ({combinations.clauses[number]}): "
        f"{combinations.names[number]}{', governing' if governs else ''}"
    )


def _grid(steps: Sequence[Step]) -> Grid:
    rows = tuple((s.symbol, Measure(s.value, s.kind), s.clause, s.text) for s in steps)
    return Grid("Check", (Column("symbol"), Column("value", "own"), Column("clause"), Column("what it is")), rows)
