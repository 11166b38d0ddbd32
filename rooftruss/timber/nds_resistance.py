"""Factors and adjusted stresses of members by the NDS, for every distinct load duration at once.

Arrays are (..., m), or (..., d, m) where d counts distinct load duration or time effect factors: everything here is
worked out once per duration, not once per combination.
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from rooftruss.timber import nds_formulas as nds
from rooftruss.timber.nds_tables import effective_bending_length, sheathed_chord
from rooftruss.timber.terms import Array, Members


@dataclass(frozen=True, slots=True, kw_only=True)
class Stability:
    """Factors of one adjusted Emin for columns: F_cE1 (..., m), C_P and F_c (..., d, m) [Pa, -, Pa]."""

    F_cE1: Array
    C_P: Array
    F_c: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Lateral:
    """Lateral stability for one sign of the moment: R_B, F_bE, l_e (..., m); C_L, F_b (..., d, m) [-, Pa, m]."""

    l_e: Array
    R_B: Array
    F_bE: Array
    C_L: Array
    F_b: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Resistances:
    """Section values [m2, m3] and adjusted stresses [Pa] of members; inf is an Euler stress of a held member."""

    area: Array
    modulus: Array
    slenderness_strong: Array
    slenderness_weak: Array
    slenderness: Array  # the larger
    C_r: Array
    C_T: Array
    net_area: Array  # for tension
    F_t: Array  # per gross area: F_t' times net over gross area, so that T/A may stand against it
    F_v: Array
    F_b_star: Array  # all factors but C_L
    F_c_star: Array  # all factors but C_P
    F_cE2: Array
    plain: Stability  # without C_T: compression alone
    stiffened: Stability  # with C_T: compression and bending together; the same object where no member takes C_T
    positive: Lateral
    negative: Lateral


def resistances(members: Members, duration: Array, *, edition: str, buckling_stiffness: bool) -> Resistances:
    """Resistances of `members` (..., m) for `duration` factors (d,): C_D of ASD, lambda of LRFD; NDS Table 4.3.1.

    Members.properties hold the stresses with every factor that depends on neither duration nor length.
    """
    p, per_duration = members.properties, duration[:, None]
    weak, strong = members.le_weak / members.breadth, members.le_strong / members.depth
    C_r = np.where(members.load_sharing, p["C_r"], 1.0)
    F_b_star = _rows(p["Fb"] * C_r) * per_duration
    F_c_star = _rows(p["Fc"]) * per_duration
    C_T = _buckling_stiffness(members, edition) if buckling_stiffness else np.ones_like(strong)
    plain = _column(p["Emin"], strong, weak, F_c_star, p["column_c"])
    stiffened = _column(p["Emin"] * C_T, strong, weak, F_c_star, p["column_c"]) if np.any(C_T > 1) else plain
    breadth = members.breadth * members.plies
    net = p["net_section"]
    return Resistances(
        area=breadth * members.depth,
        net_area=breadth * members.depth * net,
        modulus=breadth * members.depth**2 / 6,
        slenderness_strong=strong,
        slenderness_weak=weak,
        slenderness=np.maximum(strong, weak),
        C_r=C_r,
        C_T=C_T,
        F_t=_rows(p["Ft"] * net) * per_duration,
        F_v=_rows(p["Fv"]) * per_duration,
        F_b_star=F_b_star,
        F_c_star=F_c_star,
        F_cE2=nds.euler_column_stress(p["Emin"], weak),
        plain=plain,
        stiffened=stiffened,
        positive=_lateral(members, members.lu_positive, F_b_star, edition),
        negative=_lateral(members, members.lu_negative, F_b_star, edition),
    )


def at_durations(r: Resistances, duration: NDArray[np.intp], batch: tuple[int, ...]) -> Resistances:
    """Resistances with one duration a member instead of all: number `duration` (..., m) of (..., d, m)."""

    def taken(values: Array) -> Array:
        every = np.broadcast_to(values, (*batch, *values.shape[-2:]))
        return np.take_along_axis(every, duration[..., None, :], -2)[..., 0, :]

    def column(s: Stability) -> Stability:
        return replace(s, C_P=taken(s.C_P), F_c=taken(s.F_c))

    def beam(s: Lateral) -> Lateral:
        return replace(s, C_L=taken(s.C_L), F_b=taken(s.F_b))

    return replace(
        r,
        **{name: taken(getattr(r, name)) for name in ("F_t", "F_v", "F_b_star", "F_c_star")},
        plain=column(r.plain),
        stiffened=column(r.stiffened),
        positive=beam(r.positive),
        negative=beam(r.negative),
    )


def _rows(values: Array) -> Array:
    """(..., m) -> (..., 1, m)."""
    return np.asarray(values)[..., None, :]


def _column(E_min: Array, strong: Array, weak: Array, F_c_star: Array, c: Array) -> Stability:
    """NDS 3.7.1: C_P by the larger slenderness, F_cE1 by that in the plane of bending."""
    F_cE = nds.euler_column_stress(E_min, np.maximum(strong, weak))
    C_P = nds.column_stability_factor(F_c_star, _rows(F_cE), c=_rows(c))
    return Stability(F_cE1=nds.euler_column_stress(E_min, strong), C_P=C_P, F_c=C_P * F_c_star)


def _lateral(members: Members, l_u: Array, F_b_star: Array, edition: str) -> Lateral:
    """NDS 3.3.3: C_L of one edge, by the breadth of one ply; a member not deeper than broad cannot buckle (3.3.3.1).

    The moment diagrams of a chord over its panel points are not in Table 3.3.3: the row for loadings not listed
    is taken, the least favourable one.
    """
    l_e = effective_bending_length(l_u, members.depth, loading="unlisted", edition=edition)
    l_e = np.where((l_u > 0) & (members.depth > members.breadth), l_e, 0.0)
    R_B = nds.bending_slenderness(l_e, members.depth, members.breadth)
    F_bE = nds.euler_bending_stress(members.properties["Emin"], R_B)
    C_L = nds.beam_stability_factor(F_b_star, _rows(F_bE))
    return Lateral(l_e=l_e, R_B=R_B, F_bE=F_bE, C_L=C_L, F_b=C_L * F_b_star)


def _buckling_stiffness(members: Members, edition: str) -> Array:
    """C_T (..., m) by NDS 4.4.2 for top chords whose upper edge is held throughout by the roof sheathing."""
    rule = sheathed_chord(edition=edition)
    p, slack = members.properties, 1 + 1e-6
    takes = (
        np.array([role == "top chord" for role in members.roles])
        & (members.le_weak == 0)
        & (members.lu_positive == 0)
        & (members.breadth <= rule.breadth_up_to * slack)
        & (members.depth <= rule.depth_up_to * slack)
        & (p["K_T"] > 0)
    )
    K_T = np.where(p["K_T"] > 0, p["K_T"], 1.0)
    C_T = nds.buckling_stiffness_factor(
        members.le_strong, p["E reference"], K_M=rule.K_M, K_T=K_T, length_up_to=rule.length_up_to
    )
    return np.where(takes, C_T, 1.0)
