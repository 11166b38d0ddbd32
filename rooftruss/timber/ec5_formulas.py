"""Formulas of EN 1995-1-1:2004+A1:2008+A2:2014, in its letters. SI; floats or arrays that broadcast together."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]


def design_strength(f_k: ArrayLike, *, k_mod: ArrayLike, gamma_M: ArrayLike, k_sys: ArrayLike) -> Array:
    """Design strength [Pa]; EN 1995-1-1, eq. (2.14), times k_sys of 6.6 (1.0: no load sharing).

    >>> round(float(design_strength(24.0, k_mod=0.8, gamma_M=1.3, k_sys=1.0)), 3)
    14.769
    """
    return _array(k_sys) * _array(k_mod) * _array(f_k) / _array(gamma_M)


def size_factor(h: ArrayLike, *, size: ArrayLike, power: ArrayLike, most: ArrayLike) -> Array:
    """Size factor k_h [-] of a depth or width h [m]; EN 1995-1-1, eq. (3.1) solid timber, (3.2) glued laminated.

    >>> round(float(size_factor(0.097, size=0.150, power=0.2, most=1.3)), 4)
    1.0911
    """
    return np.minimum(np.maximum((_array(size) / _array(h)) ** _array(power), 1.0), _array(most))


def relative_slenderness(l_ef: ArrayLike, side: ArrayLike, *, f_c_0_k: ArrayLike, E_0_05: ArrayLike) -> Array:
    """Relative slenderness lambda_rel [-] of a rectangle of `side` [m] in the plane it buckles in; (6.21), (6.22).

    >>> round(float(relative_slenderness(1.2, 0.035, f_c_0_k=17.0, E_0_05=5400.0)), 4)
    2.1212
    """
    slenderness = _array(l_ef) * np.sqrt(12.0) / _array(side)
    return np.asarray(slenderness / np.pi * np.sqrt(_array(f_c_0_k) / _array(E_0_05)))


def column_factor(lambda_rel: ArrayLike, *, beta_c: ArrayLike) -> Array:
    """Instability factor k_c [-]; EN 1995-1-1, 6.3.2(2) and (3), eq. (6.25) to (6.28). 1 up to lambda_rel = 0.3.

    >>> round(float(column_factor(1.70, beta_c=0.2)), 3)
    0.304
    """
    slender = _array(lambda_rel)
    k = 0.5 * (1 + _array(beta_c) * (slender - 0.3) + slender**2)
    return np.where(slender <= 0.3, 1.0, 1 / (k + np.sqrt(np.maximum(k**2 - slender**2, 0.0))))


def effective_beam_length(l_u: ArrayLike, h: ArrayLike, *, ratio: float, addition: float) -> Array:
    """Effective length l_ef [m] for lateral torsional buckling; EN 1995-1-1, Table 6.1.

    `addition` times h longer than ratio l_u for load on the compressed edge. 0 where that edge is held throughout.

    >>> float(effective_beam_length(3.0, 0.195, ratio=0.9, addition=2.0).round(3))
    3.09
    """
    length = _array(l_u)
    return np.where(length > 0, ratio * length + addition * _array(h), 0.0)


def critical_bending_stress(
    l_ef: ArrayLike, b: ArrayLike, h: ArrayLike, *, E_0_05: ArrayLike, G_05: ArrayLike
) -> Array:
    """Critical bending stress sigma_m,crit [Pa] of a rectangle; EN 1995-1-1, 6.3.3(2). inf where l_ef = 0.

    Solid softwood (G_05 not a number): eq. (6.32). Otherwise eq. (6.31), I_tor = h b^3 / 3 (1 - 0.63 b/h).

    >>> round(float(critical_bending_stress(4.9, 0.05, 0.2, E_0_05=7400.0, G_05=float("nan"))), 3)
    14.724
    """
    b, h, G = _array(b), _array(h), _array(G_05)
    E = _array(E_0_05)
    solid = 0.78 * E
    torsion = np.sqrt(E * np.where(np.isnan(G), 0.0, G) * np.maximum(1 - 0.63 * b / h, 0.0))
    stiffness = np.where(np.isnan(G), solid, np.pi * torsion)
    with np.errstate(divide="ignore"):
        return b**2 * stiffness / (h * _array(l_ef))


def torsion_factor(lambda_rel_m: ArrayLike) -> Array:
    """Factor k_crit [-] for lateral torsional buckling; EN 1995-1-1, eq. (6.34).

    >>> torsion_factor([0.5, 1.0, 2.0]).tolist()
    [1.0, 0.81, 0.25]
    """
    slender = _array(lambda_rel_m)
    return np.where(
        slender <= 0.75,
        1.0,
        np.where(slender <= 1.4, 1.56 - 0.75 * slender, 1 / np.maximum(slender, 1.4) ** 2),
    )


def shear_stress(V: ArrayLike, b: ArrayLike, h: ArrayLike, *, k_cr: ArrayLike) -> Array:
    """Shear stress tau [Pa] of a rectangle with cracks; EN 1995-1-1, 6.1.7, b_ef = k_cr b of eq. (6.13a).

    >>> round(float(shear_stress(3100.0, 0.035, 0.145, k_cr=0.67)) / 1e6, 3)
    1.368
    """
    return 1.5 * _array(V) / (_array(k_cr) * _array(b) * _array(h))


def contact_length(l: ArrayLike, *, addition: float, end_distance: ArrayLike = 0.0) -> Array:  # noqa: E741 as printed
    """Effective contact length l_ef [m] of a bearing of length l near the end of a chord; EN 1995-1-1, 6.1.5(1).

    It grows on either side by `addition`, by l at most, and towards the end by no more than the distance to it.

    >>> round(float(contact_length(0.09, addition=0.03)), 3)
    0.12
    """
    side = np.minimum(addition, _array(l))
    return _array(l) + side + np.minimum(side, end_distance)


def bending_and_tension(tension: ArrayLike, bending: ArrayLike) -> Array:
    """Left side of eq. (6.17), EN 1995-1-1, from sigma_t/f_t and sigma_m,y/f_m,y; sigma_m,z = 0."""
    return _array(tension) + _array(bending)


def bending_and_compression(compression: ArrayLike, bending: ArrayLike) -> Array:
    """Left side of eq. (6.19), EN 1995-1-1, from sigma_c/f_c and sigma_m,y/f_m,y, both lambda_rel up to 0.3."""
    return _array(compression) ** 2 + _array(bending)


def column_in_plane(compression: ArrayLike, k_c_y: ArrayLike, bending: ArrayLike) -> Array:
    """Left side of eq. (6.23), EN 1995-1-1, from sigma_c/f_c and sigma_m,y/f_m,y; sigma_m,z = 0."""
    return _array(compression) / _array(k_c_y) + _array(bending)


def column_across(compression: ArrayLike, k_c_z: ArrayLike, bending: ArrayLike, *, k_m: ArrayLike) -> Array:
    """Left side of eq. (6.24), EN 1995-1-1, from sigma_c/f_c and sigma_m,y/f_m,y; sigma_m,z = 0."""
    return _array(compression) / _array(k_c_z) + _array(k_m) * _array(bending)


def torsion_and_compression(compression: ArrayLike, k_c_z: ArrayLike, bending: ArrayLike, k_crit: ArrayLike) -> Array:
    """Left side of eq. (6.35), EN 1995-1-1, from sigma_c/f_c and sigma_m/f_m."""
    return (_array(bending) / _array(k_crit)) ** 2 + _array(compression) / _array(k_c_z)


def final_factors(factors: Array, lasting: Array, *, k_def: float) -> Array:
    """Factors (..., k, c) of the final deflection; EN 1995-1-1, 2.2.3(5), eq. (2.2) to (2.5).

    factors: of a characteristic combination, 1 or psi_0; lasting (c,): psi_2 of each case (1 for permanent loads). What
    acts grows by k_def times its lasting share: w_G (1 + k_def), w_Q1 (1 + psi_2 k_def), w_Qi (psi_0 + psi_2 k_def).

    >>> final_factors(np.array([[1.0, 1.0, 0.6]]), np.array([1.0, 0.0, 0.0]), k_def=0.8).tolist()
    [[1.8, 1.0, 0.6]]
    """
    return factors + k_def * lasting * (factors > 0)


def _array(values: ArrayLike) -> Array:
    return np.asarray(values, dtype=np.float64)
