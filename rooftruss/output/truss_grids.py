"""Grids of one truss: members, reactions, deflections, loading, and the combinations these speak of."""

import math
from collections.abc import Collection, Sequence

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.envelope import Peak
from rooftruss.design.design import LIMIT, Design
from rooftruss.design.family import GROUPS
from rooftruss.design.places import Place
from rooftruss.design.serviceability import unlimited
from rooftruss.loads.cases import LoadCases
from rooftruss.loads.roof import ActionCase
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Cell, Column, Grid

COMBINATION = Column("Comb.", "combination")
ACTS = {
    "plan": "down, per plan area",
    "slope": "down, per sloping area",
    "normal": "square to the surface, towards it",
    "right": "to the right, per upright area",
}


class _Governing:
    """Reads values and the numbers of their combinations from peaks."""

    def __init__(self, design: Design, numbering: Numbering) -> None:
        self.number = numbering.combinations_of(design)

    def __call__(self, found: Peak, k: int) -> tuple[float, int]:
        n = int(found.combination[k])
        return float(found.value[k]), self.number[n] if n >= 0 else 0


def members_grid(design: Design, numbering: Numbering, idle: Collection[str] = ()) -> Grid:
    """Every member: size, governing effects with their combinations, and its worst check. `idle` are marked."""
    columns = (
        Column("Member"),
        Column("Part"),
        Column("Size"),
        Column("Grade"),
        Column("Length", "length"),
        Column("Tension", "force"),
        COMBINATION,
        Column("Compression", "force"),
        COMBINATION,
        Column("Bending moment", "moment"),
        COMBINATION,
        Column("Shear", "force"),
        COMBINATION,
        Column("Utilisation", "ratio"),
        COMBINATION,
        Column("Result", "result"),
        Column("Governing rule"),
        Column("Clause"),
        Column("Zero-force member"),
    )
    governing = _Governing(design, numbering)
    rows = tuple(_member(design, k, governing, idle) for k in range(len(design.run.members.names)))
    return Grid("Members", columns, rows)


def _member(design: Design, k: int, governing: _Governing, idle: Collection[str]) -> tuple[Cell, ...]:
    made, outcome, effects = design.run.family.topology.members[k], design.outcome, design.outcome.envelope
    option = design.sizes[made.group]
    value, combination = governing(outcome.utilisation, k)
    rule = design.run.checks.rules[int(outcome.rule[k])]
    acting = combination > 0
    return (
        made.name,
        made.role,
        size_text(option.section.name, design.spec.plies),
        option.grade.name,
        float(design.run.truss.length[k]),
        *governing(effects.tension, k),
        *governing(effects.compression, k),
        *governing(effects.moment, k),
        *governing(effects.shear, k),
        value,
        combination,
        value <= LIMIT,
        rule.name if acting else None,
        rule.clause if acting else None,
        "yes" if made.name in idle else None,
    )


def size_text(name: str, plies: int) -> str:
    """Size with the number of plies where there are several.

    >>> size_text("2x6", 1), size_text("2x6", 2)
    ('2x6', '2 ply 2x6')
    """
    return name if plies == 1 else f"{plies} ply {name}"


def reactions_grid(design: Design, numbering: Numbering) -> Grid:
    """Support forces on the bearings, and the timber across the grain above them."""
    columns = (
        Column("Panel point"),
        Column("Held"),
        Column("Bearing length", "size"),
        Column("Down", "force"),
        COMBINATION,
        Column("Uplift", "force"),
        COMBINATION,
        Column("Sideways", "force"),
        COMBINATION,
        Column("Utilisation", "ratio"),
        COMBINATION,
        Column("Result", "result"),
        Column("Rule"),
    )
    run, found, governing = design.run, design.outcome, _Governing(design, numbering)
    rows = []
    for k, support in enumerate(run.family.topology.supports):
        value, combination = governing(found.bearing, k)
        rows.append(
            (
                run.family.topology.nodes[support.node],
                "down + sideways" if support.horizontal else "down",
                float(run.bearing_lengths[k]),
                *governing(found.reactions.down, k),
                *governing(found.reactions.uplift, k),
                *governing(found.reactions.horizontal, k),
                value,
                combination,
                value <= LIMIT,
                "bottom chord across the grain",
            )
        )
    return Grid("Reactions and bearings", columns, tuple(rows))


def deflections_grid(design: Design, numbering: Numbering) -> Grid:
    """Deflection nearest to its limit at every place, up and right positive; below, the largest of every kind without
    a limit."""
    columns = (
        Column("Place"),
        Column("Direction"),
        Column("Deflection", "deflection"),
        Column("Limit", "deflection"),
        Column("Share of limit", "ratio"),
        COMBINATION,
        Column("Result", "result"),
        Column("Limit and loads"),
    )
    found, number = design.outcome.deflection, numbering.combinations_of(design)
    rows = tuple(
        (
            place_text(p),
            p.direction,
            float(found.value[k]),
            float(found.limit[k]) if found.limit[k] < math.inf else None,
            float(found.ratio[k]),
            _numbered(number, int(found.combination[k])),
            bool(found.ratio[k] <= LIMIT),
            _under(design, found.about(k), int(found.combination[k])),
        )
        for k, p in enumerate(found.places)
    )
    others = tuple(
        (
            place_text(f.place),
            f.place.direction,
            f.value,
            None,
            None,
            _numbered(number, f.combination),
            None,
            _under(design, f.about, f.combination),
        )
        for f in unlimited(design.run)
    )
    return Grid("Deflections", columns, (*rows, *others))


