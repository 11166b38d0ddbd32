"""Rules of EN 1995-1-1 for whole trusses: the simplified analysis of 5.4.3, and 9.2.1 on members and joints."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from typing import cast

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.tables import read_table
from rooftruss.timber.terms import Bays, Simplified

Array = NDArray[np.float64]
FRAME, SIMPLIFIED = ANALYSES = ("frame", "simplified")


@dataclass(frozen=True, slots=True, kw_only=True)
class TrussRules:
    """What 9.2.1 makes of the checks of a member: a factor on its compression, and what sums of ratios may reach."""

    compression: float = 1.0  # 9.2.1(5)
    axial: float = 1.0  # limit of eq. (6.1), (6.2) and (6.17); 9.2.1(6)
    combined: float = 1.0  # limit of eq. (6.19), (6.23) and (6.24); 9.2.1(1) and (6)

    lengths: str = "9.2.1(3) and practice"  # clause of the effective length in the plane

    @property
    def clause(self) -> str:
        """Clause of the limits."""
        return "9.2.1(1)" if self.axial == 1 else "9.2.1(6)"


def truss_rules(analysis: str, *, node_loaded: bool) -> TrussRules:
    """Rules for an analysis ("frame" or "simplified"); node_loaded: loads act mainly at the panel points.

    9.2.1(1) names eq. (6.19) and (6.20); it is kept for (6.23) and (6.24), which stand in their place for slender
    members. 9.2.1(6) names tension and compression; it is kept for their sums with bending as well (safe side).
    Eq. (6.35) keeps its limit of 1.

    >>> truss_rules("simplified", node_loaded=False)
    TrussRules(compression=1.1, axial=1.0, combined=1.0, lengths='9.2.1(4)')
    """
    simple = analysis == SIMPLIFIED
    limit = constant("node_loaded_simplified") if simple else constant("node_loaded")
    return TrussRules(
        compression=constant("compression") if simple else 1.0,
        axial=limit if simple and node_loaded else 1.0,
        combined=limit if node_loaded else 1.0,
        lengths="9.2.1(4)" if simple and not node_loaded else "9.2.1(3) and practice",
    )


def simplified_analysis() -> Simplified:
    """The simplified analysis and the trusses it is for; EN 1995-1-1, 5.4.3."""
    return Simplified(
        clause="EN 1995-1-1, 5.4.3",
        support_moments=constant("support_moments"),
        height_over_span=constant("height_over_span"),
        height_over_depth=constant("height_over_depth"),
    )


def joint_force(length: float) -> float:
    """F_r,d [N] that every joint of a truss of `length` over all [m] has to pass on; EN 1995-1-1, 9.2.1(9).

    >>> joint_force(9.0)
    1900.0
    """
    return constant("joint_force") + constant("joint_force_per_length") * length


def bay_lengths(bays: Array, *, moment_at_start: bool = False, moment_at_end: bool = False) -> tuple[Array, Array]:
    """Effective lengths in the plane in the bays (..., n) and at the inner panel points (..., n - 1) [m] of a chord.

    It runs through over n >= 2 `bays` (..., n) [m] with load between the panel points; EN 1995-1-1, 9.2.1(4), for the
    simplified analysis.

    moment_at_start, moment_at_end: a moment may act at that end, as from a tail. The bay next to the outer one then
    counts in full. That the outer bay need not be checked for buckling under such a moment is not made use of.

    >>> [x.round(2).tolist() for x in bay_lengths(np.array([2.2, 2.0, 2.0, 2.2]))]
    [[1.76, 1.2, 1.2, 1.76], [1.32, 1.2, 1.32]]
    """
    ratio = np.full(bays.shape[-1], constant("inner_bay"))
    ratio[[0, -1]] = constant("outer_bay")
    for end, beside in ((moment_at_start, 1), (moment_at_end, -2)):
        if end:
            ratio[beside] = constant("next_bay")
    return np.asarray(bays * ratio), np.asarray(constant("at_node") * np.maximum(bays[..., :-1], bays[..., 1:]))


def effective_lengths(bays: Bays, analysis: str, *, node_loaded: bool = False) -> Array:
    """Effective length (..., m) [m] of every member in the plane of the truss; EN 1995-1-1, 9.2.1(3) and (4).

    9.2.1(4) is for chords with load between the panel points: node_loaded says that there is none to speak of.

    A member is checked with its largest axial force and moment, in the bay or at a panel point: of the lengths there
    the largest counts.
    """
    out: Array = bays.length * np.array([_role_factor(role) for role in bays.roles])
    if analysis != SIMPLIFIED or node_loaded:
        return out
    for run in bays.runs:
        inner = [k for k in run if bays.roles[k] != "tail"]
        if len(inner) < 2 or not np.all(bays.loaded[inner]):
            continue
        tails = [bays.roles[k] == "tail" for k in (run[0], run[-1])]
        in_bay, at_node = bay_lengths(bays.length[..., inner], moment_at_start=tails[0], moment_at_end=tails[1])
        out[..., inner] = in_bay
        for bay, beside in ((inner[:-1], at_node), (inner[1:], at_node)):
            out[..., bay] = np.maximum(out[..., bay], beside)
    return out


def constant(name: str) -> float:
    """One number of tables/timber/truss_en1995 [-, N, N/m]."""
    return cast(float, read_table("timber/truss_en1995").rows[0][name])


@cache
def _role_factor(role: str) -> float:
    return cast(float, read_table("timber/effective_length_en1995").where(role=role)["factor"])


def notes(analysis: str, rules: TrussRules) -> Sequence[str]:
    """What the printed assumptions say of the analysis."""
    found: tuple[str, ...] = (
        "forces are those of the frame (EN 1995-1-1, 5.4.2); the effective length in the plane is the bay length, of "
        "members of one bay by 9.2.1(3), of chords that run through by practice, in the place of the distance between "
        "points of contraflexure (9.2.1(2))",
    )
    if analysis == SIMPLIFIED:
        less, more = 1 - constant("support_moments"), rules.compression - 1
        lengths = (
            "effective length in the plane by EN 1995-1-1, 9.2.1(4): the larger of that in the bay and at the panel "
            "points beside it; a tail's end moment counts as significant"
        )
        found = (
            "simplified analysis (EN 1995-1-1, 5.4.3): axial forces with pinned joints, chords as beams on the panel "
            f"points with moments there {100 * less:.0f} % less, compression {100 * more:.0f} % more in the checks "
            "(9.2.1(5)); reactions follow from it, deflections are those of the frame",
            "how far a bearing may reach and stand off the heel (5.4.3(1), lengths a_1 and a_2) is NOT checked: it is "
            "yours to see to",
            lengths,
        )
    if rules.combined < 1:
        found = (*found, f"loads act mainly at the panel points: ratios up to {rules.combined:g} ({rules.clause})")
    return (*found, "a small point load is checked like any other; 9.2.2(3) is not made use of")
