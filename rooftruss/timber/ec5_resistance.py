"""Stability factors and characteristic resistances of members by EN 1995-1-1. Arrays (..., m).

All resistances of a member rise and fall together with k_mod/gamma_M, and k_c and k_crit come from characteristic
values: everything here is worked out once, whatever the combination.
"""

from dataclasses import dataclass

import numpy as np

from rooftruss.timber import ec5_formulas as ec5
from rooftruss.timber import ec5_tables as tables
from rooftruss.timber.terms import Array, Members


@dataclass(frozen=True, slots=True, kw_only=True)
class Lateral:
    """Lateral torsional stability for one sign of the moment."""

    l_ef: Array  # [m], 0 where the compressed edge is held throughout
    sigma_m_crit: Array  # [Pa], inf where it is
    lambda_rel_m: Array
    k_crit: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Resistances:
    """Section values [m2, m3], characteristic strengths with k_h and k_sys [Pa], and stability factors [-]."""

    area: Array
    modulus: Array
    k_sys: Array
    f_m: Array
    f_t: Array
    f_c: Array
    f_v: Array
    k_cr: Array
    k_m: Array
    lambda_rel_y: Array
    lambda_rel_z: Array
    k_c_y: Array
    k_c_z: Array
    stocky: Array  # 1 where both relative slendernesses are up to 0.3, else 0
    positive: Lateral
    negative: Lateral


def resistances(members: Members) -> Resistances:
    """Resistances of `members` before k_mod and gamma_M; EN 1995-1-1, chapter 6."""
    p = members.properties
    k_sys = np.where(members.load_sharing, tables.system_strength()[0], 1.0)
    breadth = members.breadth * members.plies
    lambda_y, lambda_z = (
        ec5.relative_slenderness(l_ef, side, f_c_0_k=p["f_c_0_k"], E_0_05=p["E_0_05"])
        for l_ef, side in ((members.le_strong, members.depth), (members.le_weak, members.breadth))
    )
    return Resistances(
        area=breadth * members.depth,
        modulus=breadth * members.depth**2 / 6,
        k_sys=k_sys,
        f_m=k_sys * p["k_h,m"] * p["f_m_k"],
        f_t=k_sys * p["k_h,t"] * p["f_t_0_k"],
        f_c=k_sys * p["f_c_0_k"],
        f_v=k_sys * p["f_v_k"],
        k_cr=p["k_cr"],
        k_m=p["k_m"],
        lambda_rel_y=lambda_y,
        lambda_rel_z=lambda_z,
        k_c_y=ec5.column_factor(lambda_y, beta_c=p["beta_c"]),
        k_c_z=ec5.column_factor(lambda_z, beta_c=p["beta_c"]),
        stocky=((lambda_y <= 0.3) & (lambda_z <= 0.3)).astype(float),
        positive=_lateral(members, members.lu_positive, load_on_edge=True),
        negative=_lateral(members, members.lu_negative, load_on_edge=False),
    )


def _lateral(members: Members, l_u: Array, *, load_on_edge: bool) -> Lateral:
    """6.3.3 for one sign of the moment; load_on_edge: downward load stands on the compressed edge, Table 6.1 note.

    Moments are taken as constant between restraints, the least favourable row of Table 6.1. f_m,k counts with k_h.
    """
    p = members.properties
    ratio, addition = tables.beam_length_rule("constant moment")
    l_ef = ec5.effective_beam_length(l_u, members.depth, ratio=ratio, addition=addition if load_on_edge else 0.0)
    critical = ec5.critical_bending_stress(l_ef, members.breadth, members.depth, E_0_05=p["E_0_05"], G_05=p["G_05"])
    slender = np.sqrt(p["k_h,m"] * p["f_m_k"] / critical)
    return Lateral(l_ef=l_ef, sigma_m_crit=critical, lambda_rel_m=slender, k_crit=ec5.torsion_factor(slender))


def bearing_factors(members: Members, length: Array) -> Array:
    """k_c,90 [-] of chords (..., s) on bearings of `length` (..., s) [m]; EN 1995-1-1, 6.1.5: 1 on too long ones."""
    p = members.properties
    return np.where(length <= p["k_c,90 up to"] + 1e-9, p["k_c,90"], 1.0)