def place_text(place: Place) -> str:
    """Where a deflection is taken.

    >>> place_text(Place(name="top 1", kind="member", number=0, direction="vertical"))
    'mid top 1'
    """
    return place.name if place.kind == "node" else f"mid {place.name}"


def _numbered(number: Sequence[int], combination: int) -> int:
    return number[combination] if combination >= 0 else 0


def _under(design: Design, about: str, combination: int) -> str:
    """Kind of a deflection, its limit, and the loads of its combination: "final w_fin, l/250: G + S"."""
    if combination < 0:
        return about
    _, _, loads = design.combination(combination).removeprefix("deflection, ").partition(": ")
    return f"{about}: {loads}"


def loading_grid(design: Design, numbering: Numbering) -> Grid:
    """One row per load case: range of its pressures and its whole force on the truss."""
    columns = (
        Column("Case", "count"),
        Column("Load case"),
        Column("Action"),
        Column("Least", "pressure"),
        Column("Most", "pressure"),
        Column("Total down", "force"),
        Column("Total right", "force"),
        Column("How it acts"),
        Column("Clause"),
    )
    cases = design.run.cases
    right, down = _totals(design, cases)
    rows = sorted(
        (
            numbering.cases[head.name],
            head.name,
            head.action,
            *_range(head),
            float(down[k]),
            float(right[k]),
            _how(head, design),
            head.values[-1].clause if head.values else "job",  # the last value is the load itself
        )
        for k, head in enumerate(cases.heads)
    )
    return Grid("Loading", columns, tuple(rows))


def _totals(design: Design, cases: LoadCases) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Resultant of every case, to the right and down (c,) [N]; without loads straight onto a support."""
    total = np.einsum("csx,s->cx", cases.q, cases.x1 - cases.x0) + cases.nodal.sum(axis=-2)
    for p in cases.points:
        total[p.case] += (float(p.fx), float(p.fy))
    total = np.round(total, 6) + 0.0  # round-off is no force
    return total[:, 0], 0.0 - total[:, 1]


def _pressures(head: ActionCase) -> list[float]:
    return [float(load.pressure) for load in head.loads if load.surface != "self-weight"]


def _range(head: ActionCase) -> tuple[float | None, float | None]:
    """Least and greatest pressure of a case, none where it has none (self-weight, point loads)."""
    pressures = _pressures(head)
    return (min(pressures), max(pressures)) if pressures else (None, None)


def _how(head: ActionCase, design: Design) -> str:
    if not head.loads:
        notes = [p.note for p in design.spec.loads.points if p.action == head.action and p.note]
        return "point loads" + (f": {', '.join(notes)}" if notes else "")
    if head.loads[0].surface == "self-weight":
        return "down, per length of member"
    return "; ".join(dict.fromkeys(ACTS[load.kind] for load in head.loads))


def named_combinations_grid(design: Design, numbering: Numbering) -> Grid:
    """The combinations that the other grids of the truss name by number."""
    outcome, combinations = design.outcome, design.run.combinations
    effects, reactions = outcome.envelope, outcome.reactions
    peaks = [effects.tension, effects.compression, effects.moment, effects.shear, outcome.utilisation, outcome.bearing]
    peaks += [reactions.down, reactions.uplift, reactions.horizontal]
    used = {int(n) for p in peaks for n in p.combination} | {int(n) for n in outcome.deflection.combination}
    used |= {f.combination for f in unlimited(design.run)}
    number = numbering.combinations_of(design)
    rows = tuple(
        (
            number[n],
            combinations.names[n].removeprefix("deflection, "),
            combinations.clauses[n],
            combinations.durations[n],
        )
        for n in sorted(used - {-1})
    )
    columns = (Column("Comb.", "combination"), Column("Combination"), Column("Clause"), Column("Load duration"))
    return Grid("Combinations named above", columns, rows)


def sizes_grid(designs: Collection[Design]) -> Grid:
    """Size and grade of each group of each truss with the worst utilisation in the group."""
    columns = (
        Column("Truss"),
        Column("Shape"),
        Column("Part"),
        Column("Size"),
        Column("Grade"),
        Column("Utilisation", "ratio"),
        Column("Member"),
        Column("Result", "result"),
    )
    return Grid("Sizes", columns, tuple(_group(d, g) for d in designs for g in GROUPS))


def _group(design: Design, group: str) -> tuple[Cell, ...]:
    rows = [k for k, g in enumerate(design.run.family.topology.groups) if g == group]
    values = design.outcome.utilisation.value[rows]
    worst = rows[int(values.argmax())]
    option = design.sizes[group]
    return (
        design.spec.mark,
        design.spec.shape,
        group,
        size_text(option.section.name, design.spec.plies),
        option.grade.name,
        float(values.max()),
        design.run.members.names[worst],
        bool(values.max() <= LIMIT),
    )
