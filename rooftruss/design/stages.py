"""The stages from dimensions and sizes to checks, for a batch of trusses of one layout.

A batch holds trusses that differ in numbers only: many spans under one roof standard, or many candidate sizes of one
truss. Everything that is a name (members, cases, combinations) is shared.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields, replace
from functools import cached_property
from pathlib import Path
from typing import cast

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.combinations import CaseHead, Combinations, combine
from rooftruss.analysis.effects import UnitEffects, demands_and_envelope, unit_effects
from rooftruss.analysis.envelope import Envelope
from rooftruss.analysis.frame import Solution, require_stable, solve, stiffness_matrix
from rooftruss.analysis.inspection import triangulation
from rooftruss.basis.grades import Grade, find_grade
from rooftruss.basis.job import Job, PointLoad, Restraint, TrussSpec
from rooftruss.basis.schemes import Scheme, load_scheme
from rooftruss.basis.sections import Section, find_section
from rooftruss.basis.tables import read_table
from rooftruss.errors import JobError, UnstableTrussError
from rooftruss.loads.actions import (
    AreaLoads,
    PlacedPoint,
    action_cases,
    area_loads,
    cases_on,
    position_from_centre,
    roof_of,
    walked_stops,
)
from rooftruss.loads.cases import LoadCases, member_at
from rooftruss.loads.gable import flattest_pitch, gable_fault
from rooftruss.loads.own import own_cases
from rooftruss.loads.roof import ActionCase
from rooftruss.shapes.custom_layout import CustomLayout
from rooftruss.shapes.forming import (
    AnyLayout,
    Dimensions,
    bearing_lengths,
    dimensions,
    form,
    layout_of,
    topology_of,
)
from rooftruss.shapes.truss import Topology, Truss
from rooftruss.timber.check import standard
from rooftruss.timber.restraint import restraint_lengths
from rooftruss.timber.terms import Checks, Demand, Durations, Members, TimberStandard
from rooftruss.units import GRAVITY, both

Array = NDArray[np.float64]
GROUPS = ("top chord", "bottom chord", "web")
BREADTH, DEPTH = "breadth of a ply", "depth of the section"  # beside the properties of a timber standard


@dataclass(frozen=True, slots=True)
class Option:
    """One size and grade that a group may be made of."""

    section: Section
    grade: Grade


@dataclass(frozen=True, kw_only=True)
class Family:
    """Trusses that share every name: layout, load cases, scheme, timber standard and settings."""

    job: Job
    spec: TrussSpec  # the first of them; settings that the whole family shares are read from it
    layout: AnyLayout
    size: Dimensions
    loads: AreaLoads
    points: tuple[PlacedPoint, ...]
    scheme: Scheme
    timber: TimberStandard

    @cached_property
    def topology(self) -> Topology:
        """Names and connectivity."""
        return topology_of(self.layout)


@dataclass(frozen=True, kw_only=True)
class Choice:
    """What the groups of the trusses of a batch are made of: options, and the number of the one taken (...,)."""

    options: Mapping[str, tuple[Option, ...]]
    index: Mapping[str, NDArray[np.intp]]

    def column(self, group: str, values: Sequence[float]) -> Array:
        """One value per option of a group, gathered over the batch (...,)."""
        return np.asarray(values, dtype=float)[self.index[group]]

    def one(self, number: int) -> "Choice":
        """The choice of truss `number` of a flat batch."""
        return Choice(options=self.options, index={g: np.asarray(i[number]) for g, i in self.index.items()})

    def part(self, rows: slice) -> "Choice":
        """The choices of a slice of a flat batch."""
        return Choice(options=self.options, index={g: i[rows] for g, i in self.index.items()})

    def taken(self, group: str) -> Option:
        """The option of an unbatched choice."""
        return self.options[group][int(self.index[group])]


@dataclass(frozen=True, kw_only=True)
class Run:
    """Everything the stages found for a batch (or one truss, without batch axes)."""

    family: Family
    choice: Choice
    truss: Truss
    members: Members
    cases: LoadCases
    combinations: Combinations
    stiffness_axial: Array
    stiffness_bending: Array
    solution: Solution
    effects: UnitEffects
    demand: Demand  # under the strength combinations
    envelope: Envelope
    checks: Checks
    reactions: Array  # (..., strength combination, support, 2) [N], on the truss, up positive
    bearing_lengths: Array  # (..., support) [m]
    bearing: Array  # utilisation (..., strength combination, support)

    @property
    def strength(self) -> list[int]:
        """Numbers of the strength combinations."""
        return [int(k) for k in np.flatnonzero(self.combinations.strength)]

    @cached_property
    def triangulated(self) -> bool:
        """Whether the truss (first of a batch) stands with every member pinned, as pin-jointed forces and zero-force
        inspection take it. The shapes of the catalogue do; a custom truss may need its stiff chords."""
        if not isinstance(self.family.layout, CustomLayout):
            return True
        part = triangulation(self.truss.topology)
        xy = _first(self.truss.xy, 2)[list(part.nodes)]
        ea = _first(self.stiffness_axial, 1)[list(part.members)]
        one = Truss(topology=part.topology, xy=xy, bearing=np.zeros(()))
        try:
            require_stable(part.topology, stiffness_matrix(one, ea, 0.0 * ea)[None])
        except UnstableTrussError:
            return False
        return True


def family_of(job: Job, specs: Sequence[TrussSpec]) -> Family:
    """Trusses of one layout as a family. Raises JobError where a key does not fit, naming it.

    The specs must agree in everything but numbers; `run.families` sorts them.
    """
    first = specs[0]
    layout = layout_of(first)
    scheme = load_scheme(job.scheme, Path(job.folder), job.site)
    size = dimensions(specs)
    return Family(
        job=job,
        spec=first,
        layout=layout,
        size=size,
        loads=area_loads([s.loads for s in specs]),
        points=_placed(layout, size, specs),
        scheme=scheme,
        timber=standard(scheme.timber_in_force(job.scheme_options), {**job.site, **first.timber.options}),
    )


def unbatched(family: Family) -> Family:
    """A family of one truss without its batch axis."""

    def bare(record: object) -> dict[str, Array]:
        return {f: np.asarray(getattr(record, f))[0] for f in type(record).__dataclass_fields__}  # type: ignore[attr-defined]

    points = tuple(replace(p, x=p.x[0], force=p.force[0]) for p in family.points)
    return replace(family, size=Dimensions(**bare(family.size)), loads=AreaLoads(**bare(family.loads)), points=points)


def _placed(layout: AnyLayout, size: Dimensions, specs: Sequence[TrussSpec]) -> tuple[PlacedPoint, ...]:
    """Point loads, those of the job's own cases among them, on the chord members below or above them."""
    given = [_points_of(spec) for spec in specs]
    if not given[0]:
        return ()
    line = form(replace(layout, raised_heel=False), size, 0.0, 0.0).one(0)
    out = []
    for k, (case, point) in enumerate(given[0]):
        x = np.array([position_from_centre(own[k][1], s.bearing) for own, s in zip(given, specs, strict=True)])
        member = member_at(line, point.chord, float(x[0]))
        if member is None:
            place = f"[[loads.case]] {case!r} points" if case else "[[loads.point]]"
            raise JobError(
                f"{place} position: {both(point.position, 'length')} is outside the {point.chord} chord; "
                "measure from the outside of the left bearing"
            )
        force = np.array([own[k][1].force for own in given])
        out.append(PlacedPoint(action=point.action, note=point.note, case=case, member=member, x=x, force=force))
    return tuple(out)


