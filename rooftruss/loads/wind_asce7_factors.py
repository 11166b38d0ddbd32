"""Wind clauses of ASCE 7-16 and 7-22, chapters 26 and 27: one function for one clause. Tables in tables/wind."""

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rooftruss.basis.tables import Cell, read_table
from rooftruss.errors import OutOfScopeError
from rooftruss.units import FOOT, MILE_PER_HOUR, PSF

Array = NDArray[np.float64]
EDITIONS = ("7-16", "7-22")
VALUES = ("first", "second")  # the two pressures a roof surface must carry, Fig. 27.3-1


def rules(edition: str) -> Mapping[str, float]:
    """Constants and limits of the clauses, SI."""
    row = read_table(f"wind/rules_asce{edition}").rows[0]
    return {key: cell for key, cell in row.items() if isinstance(cell, float)}


def _cell(row: Mapping[str, Cell], column: str) -> float:
    value = row[column]
    assert isinstance(value, float)
    return value


def elevation_factor(elevation: float) -> float:
    """Ground elevation factor K_e [-] of a height over the sea [m]; ASCE 7, note of Table 26.9-1.

    >>> round(elevation_factor(5000 * FOOT), 4)
    0.8344
    """
    z_g = elevation / FOOT
    return float(np.exp(-0.0000362 * z_g))


def exposure_coefficient(edition: str, height: ArrayLike, exposure: str) -> Array:
    """Velocity pressure exposure coefficient K_z [-] at a height [m] (...,); ASCE 7, note 1 of Table 26.10-1.

    The formula is used for every height; the printed 7-22 table differs from it by up to 0.011. Raises OutOfScopeError
    over the height of the boundary layer.

    >>> round(float(exposure_coefficient("7-22", 15 * FOOT, "C")), 4)
    0.8512
    """
    row = read_table(f"wind/terrain_asce{edition}").find("exposure", exposure)
    z = np.maximum(height, rules(edition)["height_least"])
    if np.any(z > _cell(row, "z_g")):
        raise OutOfScopeError(f"ASCE {edition}, Table 26.10-1: no K_z over the gradient height of exposure {exposure}")
    return np.asarray(_cell(row, "k") * (z / _cell(row, "z_g")) ** (2 / _cell(row, "alpha")))


def velocity_pressure(speed: float, K_z: ArrayLike, *, K_zt: float, K_e: float, K_d: float) -> Array:
    """Velocity pressure q_z [Pa] (...,) at a basic wind speed [m/s]; ASCE 7, eq. 26.10-1.

    7-16 has K_d in this equation; 7-22 has it in eq. 27.3-1, so pass 1.0 here.

    >>> round(float(velocity_pressure(115 * MILE_PER_HOUR, 0.9019, K_zt=1.0, K_e=1.0, K_d=0.85)) / PSF, 2)
    25.95
    """
    V = speed / MILE_PER_HOUR
    q_psf = 0.00256 * np.asarray(K_z, float) * K_zt * K_d * K_e * V**2
    return np.asarray(q_psf * PSF)


def net_pressure(q: ArrayLike, C_p: ArrayLike, GC_pi: float, *, G: float, K_d: float) -> Array:
    """Pressure p [Pa] (...,) on a roof surface, positive towards it; ASCE 7, eq. 27.3-1 with q = q_i = q_h.

    7-16 has no K_d in this equation: pass 1.0.
    """
    return np.asarray(np.asarray(q, float) * K_d * (G * np.asarray(C_p, float) - GC_pi))


def internal_coefficient(edition: str, enclosure: str) -> float:
    """Internal pressure coefficient (GC_pi) [-], to be taken with both signs; ASCE 7, Table 26.13-1."""
    return _cell(read_table(f"wind/internal_asce{edition}").find("enclosure", enclosure), "GC_pi")


