"""What every timber standard takes and gives: the words that all of them share.

Arrays carry leading batch axes `...`; k counts combinations, m members, s bearings.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.envelope import Peak
from rooftruss.basis.grades import Grade
from rooftruss.basis.sections import Section

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Members:
    """Members of one topology, arrays (..., m) [m].

    lu_positive is the unsupported length of the edge that a positive (sagging) moment compresses, the upper one;
    lu_negative that of the lower edge. An effective or unsupported length of 0 means held throughout.
    """

    names: tuple[str, ...]
    roles: tuple[str, ...]  # "top chord", "bottom chord", "web", "tail"
    breadth: Array  # of one ply
    depth: Array
    plies: Array
    length: Array
    le_strong: Array  # effective length in the plane of the truss
    le_weak: Array  # across it
    lu_positive: Array
    lu_negative: Array
    load_sharing: Flags  # conditions of the standard for repetitive members are met
    properties: Mapping[str, Array]  # what TimberStandard.properties returned, stacked


@dataclass(frozen=True, slots=True, kw_only=True)
class Demand:
    """Largest effects in each member under each combination, arrays (..., k, m), none negative [N, N m].

    The largest axial force and the largest moment of a member are taken as acting in one place (safe side).
    tension_least is the smallest tension along the member, the only part that may relieve bending;
    None means no relief is taken.
    """

    tension: Array
    compression: Array
    moment_positive: Array
    moment_negative: Array
    shear: Array
    tension_least: Array | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Durations:
    """Duration of each strength combination (k,): its shortest load, and the time effect factor of the scheme."""

    names: tuple[str, ...]
    time_effect: Array  # NaN where the scheme has none


@dataclass(frozen=True, slots=True, kw_only=True)
class Bays:
    """Members as columns in the plane of the truss: lengths (..., m) [m], and what runs through over panel points."""

    length: Array  # from panel point to panel point
    roles: tuple[str, ...]
    runs: tuple[tuple[int, ...], ...]  # members without a hinge between them, each run from the left, tails included
    loaded: Flags  # (m,) dead load acts between the panel points


@dataclass(frozen=True, slots=True, kw_only=True)
class Simplified:
    """A simplified analysis that a standard allows: what it does to moments, and to which trusses it is kept."""

    clause: str
    support_moments: float  # moments over inner supports of chords are taken this many times
    height_over_span: float  # least height of the truss
    height_over_depth: float  # least height over the depth of the deepest chord


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """One requirement of a standard."""

    name: str
    clause: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Checks:
    """Of each member the largest utilisation, its combination (-1 where nothing acts) and its rule.

    utilisation (..., k, m) under every combination; None where it was not kept.
    """

    rules: tuple[Rule, ...]
    utilisation: Array | None
    governing: Peak  # (..., m)
    rule: NDArray[np.int8]  # (..., m) number among `rules`


@dataclass(frozen=True, slots=True, kw_only=True)
class Creep:
    """Growth of the deflection under lasting load: final = (1 + coefficient) times the immediate one."""

    coefficient: float
    clause: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class DeflectionKind:
    """One deflection that a standard looks at, and the kind of service combination it is taken under."""

    name: str  # "final"
    symbol: str  # as the standard writes it, "w_fin"
    combinations: str  # "characteristic"


@dataclass(frozen=True, slots=True, kw_only=True)
class DeflectionLimit:
    """The limit of one kind of deflection, as a share of a length."""

    ratio: float  # length over the largest deflection [-]; NaN: there is none
    symbol: str  # what the source limits, "w_net,fin"
    source: str  # of the limit; "" where there is none

    @property
    def limits(self) -> bool:
        """Whether there is a limit."""
        return self.ratio == self.ratio


@dataclass(frozen=True, slots=True, kw_only=True)
class Deflected:
    """How far one place of an unbatched truss moves under one service combination, by its cases (c,)."""

    kind: DeflectionKind
    clause: str  # of the combination
    cases: tuple[str, ...]
    actions: tuple[str, ...]
    immediate: Array  # under each case, unfactored [m], up and right positive
    factors: Array  # of the combination; 0 for a case that does not act
    lasting: Mapping[str, float]  # share of each action that lasts, from the scheme
    length: float  # l of the limit [m]; NaN for sideways movement
    limit: float  # largest movement [m]; infinite where there is none
    rule: DeflectionLimit  # what the limit follows from; of no meaning for sideways movement


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One line of an explained check."""

    symbol: str  # as the standard writes it
    value: float  # SI
    kind: str  # key of units.US
    clause: str
    text: str


class TimberStandard(Protocol):
    """One edition and method of a timber standard with the service conditions of the job."""

    @property
    def name(self) -> str:
        """Name in the register, "NDS 2018 ASD"."""

    @property
    def notes(self) -> tuple[str, ...]:
        """Choices and limits of this standard that belong among the printed assumptions."""

    @property
    def simplified(self) -> Simplified | None:
        """The simplified analysis that the job asks for; None: forces are those of the frame."""

    def truss_notes(self, length: float) -> tuple[str, ...]:
        """What the standard asks of a truss of `length` over all [m] that is not checked, for the assumptions."""

    def effective_lengths(self, bays: Bays) -> Array:
        """Effective lengths (..., m) [m] of members in compression in the plane of the truss."""

    def properties(self, grade: Grade, section: Section) -> dict[str, float]:
        """Everything `check` needs of a grade in a size, SI; always with E (mean, for analysis) and density [kg/m3]."""

    def check(self, members: Members, demand: Demand, durations: Durations) -> Checks:
        """Worst utilisation of every member under every combination."""

    def bearing(self, reaction: Array, members: Members, length: Array, durations: Durations) -> Array:
        """Utilisation (..., k, s) across the grain under reactions (..., k, s) [N, upwards on the truss].

        `members` are the chords (..., s) that rest on each support, `length` (..., s) the bearing lengths [m].
        """

    def explain(
        self, members: Members, demand: Demand, durations: Durations, member: int, combination: int
    ) -> tuple[Step, ...]:
        """The check of one member of an unbatched truss under one combination, line by line."""

    def explain_bearing(
        self,
        reaction: Array,
        members: Members,
        length: Array,
        durations: Durations,
        support: int,
        combination: int,
    ) -> tuple[Step, ...]:
        """The bearing check of one support of an unbatched truss, line by line."""

    def shares_load(self, *, role: str, sheathed: bool, quantity: int, spacing: float) -> bool:
        """Whether a member meets the conditions for repetitive members; spacing of the trusses [m]."""

    def creep(self) -> Creep:
        """Creep of the deflection under lasting load in the service conditions of the job."""

    @property
    def deflection_kinds(self) -> tuple[DeflectionKind, ...]:
        """The deflections that the standard looks at."""

    def service_factors(
        self, factors: Array, *, actions: tuple[str, ...], kinds: tuple[str, ...], lasting: Mapping[str, float]
    ) -> Array:
        """Factors (k, c) of `kinds` of deflection (k,) on cases of `actions` (c,), with creep, from the factors of the
        service combinations.

        lasting: share of each action that lasts, from the scheme; none where the timber standard knows it itself.
        """

    def deflection_limit(self, ceiling: str, kind: str) -> DeflectionLimit:
        """Limit of a kind of deflection. Raises JobError for a ceiling or kind that the standard does not know."""

    def explain_deflection(self, moved: Deflected) -> tuple[Step, ...]:
        """A deflection line by line; the last step is its share of the limit, or itself where there is none."""
