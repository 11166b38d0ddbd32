"""The stages from dimensions and sizes to checks, for a batch of trusses of one family."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.combinations import CaseHead, Combinations, combine
from rooftruss.analysis.effects import UnitEffects, unit_effects
from rooftruss.analysis.envelope import Envelope
from rooftruss.analysis.frame import Solution, require_stable, solve, stiffness_matrix
from rooftruss.analysis.inspection import triangulation
from rooftruss.analysis.simplified import simplified_solution
from rooftruss.basis.job import Job, TrussSpec
from rooftruss.design.checking import checked, demands
from rooftruss.design.family import GROUPS, Choice, Family, family_of, options_of, unbatched
from rooftruss.design.members import members_of, take_members
from rooftruss.design.profile import require_profile
from rooftruss.errors import OutOfScopeError, UnstableTrussError
from rooftruss.loads.actions import (
    FORMED,
    action_cases,
    cases_on,
    roof_of,
    walked_stops,
)
from rooftruss.loads.cases import LoadCases
from rooftruss.loads.gable import formed
from rooftruss.loads.own import own_cases
from rooftruss.loads.roof import ActionCase
from rooftruss.shapes.custom_layout import CustomLayout
from rooftruss.shapes.forming import (
    bearing_lengths,
    form,
)
from rooftruss.shapes.truss import Topology, Truss
from rooftruss.timber.terms import Checks, Demand, Durations, Members
from rooftruss.units import GRAVITY

Array = NDArray[np.float64]


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
    solution: Solution  # of the frame, which deflections are of
    forces: Solution  # what is checked: that of the frame, or of the simplified analysis of the timber standard
    effects: UnitEffects  # of `forces`
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
    def demand(self) -> Demand:
        """What the members have to resist under each strength combination."""
        return demands(self.effects, self.combinations.factors[self.strength])

    @cached_property
    def frame_effects(self) -> UnitEffects:
        """Internal forces of the frame, whichever analysis is checked."""
        return self.effects if self.forces is self.solution else unit_effects(self.truss, self.cases, self.solution)

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


def run(family: Family, choice: Choice) -> Run:
    """All stages for a batch: geometry, cases, combinations, effects, extremes, checks."""
    depth = {g: choice.column(g, [o.section.depth for o in choice.options[g]]) for g in GROUPS}
    truss = form(family.layout, family.size, depth["top chord"], depth["bottom chord"])
    members = members_of(family, choice, truss)
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
    forces = _simplified(family, truss, depth, (ea, ei), cases) or solution
    effects = unit_effects(truss, cases, forces)
    strength = np.flatnonzero(combinations.strength)
    factors = combinations.factors[strength]
    durations = durations_of(combinations)
    envelope, checks = checked(family.timber, members, effects, factors, durations)
    reactions = _combined_reactions(factors, forces.reactions)
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
        forces=forces,
        effects=effects,
        envelope=envelope,
        checks=checks,
        reactions=reactions,
        bearing_lengths=bearing,
        bearing=family.timber.bearing(
            np.maximum(reactions[..., 1], 0.0),
            take_members(members, bearing_members(family.topology)),
            bearing,
            durations,
        ),
    )


def _simplified(
    family: Family, truss: Truss, depth: dict[str, Array], stiffness: tuple[Array, Array], cases: LoadCases
) -> Solution | None:
    """Forces by the simplified analysis of the timber standard, where the job asks for it.

    Raises OutOfScopeError for a truss that it is not for; depth of each group [m], stiffness EA and EI.
    """
    rules = family.timber.simplified
    if rules is None:
        return None
    require_profile(family, truss, np.maximum(depth["top chord"], depth["bottom chord"]), rules)
    try:
        return simplified_solution(truss, *stiffness, cases, support_moments=rules.support_moments)
    except UnstableTrussError as error:
        raise OutOfScopeError(
            f"{rules.clause}(2): the simplified analysis is for trusses that stand with every joint pinned; "
            f'here {error}, or write [timber] truss_analysis = "frame"'
        ) from None


def _cases(family: Family, truss: Truss, weight: Array) -> LoadCases:
    """Cases of the load standard and of the job on the members; weight (..., m) is the self-weight [N/m]."""
    standard_name, size, roof, faults = family.scheme.load_standard, family.size, roof_of(family.size), FORMED
    if isinstance(family.layout, CustomLayout):
        one = Truss(topology=truss.topology, xy=_first(truss.xy, 2), bearing=_first(truss.bearing, 0))
        roof, faults = formed(roof, one)
    heads: list[ActionCase] = [
        *action_cases(standard_name, roof, family.loads, family.job.site, truss, faults=faults),
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
