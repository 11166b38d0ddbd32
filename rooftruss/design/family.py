"""A family of trusses that share every name, and what their groups may be made of.

A batch holds trusses that differ in numbers only: many spans under one roof standard, or many candidate sizes of one
truss. Everything that is a name (members, cases, combinations) is shared.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.grades import Grade, find_grade
from rooftruss.basis.job import Job, PointLoad, TrussSpec
from rooftruss.basis.schemes import Scheme, load_scheme
from rooftruss.basis.sections import Section, find_section
from rooftruss.errors import JobError
from rooftruss.loads.actions import (
    AreaLoads,
    PlacedPoint,
    area_loads,
    position_from_centre,
)
from rooftruss.loads.cases import member_at
from rooftruss.shapes.forming import (
    AnyLayout,
    Dimensions,
    dimensions,
    form,
    layout_of,
    topology_of,
)
from rooftruss.shapes.truss import Topology
from rooftruss.timber.check import standard
from rooftruss.timber.terms import TimberStandard
from rooftruss.units import both

Array = NDArray[np.float64]
GROUPS = ("top chord", "bottom chord", "web")


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
                f"{place} position: {both(point.position, 'length', specs[0].units)} is outside the {point.chord} "
                "chord; measure from the outside of the left bearing"
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
