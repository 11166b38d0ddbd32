"""Formulas of the NDS (ANSI/AWC, 2018 and 2024), in its letters. SI; floats or arrays that broadcast together."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rooftruss.units import PCF

Array = NDArray[np.float64]

# The amplifier 1/(1 - fc/FcE) of eq. 3.9-3 is held at 100: it has no meaning from fc = FcE on, where the clause
# forbids the member, and a held value keeps the utilisation finite, growing with the force, and far above 1.
AMPLIFIER_FLOOR = 0.01


def euler_column_stress(E_min: ArrayLike, slenderness: ArrayLike) -> Array:
    """Critical buckling stress F_cE [Pa] of a column of slenderness l_e/d; NDS 3.7.1.5. inf where l_e = 0.

    >>> float(euler_column_stress(510000.0, 40.0))
    262.0125
    """
    return _over_square(0.822 * _array(E_min), slenderness)


def column_stability_factor(F_c_star: ArrayLike, F_cE: ArrayLike, *, c: ArrayLike) -> Array:
    """Column stability factor C_P [-]; NDS eq. 3.7-1. `c` is 0.8 for sawn lumber, 0.9 for structural composite lumber.

    >>> round(float(column_stability_factor(1520.87, 262.01, c=0.8)), 4)
    0.1657
    """
    return _smaller_root(_array(F_c_star) / _array(F_cE), c)


def bending_slenderness(l_e: ArrayLike, depth: ArrayLike, breadth: ArrayLike) -> Array:
    """Slenderness ratio R_B [-] of a bending member; NDS eq. 3.3-5.

    >>> round(float(bending_slenderness(49.44, 3.5, 1.5)), 3)
    8.770
    """
    return np.sqrt(_array(l_e) * _array(depth)) / _array(breadth)


def euler_bending_stress(E_min: ArrayLike, R_B: ArrayLike) -> Array:
    """Critical lateral buckling stress F_bE [Pa]; NDS 3.3.3.8. inf where R_B = 0."""
    return _over_square(1.20 * _array(E_min), R_B)


def beam_stability_factor(F_b_star: ArrayLike, F_bE: ArrayLike) -> Array:
    """Beam stability factor C_L [-]; NDS eq. 3.3-6.

    >>> round(float(beam_stability_factor(1509.37, 7957.7)), 4)
    0.9886
    """
    return _smaller_root(_array(F_b_star) / _array(F_bE), 0.95)


def buckling_stiffness_factor(
    l_e: ArrayLike, E: ArrayLike, *, K_M: float, K_T: ArrayLike, length_up_to: float
) -> Array:
    """Buckling stiffness factor C_T [-] of a sheathed compression chord; NDS eq. 4.4-1.

    l_e [m], counted up to `length_up_to`; K_M [N/m3] is 2300 or 1200 psi/in, so that E [Pa] and l_e may stay in SI.
    """
    return 1 + K_M * np.minimum(l_e, length_up_to) / (_array(K_T) * _array(E))


def bearing_area_factor(
    l_b: ArrayLike, end_distance: ArrayLike, *, addition: float, length_below: float, least_end_distance: float
) -> Array:
    """Bearing area factor C_b [-] of a bearing l_b [m] long, away from the end of the member; NDS eq. 3.10-2."""
    l_b = _array(l_b)
    counts = (l_b < length_below) & (_array(end_distance) >= least_end_distance)
    return np.where(counts, (l_b + addition) / l_b, 1.0)


def shear_stress(V: ArrayLike, area: ArrayLike) -> Array:
    """Shear stress f_v [Pa] of a rectangular section; NDS eq. 3.4-2."""
    return 1.5 * _array(V) / _array(area)


def tension_and_bending(f_t: ArrayLike, F_t: ArrayLike, f_b: ArrayLike, F_b_star: ArrayLike) -> Array:
    """Left side of NDS eq. 3.9-1 [-]; F_b_star has every factor but C_L.

    >>> round(float(tension_and_bending(457.14, 776.2, 489.8, 1454.8)), 4)
    0.9256
    """
    return _array(f_t) / _array(F_t) + _array(f_b) / _array(F_b_star)


def bending_less_tension(f_b: ArrayLike, f_t: ArrayLike, F_b_2star: ArrayLike) -> Array:
    """Left side of NDS eq. 3.9-2 [-], zero where tension outweighs bending; F_b_2star has every factor but C_V."""
    return np.maximum(_array(f_b) - _array(f_t), 0.0) / _array(F_b_2star)


def compression_and_bending(
    f_c: ArrayLike,
    F_c: ArrayLike,
    F_cE1: ArrayLike,
    f_b1: ArrayLike,
    F_b1: ArrayLike,
    *,
    f_b2: ArrayLike = 0.0,
    F_b2: ArrayLike = np.inf,
    F_cE2: ArrayLike = np.inf,
    F_bE: ArrayLike = np.inf,
) -> Array:
    """Left side of NDS eq. 3.9-3 [-]; 1 is the edgewise direction. Valid for f_c < F_cE1 and where eq. 3.9-4 holds.

    Beyond those limits the amplifiers are held at 100: the result is finite, never negative, and grows with f_c.

    >>> round(float(compression_and_bending(424.24, 1204.3, 1780.5, 859.5, 1547.3)), 4)
    0.8533
    """
    edge = np.maximum(1 - _array(f_c) / _array(F_cE1), AMPLIFIER_FLOOR)
    flat = np.maximum(1 - compression_and_bending_stability(f_c, F_cE2, f_b1, F_bE), AMPLIFIER_FLOOR)
    edgewise = _array(f_b1) / (_array(F_b1) * edge)
    return (_array(f_c) / _array(F_c)) ** 2 + edgewise + _array(f_b2) / (_array(F_b2) * flat)


def compression_and_bending_stability(f_c: ArrayLike, F_cE2: ArrayLike, f_b1: ArrayLike, F_bE: ArrayLike) -> Array:
    """Left side of NDS eq. 3.9-4 [-]."""
    return _array(f_c) / _array(F_cE2) + (_array(f_b1) / _array(F_bE)) ** 2


def lumber_density(G: ArrayLike, moisture: float) -> Array:
    """Density [kg/m3] of lumber of specific gravity G (oven dry) at a moisture content [percent]; NDS Supplement 3.1.3.

    >>> round(float(lumber_density(0.42, 15.0)), 1)
    456.8
    """
    G = _array(G)
    pounds_per_cubic_foot = 62.4 * G / (1 + G * 0.009 * moisture) * (1 + moisture / 100)
    return pounds_per_cubic_foot * PCF


def _array(values: ArrayLike) -> Array:
    return np.asarray(values, dtype=np.float64)


def _over_square(stress: Array, ratio: ArrayLike) -> Array:
    ratio = _array(ratio)
    square = np.where(ratio > 0, ratio, 1.0) ** 2
    return np.where(ratio > 0, stress / square, np.inf)


def _smaller_root(strength_over_euler: Array, c: ArrayLike) -> Array:
    """x = (1 + a)/(2c) - sqrt(((1 + a)/(2c))^2 - a/c) with a = Euler stress over strength.

    Written with 1/a and without the difference, which loses all digits for a stocky member (a large) and cannot
    take a held one (a infinite).
    """
    c = _array(c)
    half_sum = (1 + strength_over_euler) / (2 * c)
    return (1 / c) / (half_sum + np.sqrt(half_sum**2 - strength_over_euler / c))
