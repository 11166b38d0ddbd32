"""All actions on a truss: the registry of load standards, and the load cases of a batch on its members."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import LoadSpec, PointLoad
from rooftruss.errors import JobError, OutOfScopeError, nearest
from rooftruss.loads import imposed, imposed_en1991, snow_asce7, snow_en1991, wind_asce7, wind_en1991
from rooftruss.loads.attic import attic_cases
from rooftruss.loads.cases import ChordPoint, LoadCases, lay_on
from rooftruss.loads.dead import dead_cases
from rooftruss.loads.gable import Faults
from rooftruss.loads.roof import GABLE, MONOPITCH, ActionCase, Roof, Site
from rooftruss.loads.walked import BOTTOM, TOP, Stop, stops
from rooftruss.shapes.forming import Dimensions
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class AreaLoads:
    """Loads of a batch that are one number a truss, arrays (...,) [Pa], walked loads [N]; see basis.job.LoadSpec."""

    roof_dead: Array
    roof_dead_least: Array
    ceiling_dead: Array
    ceiling_dead_least: Array
    roof_live: Array
    ceiling_live: Array
    maintenance_load: Array
    ceiling_point_load: Array
    attic_storage_live: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedPoint:
    """Point loads of a batch that stand on the same member: what the load is, and where in each truss.

    case is the name of the job's own case it belongs to; "" joins all cases of the action.
    """

    action: str
    note: str
    case: str = ""
    member: int
    x: Array  # from the left bearing centre [m]
    force: Array  # downwards [N]


Variable = Callable[[Roof, AreaLoads, Site, Truss], list[ActionCase]]


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadStandard:
    """One edition of a load standard: its variable cases, and the forms of roof that some of them are covered on."""

    cases: Variable
    forms: tuple[str, ...]
    form_clause: str  # what lays loads on those forms
    walked: tuple[str, str]  # clauses of the point loads of a person on the roof, and on the ceiling
    walked_symbol: str  # of that load
    form_actions: tuple[str, ...] = ("S", "W")  # of the loads that depend on the form


def _asce7(edition: str) -> LoadStandard:
    def cases(roof: Roof, loads: AreaLoads, site: Site, truss: Truss) -> list[ActionCase]:
        storage = bool(np.any(loads.attic_storage_live))
        return [
            *(
                attic_cases(truss, loads.ceiling_live, loads.attic_storage_live)
                if storage
                else imposed.ceiling_live_cases(loads.ceiling_live)
            ),
            *imposed.roof_live_cases(roof, loads.roof_live),
            *snow_asce7.snow_cases(roof, site, edition),
            *wind_asce7.wind_cases(roof, site, edition),
        ]

    return LoadStandard(
        cases=cases,
        forms=(GABLE,),
        form_clause=f"ASCE {edition}, 7.6.1 and Fig. 27.3-1",
        walked=(f"ASCE {edition}, 4.4 and Table 4.3-1",) * 2,
        walked_symbol="P",
    )


def _en1991(roof: Roof, loads: AreaLoads, site: Site, truss: Truss) -> list[ActionCase]:
    height = site.get("building_height")
    if isinstance(height, float) and np.any(height < roof.rise):
        raise JobError(
            "[site] building_height is less than the rise of the roof; measure it from the ground to its highest point"
        )
    return [
        *imposed_en1991.loft_cases(loads.ceiling_live),
        *imposed_en1991.roof_live_cases(roof, loads.roof_live),
        *snow_en1991.snow_cases(roof, site),
        *wind_en1991.wind_cases(roof, site),
    ]


STANDARDS: Mapping[str, LoadStandard] = {
    "ASCE 7-16": _asce7("7-16"),
    "ASCE 7-22": _asce7("7-22"),
    "EN 1991": LoadStandard(
        cases=_en1991,
        forms=(GABLE, MONOPITCH),
        form_clause="EN 1991-1-3, 5.3.2, 5.3.3 and EN 1991-1-4, 7.2.4, 7.2.5",
        walked=(f"{imposed_en1991.CLAUSE}, Table 6.10", "EN 1991-1-1, 6.3.1.2, Table 6.2"),
        walked_symbol="Q_k",
        form_actions=("S", "W", "A"),
    ),
}
FORMED: Faults = {GABLE: ""}  # what keeps a truss of the catalogue from being a gable
FORM_WORDS = {GABLE: "symmetric gable", MONOPITCH: "monopitch"}


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


def action_cases(
    standard: str, roof: Roof, loads: AreaLoads, site: Site, truss: Truss, *, faults: Faults = FORMED
) -> list[ActionCase]:
    """Every load case of one load standard: dead, then the variable actions in the standard's order.

    faults says for each form what keeps the roof from it (loads.gable), "" if nothing does.
    Raises JobError for an unknown standard, OutOfScopeError for what the standard does not cover.
    """
    if standard not in STANDARDS:
        raise JobError(f"load standard {standard!r} is unknown; {nearest(standard, STANDARDS)}")
    chosen = STANDARDS[standard]
    dead = dead_cases(loads.roof_dead, loads.roof_dead_least, loads.ceiling_dead, loads.ceiling_dead_least)
    cases = [*dead, *chosen.cases(roof, loads, site, truss)]
    fault = _form_fault(chosen, faults)
    if fault and any(case.action in chosen.form_actions for case in cases):
        covered = " and ".join(FORM_WORDS[form] for form in chosen.forms)
        raise OutOfScopeError(
            f"{chosen.form_clause}: snow and wind are covered on {covered} roofs only, and here {fault}; make snow and "
            "wind of the job zero and give them as cases of its own ([[loads.case]])"
        )
    return cases


def _form_fault(standard: LoadStandard, faults: Faults) -> str:
    """What keeps a roof from every form that the standard covers; "" where it has one of them."""
    known = {form: fault for form, fault in faults.items() if form in standard.forms}
    if "" in known.values():
        return ""
    fault = next(iter(known.values()))
    had = next((FORM_WORDS[form] for form, other in faults.items() if not other), "")
    return f"the roof is a {had}: {fault}" if had else fault


def walked_stops(truss: Truss, loads: AreaLoads, standard: str) -> list[Stop]:
    """Places of the loads that are walked along the chords; each is an alternative of its action."""
    chosen = STANDARDS[standard]
    walks = (
        (TOP, loads.maintenance_load, "Lr", "person on roof"),
        (BOTTOM, loads.ceiling_point_load, "L", "load on ceiling"),
    )
    return [
        stop
        for (surfaces, force, action, what), clause in zip(walks, chosen.walked, strict=True)
        for stop in stops(truss, surfaces, force, action=action, what=what, symbol=chosen.walked_symbol, clause=clause)
    ]


def _point_cases(points: Sequence[PlacedPoint]) -> list[ActionCase]:
    """One case for the point loads of each action; of dead load they count where it adds, not where it resists."""
    actions = sorted({p.action for p in points if not p.case}, key=["D", "L", "Lr", "S", "W"].index)
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
    truss: Truss,
    heads: Sequence[ActionCase],
    spacing: Array,
    self_weight: Array,
    points: Sequence[PlacedPoint] = (),
    walked: Sequence[Stop] = (),
) -> LoadCases:
    """The cases on the members. Point loads of no case make one of their own for each action; so does every stop of a
    walked load. Raises JobError where two cases have one name.
    """
    joining = _point_cases(points)
    every = [*heads, *joining, *(stop.case for stop in walked)]
    place = _numbers(every)
    on_chords = [
        ChordPoint(case=place[p.case or f"point loads, {p.action}"], member=p.member, x=p.x, force=p.force)
        for p in points
    ]
    on_chords += [
        ChordPoint(case=place[s.case.name], member=s.member, x=s.x, force=s.force)
        for s in walked
        if s.member is not None
    ]
    made = lay_on(truss, every, spacing, self_weight, on_chords)
    nodal = made.nodal.copy()
    for stop in walked:
        if stop.node is not None:
            nodal[..., place[stop.case.name], stop.node, 1] -= stop.force
    return replace(made, nodal=nodal) if walked else made


def _numbers(heads: Sequence[ActionCase]) -> dict[str, int]:
    found: dict[str, int] = {}
    for number, head in enumerate(heads):
        if found.setdefault(head.name, number) != number:
            raise JobError(f"[[loads.case]] name: the load standard has a case {head.name!r} itself; take another name")
    return found


def position_from_centre(point: PointLoad, bearing: float) -> float:
    """Place of a point load from the left bearing centre [m]; the job file measures from the outside of the bearing."""
    return point.position - bearing / 2
