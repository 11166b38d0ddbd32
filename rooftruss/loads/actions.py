"""All actions on a truss: the registry of load standards, and the load cases of a batch on its members."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import LoadSpec, PointLoad
from rooftruss.errors import JobError, nearest
from rooftruss.loads import imposed, snow_asce7, wind_asce7
from rooftruss.loads.cases import ChordPoint, LoadCases, lay_on
from rooftruss.loads.dead import dead_cases
from rooftruss.loads.roof import ActionCase, Roof, Site
from rooftruss.shapes.forming import Dimensions
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class AreaLoads:
    """Area loads of a batch, arrays (...,) [Pa]; see basis.job.LoadSpec."""

    roof_dead: Array
    roof_dead_least: Array
    ceiling_dead: Array
    ceiling_dead_least: Array
    roof_live: Array
    ceiling_live: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedPoint:
    """Point loads of a batch that stand on the same member: what the load is, and where in each truss."""

    action: str
    note: str
    member: int
    x: Array  # from the left bearing centre [m]
    force: Array  # downwards [N]


Variable = Callable[[Roof, AreaLoads, Site], list[ActionCase]]


def _asce7(edition: str) -> Variable:
    def cases(roof: Roof, loads: AreaLoads, site: Site) -> list[ActionCase]:
        return [
            *imposed.ceiling_live_cases(loads.ceiling_live),
            *imposed.roof_live_cases(roof, loads.roof_live),
            *snow_asce7.snow_cases(roof, site, edition),
            *wind_asce7.wind_cases(roof, site, edition),
        ]

    return cases


STANDARDS: Mapping[str, Variable] = {"ASCE 7-16": _asce7("7-16"), "ASCE 7-22": _asce7("7-22")}


def area_loads(specs: Sequence[LoadSpec]) -> AreaLoads:
    """Area loads of a list of trusses as arrays (truss,)."""
    return AreaLoads(**{f.name: np.array([getattr(s, f.name) for s in specs], dtype=float) for f in fields(AreaLoads)})


def roof_of(size: Dimensions) -> Roof:
    """The roof over a batch of trusses."""
    return Roof(
        pitch=size.pitch,
        span=size.span,
        bearing_span=size.bearing_span,
        overhang=size.tail,
        rise=size.pitch * size.bearing_span / 2,
        spacing=size.spacing,
    )


def action_cases(standard: str, roof: Roof, loads: AreaLoads, site: Site) -> list[ActionCase]:
    """Every load case of one load standard: dead, then the variable actions in the standard's order.

    Raises JobError for an unknown standard, OutOfScopeError for what the standard does not cover.
    """
    if standard not in STANDARDS:
        raise JobError(f"load standard {standard!r} is unknown; {nearest(standard, STANDARDS)}")
    dead = dead_cases(loads.roof_dead, loads.roof_dead_least, loads.ceiling_dead, loads.ceiling_dead_least)
    return [*dead, *STANDARDS[standard](roof, loads, site)]


def _point_cases(points: Sequence[PlacedPoint]) -> list[ActionCase]:
    """One case for the point loads of each action; of dead load they count where it adds, not where it resists."""
    actions = sorted({p.action for p in points}, key=["D", "L", "Lr", "S", "W"].index)
    return [
        ActionCase(
            name=f"point loads, {action}",
            short="points",
            action=action,
            pattern="most" if action == "D" else "with",
            loads=(),
        )
        for action in actions
    ]


def cases_on(
    truss: Truss, heads: Sequence[ActionCase], spacing: Array, self_weight: Array, points: Sequence[PlacedPoint]
) -> LoadCases:
    """The cases on the members; point loads make a case of their own for each action."""
    own = _point_cases(points)
    place = {case.action: len(heads) + k for k, case in enumerate(own)}
    on_chords = [ChordPoint(case=place[p.action], member=p.member, x=p.x, force=p.force) for p in points]
    return lay_on(truss, [*heads, *own], spacing, self_weight, on_chords)


def position_from_centre(point: PointLoad, bearing: float) -> float:
    """Place of a point load from the left bearing centre [m]; the job file measures from the outside of the bearing."""
    return point.position - bearing / 2
