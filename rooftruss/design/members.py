"""The members of a batch as the timber standards see them: sizes, lengths, restraint, properties."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from functools import cache

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import Restraint
from rooftruss.design.family import GROUPS, Choice, Family, Option
from rooftruss.shapes.truss import Topology, Truss
from rooftruss.timber.restraint import restraint_lengths
from rooftruss.timber.terms import Bays, Members

Array = NDArray[np.float64]
BREADTH, DEPTH = "breadth of a ply", "depth of the section"  # beside the properties of a timber standard


def members_of(family: Family, choice: Choice, truss: Truss) -> Members:
    """Sizes, restraint and timber properties of every member (..., m)."""
    made = family.topology
    batch = np.broadcast_shapes(truss.length.shape[:-1], *(i.shape for i in choice.index.values()))
    restraints = [family.spec.timber.groups[g].restraint for g in made.groups]
    across = restraint_lengths(truss.length, made.roles, restraints)
    values = _spread(made, choice, batch, {g: [_numbers(family, o) for o in choice.options[g]] for g in GROUPS})
    shape = (*np.broadcast_shapes(batch, np.shape(family.size.plies)), len(made.members))
    return Members(
        names=made.names,
        roles=made.roles,
        breadth=values.pop(BREADTH),
        depth=values.pop(DEPTH),
        plies=np.broadcast_to(np.asarray(family.size.plies)[..., None], shape),
        length=truss.length,
        le_strong=family.timber.effective_lengths(_bays(family, truss)),
        le_weak=across.le_weak,
        lu_positive=across.lu_positive,
        lu_negative=across.lu_negative,
        load_sharing=np.array([load_sharing(family, r, x) for r, x in zip(made.roles, restraints, strict=True)]),
        properties=values,
    )


def take_members(members: Members, rows: Sequence[int]) -> Members:
    """Some of the members, in the order asked for; a member may be taken twice."""
    rows = list(rows)
    arrays = (
        "breadth",
        "depth",
        "plies",
        "length",
        "le_strong",
        "le_weak",
        "lu_positive",
        "lu_negative",
        "load_sharing",
    )
    return replace(
        members,
        names=tuple(members.names[k] for k in rows),
        roles=tuple(members.roles[k] for k in rows),
        properties={name: values[..., rows] for name, values in members.properties.items()},
        **{name: np.asarray(getattr(members, name))[..., rows] for name in arrays},
    )


def _bays(family: Family, truss: Truss) -> Bays:
    """Members as columns in the plane. Dead load tells which chords carry load between the panel points."""
    made, loads = family.topology, family.loads
    ceiling, roof = bool(np.all(loads.ceiling_dead > 0)), bool(np.all(loads.roof_dead > 0))
    loaded = [m.surface != "" and (ceiling if m.surface == "ceiling" else roof) for m in made.members]
    return Bays(length=truss.length, roles=made.roles, runs=runs_of(made), loaded=np.array(loaded))


@cache
def runs_of(made: Topology) -> tuple[tuple[int, ...], ...]:
    """Members that run through over their common panel point without a hinge, each run from the left."""
    stiff: dict[int, list[int]] = {}
    for k, m in enumerate(made.members):
        for node, pinned in ((m.start, m.pinned_start), (m.end, m.pinned_end)):
            if not pinned:
                stiff.setdefault(node, []).append(k)
    beside: dict[int, list[int]] = {k: [] for k in range(len(made.members))}
    for pair in stiff.values():
        if len(pair) == 2:
            beside[pair[0]].append(pair[1])
            beside[pair[1]].append(pair[0])
    out: list[tuple[int, ...]] = []
    seen: set[int] = set()
    for first in sorted(beside, key=lambda k: made.members[k].role != "tail"):  # a tail is an end of its run
        if first in seen or len(beside[first]) > 1:
            continue
        run = [first]
        while further := [k for k in beside[run[-1]] if k not in run]:
            run.append(further[0])
        seen.update(run)
        out.append(tuple(run))
    return tuple(out)


def load_sharing(family: Family, role: str, restraint: Restraint) -> bool:
    """Whether a member meets the timber standard's conditions for sharing load with its neighbours."""
    spec = family.spec
    return family.timber.shares_load(
        role=role,
        sheathed=restraint.kind == "sheathed",
        quantity=spec.quantity,
        spacing=float(np.max(family.size.spacing)),
    )


def _numbers(family: Family, option: Option) -> dict[str, float]:
    """Size of an option and its properties by the timber standard."""
    size = {BREADTH: option.section.breadth, DEPTH: option.section.depth}
    return {**size, **family.timber.properties(option.grade, option.section)}


def _spread(
    made: Topology, choice: Choice, batch: tuple[int, ...], numbers: Mapping[str, Sequence[Mapping[str, float]]]
) -> dict[str, Array]:
    """Numbers of the options taken, spread from the groups over the members: name -> (..., m)."""
    names = list(numbers["web"][0])
    out = np.empty((len(names), *batch, len(made.members)))
    for group in GROUPS:
        table = np.array([[kind[name] for kind in numbers[group]] for name in names])
        out[..., [g == group for g in made.groups]] = table[:, choice.index[group]][..., None]
    return dict(zip(names, out, strict=True))