def between_like_signs(a: ArrayLike, b: ArrayLike, share: ArrayLike, sign: int) -> Array:
    """Value at `share` of the way from a to b (...,); ASCE 7, Fig. 27.3-1, note on interpolation.

    Only values of one sign are interpolated: strictly between an a and a b that differ in sign, the one that is not of
    `sign` counts as 0.

    >>> float(between_like_signs(-0.18, 0.2, 0.5, +1))
    0.1
    """
    a, b, share = np.asarray(a, float), np.asarray(b, float), np.asarray(share, float)
    differ = (a * b < 0) & (share > 0) & (share < 1)
    a, b = (np.where(differ & (np.sign(v) != sign), 0.0, v) for v in (a, b))
    return np.asarray(a + share * (b - a))


def slope_coefficients(edition: str, slope: ArrayLike, h_over_L: ArrayLike) -> tuple[Array, Array, Array]:
    """C_p [-] (...,) of a roof from 10 deg, wind normal to the ridge: windward first, windward second, leeward.

    ASCE 7, Fig. 27.3-1. slope [rad] and h/L broadcast. From 60 deg the windward slope has one value, 0.01 theta up to
    0.8 at 80 deg: first and second are equal. Linear in slope and in h/L between like signs.

    >>> [round(float(C_p), 4) for C_p in slope_coefficients("7-22", np.radians(18.435), 0.5)]
    [-0.4939, -0.0563, -0.5687]
    """
    slope, h_over_L = np.broadcast_arrays(np.asarray(slope, float), np.asarray(h_over_L, float))
    first = _over_ratio(edition, "windward_first", slope, h_over_L, sign=-1)
    second = _over_ratio(edition, "windward_second", slope, h_over_L, sign=+1)
    leeward = _over_ratio(edition, "leeward", slope, h_over_L, sign=-1)
    steep = slope >= rules(edition)["one_value_slope"] - 1e-9
    return np.where(steep, second, first), second, leeward


def _over_ratio(edition: str, column: str, slope: Array, h_over_L: Array, *, sign: int) -> Array:
    """One column of Fig. 27.3-1: along the slope in each h/L row, then between the two rows that enclose h/L."""
    rows = read_table(f"wind/roof_slope_asce{edition}").rows
    ratios = sorted({_cell(row, "h_over_L") for row in rows})
    lines = []
    for ratio in ratios:
        line = [row for row in rows if row["h_over_L"] == ratio]
        # Neighbouring cells of a row never differ in sign: the figure puts a 0.0 between them.
        lines.append(np.interp(slope, [_cell(r, "slope") for r in line], [_cell(r, column) for r in line]))
    x = np.clip(h_over_L, ratios[0], ratios[-1])
    result = lines[0]
    for low, high, a, b in zip(ratios[:-1], ratios[1:], lines[:-1], lines[1:], strict=True):
        result = np.where(x > low, between_like_signs(a, b, np.clip((x - low) / (high - low), 0, 1), sign), result)
    return np.asarray(result)


def distance_coefficients(edition: str, h_over_L: ArrayLike) -> list[tuple[float, float, Array, Array]]:
    """Zones by distance from the windward edge: (from, to) in multiples of h, C_p first and second [-] (...,).

    ASCE 7, Fig. 27.3-1, wind parallel to the ridge, or normal to it on slopes under 10 deg; linear in h/L from 0.5
    to 1.0. The last zone reaches to infinity. The optional reduction of -1.3 by area is not taken.

    >>> [round(float(first), 2) for _, _, first, _ in distance_coefficients("7-22", 0.4)]
    [-0.9, -0.9, -0.5, -0.3]
    """
    share = np.clip((np.asarray(h_over_L, float) - 0.5) / 0.5, 0.0, 1.0)
    zones = []
    for row in read_table(f"wind/roof_distance_asce{edition}").rows:
        first = between_like_signs(_cell(row, "C_p_half"), _cell(row, "C_p_one"), share, -1)
        end = _cell(row, "distance_to")
        second = np.full_like(first, _cell(row, "second"))
        zones.append((_cell(row, "distance_from"), np.inf if np.isnan(end) else end, first, second))
    return zones