def _points_of(spec: TrussSpec) -> list[tuple[str, PointLoad]]:
    """(name of its case or "", point load) of every point load of a truss."""
    return [*(("", p) for p in spec.loads.points), *((c.name, p) for c in spec.loads.cases for p in c.points)]


def options_of(spec: TrussSpec) -> dict[str, tuple[Option, ...]]:
    """Allowed sizes and grades of each group of a truss, in the order given. Raises JobError for an unknown name."""
    own = {grade.name: grade for grade in spec.timber.own_grades}
    return {
        group: tuple(Option(find_section(s), own.get(g) or find_grade(g)) for s in timber.sizes for g in timber.grades)
        for group, timber in spec.timber.groups.items()
    }


def run(family: Family, choice: Choice) -> Run:
    """All stages for a batch: geometry, cases, combinations, effects, extremes, checks."""
    depth = {g: choice.column(g, [o.section.depth for o in choice.options[g]]) for g in GROUPS}
    truss = form(family.layout, family.size, depth["top chord"], depth["bottom chord"])
    members = _members(family, choice, truss)
    area = members.breadth * members.depth * members.plies
    weight = area * members.properties["density"] * GRAVITY
    cases = _cases(family, truss, weight)
    options = {**family.job.scheme_options, **dict(family.spec.loads.scheme_options)}
    combinations = combine(case_heads(cases), family.scheme, options)
    modulus = members.properties["E"]
    ea, ei = modulus * area, modulus * area * members.depth**2 / 12
    if isinstance(family.layout, CustomLayout):
        require_stable(truss.topology, _first(stiffness_matrix(truss, ea, ei), 2)[None])
    solution = solve(truss, ea, ei, cases)
    effects = unit_effects(truss, cases, solution)
    strength = np.flatnonzero(combinations.strength)
    factors = combinations.factors[strength]
    demands, envelope = demands_and_envelope(effects, factors)
    demand = Demand(**{f.name: getattr(demands, f.name) for f in fields(demands)})
    durations = durations_of(combinations)
    reactions = _combined_reactions(factors, solution.reactions)
    bearing = bearing_lengths(family.layout, truss)
    if not isinstance(family.layout, CustomLayout) and family.layout.raised_heel:
        # the heel post stands on the bottom chord: where it is narrower than the bearing, it presses harder
        bearing = np.minimum(bearing, depth["web"][..., None])
    return Run(
        family=family,
        choice=choice,
        truss=truss,
        members=members,
        cases=cases,
        combinations=combinations,
        stiffness_axial=ea,
        stiffness_bending=ei,
        solution=solution,
        effects=effects,
        demand=demand,
        envelope=envelope,
        checks=family.timber.check(members, demand, durations),
        reactions=reactions,
        bearing_lengths=bearing,
        bearing=family.timber.bearing(
            np.maximum(reactions[..., 1], 0.0),
            take_members(members, bearing_members(family.topology)),
            bearing,
            durations,
        ),
    )


def _cases(family: Family, truss: Truss, weight: Array) -> LoadCases:
    """Cases of the load standard and of the job on the members; weight (..., m) is the self-weight [N/m]."""
    standard_name, size, roof, fault = family.scheme.load_standard, family.size, roof_of(family.size), ""
    if isinstance(family.layout, CustomLayout):
        one = Truss(topology=truss.topology, xy=_first(truss.xy, 2), bearing=_first(truss.bearing, 0))
        bare = type(roof)(**{f.name: _first(np.asarray(getattr(roof, f.name)), 0) for f in fields(roof)})
        fault = gable_fault(one, bare)
        roof = replace(roof, pitch=np.minimum(roof.pitch, flattest_pitch(one))) if fault else roof
    heads: list[ActionCase] = [
        *action_cases(standard_name, roof, family.loads, family.job.site, truss, fault=fault),
        *own_cases(truss, family.spec.loads.cases, size.bearing, size.spacing),
    ]
    walked = walked_stops(truss, family.loads, standard_name)
    return cases_on(truss, heads, size.spacing, weight, family.points, walked)


def _first(array: Array, own: int) -> Array:
    """The first of a batch; `own` axes of the array are its own."""
    return np.asarray(array.reshape(-1, *array.shape[array.ndim - own :])[0])


def combinations_of(job: Job, spec: TrussSpec) -> Combinations:
    """The combinations of one truss; its sizes do not matter for them."""
    options = options_of(spec)
    first = Choice(options=options, index={g: np.array(0) for g in GROUPS})
    return run(unbatched(family_of(job, [spec])), first).combinations


def case_heads(cases: LoadCases) -> list[CaseHead]:
    """What combinations need to know of the cases."""
    return [CaseHead(name=h.name, short=h.short, action=h.action, pattern=h.pattern) for h in cases.heads]


def durations_of(combinations: Combinations) -> Durations:
    """Load durations of the strength combinations."""
    strength = np.flatnonzero(combinations.strength)
    return Durations(
        names=tuple(combinations.durations[k] for k in strength), time_effect=combinations.time_effects[strength]
    )


def _combined_reactions(factors: Array, unit: Array) -> Array:
    """Support forces (..., k, support, 2) under the combinations `factors` (k, c) of those of each case."""
    flat = unit.reshape(*unit.shape[:-2], -1)
    return np.asarray(np.matmul(factors, flat)).reshape(*unit.shape[:-3], factors.shape[0], *unit.shape[-2:])


def bearing_members(made: Topology) -> list[int]:
    """The member that rests on each support: the bottom chord there, else any member that ends there."""
    out = []
    for support in made.supports:
        here = [k for k, m in enumerate(made.members) if support.node in (m.start, m.end)]
        out.append(next((k for k in here if made.members[k].role == "bottom chord"), here[0]))
    return out


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


def _members(family: Family, choice: Choice, truss: Truss) -> Members:
    """Sizes, restraint and timber properties of every member (..., m)."""
    made = family.topology
    batch = np.broadcast_shapes(truss.length.shape[:-1], *(i.shape for i in choice.index.values()))
    restraints = [family.spec.timber.groups[g].restraint for g in made.groups]
    across = restraint_lengths(truss.length, made.roles, restraints)
    per_length = [float(cast(float, read_table("timber/effective_length").where(role=r)["factor"])) for r in made.roles]
    values = _spread(made, choice, batch, {g: [_numbers(family, o) for o in choice.options[g]] for g in GROUPS})
    shape = (*np.broadcast_shapes(batch, np.shape(family.size.plies)), len(made.members))
    return Members(
        names=made.names,
        roles=made.roles,
        breadth=values.pop(BREADTH),
        depth=values.pop(DEPTH),
        plies=np.broadcast_to(np.asarray(family.size.plies)[..., None], shape),
        length=truss.length,
        le_strong=truss.length * np.array(per_length),
        le_weak=across.le_weak,
        lu_positive=across.lu_positive,
        lu_negative=across.lu_negative,
        load_sharing=np.array([load_sharing(family, r, x) for r, x in zip(made.roles, restraints, strict=True)]),
        properties=values,
    )


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
