"""Wind pressures of EN 1991-1-4:2005+A1:2010: velocity pressure and the coefficients of roofs and walls."""

from collections.abc import Mapping, Sequence
from typing import cast

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.tables import Cell, read_table
from rooftruss.errors import OutOfScopeError

Array = NDArray[np.float64]
Number = Array | float
ROUND_OFF = 1e-12  # [rad] room for a slope of exactly 5 or 75 deg


def constant(name: str) -> float:
    """A value of tables/wind/constants_en1991 [SI]."""
    return cast(float, read_table("wind/constants_en1991").rows[0][name])


def roughness_factor(z: Number, *, z_0: Number, z_min: Number) -> Array:
    """Roughness factor c_r [-] at height z [m]; EN 1991-1-4:2005, eq. (4.4), (4.5).

    Raises OutOfScopeError above z_max = 200 m.

    >>> round(float(roughness_factor(8.0, z_0=0.05, z_min=2.0)), 4)
    0.9643
    """
    if np.any(np.asarray(z) > constant("z_max")):
        raise OutOfScopeError(f"height {np.max(z):.0f} m; EN 1991-1-4, 4.3.2(1) covers heights up to 200 m")
    k_r = 0.19 * (np.asarray(z_0) / 0.05) ** 0.07
    return np.asarray(k_r * np.log(np.maximum(z, z_min) / np.asarray(z_0)))


def turbulence_intensity(z: Number, *, z_0: Number, z_min: Number, c_o: Number) -> Array:
    """Turbulence intensity I_v [-] at height z [m]; EN 1991-1-4:2005, eq. (4.7).

    >>> round(float(turbulence_intensity(9.0, z_0=1.0, z_min=10.0, c_o=1.0)), 4)
    0.4343
    """
    return np.asarray(constant("k_I") / (c_o * np.log(np.maximum(z, z_min) / np.asarray(z_0))))


def peak_velocity_pressure(v_b: Number, z: Number, *, terrain: str, c_o: Number, rho: Number) -> Array:
    """Peak velocity pressure q_p [Pa] at height z [m] of a basic velocity v_b [m/s]; EN 1991-1-4:2005, eq. (4.8).

    terrain: category "0" to "IV" of Table 4.1; c_o orography factor [-]; rho density of air [kg/m3].

    >>> round(float(peak_velocity_pressure(24.0, 8.0, terrain="II", c_o=1.0, rho=1.25)), 1)
    796.4
    """
    row = read_table("wind/terrain_en1991").find("category", terrain)
    z_0, z_min = cast(float, row["z_0"]), cast(float, row["z_min"])
    v_m = roughness_factor(z, z_0=z_0, z_min=z_min) * c_o * v_b
    return (1 + 7 * turbulence_intensity(z, z_0=z_0, z_min=z_min, c_o=c_o)) * 0.5 * rho * v_m**2


def area_coefficient(c_pe_1: Number, c_pe_10: Number, area: Number) -> Array:
    """External pressure coefficient [-] of a loaded area [m2]; EN 1991-1-4:2005, 7.2.1(1) and Fig. 7.2.

    >>> round(float(area_coefficient(-2.0, -0.9, 4.0)), 3)
    -1.338
    """
    return np.asarray(c_pe_1 - (np.asarray(c_pe_1) - c_pe_10) * np.log10(np.clip(area, 1.0, 10.0)))


def covered_slope(slope: Number, clause: str) -> Array:
    """The slope [rad] as an array. Raises OutOfScopeError naming the clause under 5 deg and above 75 deg."""
    slope = np.asarray(slope, dtype=float)
    if np.any(is_flat(slope)) or np.any(slope > constant("steepest") + ROUND_OFF):
        raise OutOfScopeError(
            f"roof slope {np.degrees(np.min(slope)):.1f} to {np.degrees(np.max(slope)):.1f} deg; EN 1991-1-4, {clause} "
            "cover 5 to 75 deg"
        )
    return slope


def roof_coefficient(direction: str, zone: str, slope: Number, area: Number, line: str = "suction") -> Array:
    """External pressure coefficient [-] of a zone of a duopitch roof; EN 1991-1-4:2005, Tables 7.4a and 7.4b.

    direction: "across" or "along" the ridge; zone "F" to "J"; slope [rad] and loaded area [m2] (...,); line: "suction"
    or "pressure", the smaller or the larger line of Table 7.4a. Linear in the slope between values of the same line;
    beyond the last value of a line that value is held (I has no larger value at 5 deg: the 0.0 of 15 deg is taken; the
    lines that end with 0.0 at 45 deg stay there).
    Raises OutOfScopeError for slopes under 5 deg (flat roofs, 7.2.3) or above 75 deg.

    >>> float(roof_coefficient("across", "G", np.radians(22.5), 10.0))
    -0.65
    >>> float(roof_coefficient("along", "H", np.radians(10.0), 10.0).round(3))
    -0.65
    """
    slope = covered_slope(slope, "7.2.5 and Table 7.4")
    table = read_table(f"wind/duopitch_{direction}_en1991")
    return on_line([row for row in table.rows if row["zone"] == zone], line, slope, area)


def on_line(rows: Sequence[Mapping[str, Cell]], line: str, slope: Array, area: Number) -> Array:
    """Coefficient c_pe [-] of one zone, from its rows of a table; EN 1991-1-4:2005, 7.2.1(1), notes to Tables 7.3, 7.4.

    Linear in the slope [rad] (...,) between values of the "suction" or the "pressure" line, the first and the last held
    beyond; suction by the loaded area [m2] too.
    """

    def at_slope(column: str) -> Array:
        known = [row for row in rows if np.isfinite(cast(float, row[column]))]
        return np.interp(slope, [cast(float, r["slope"]) for r in known], [cast(float, r[column]) for r in known])

    if line == "pressure":
        return at_slope("pressure")
    return area_coefficient(at_slope("suction_1"), at_slope("suction_10"), area)


def is_flat(slope: Array) -> NDArray[np.bool_]:
    """Whether a slope [rad] is that of a flat roof, under 5 deg; EN 1991-1-4:2005, 7.2.3(1)."""
    return np.asarray(slope < constant("flattest") - ROUND_OFF)


def has_both_lines(slope: Array) -> NDArray[np.bool_]:
    """Whether a slope [rad] takes the smaller and the larger line of Tables 7.3a and 7.4a; up to 60 deg.

    At 60 deg the tables give one value. What a line has at 45 deg and lacks at 60 deg is 0.0 at 45 deg: it is taken as
    0.0 in between, so that no case ends at 45 deg.
    """
    return np.asarray(slope <= constant("steepest_both") + ROUND_OFF)


def flat_coefficient(zone: str, area: Number, line: str = "suction") -> Array:
    """External pressure coefficient [-] of a flat roof with sharp eaves; EN 1991-1-4:2005, 7.2.3 and Table 7.2.

    >>> float(flat_coefficient("H", 10.0)), float(flat_coefficient("I", 10.0, "pressure"))
    (-0.7, 0.2)
    """
    row = read_table("wind/flat_en1991").find("zone", zone)
    if line == "pressure":
        return np.asarray(row["pressure"], dtype=float)
    return area_coefficient(cast(float, row["suction_1"]), cast(float, row["suction_10"]), area)


def wall_coefficient(zone: str, h_over_d: Number) -> Array:
    """External pressure coefficient c_pe,10 [-] of a wall zone "A" to "E"; EN 1991-1-4:2005, Table 7.1.

    Below h/d = 0.25 the value of 0.25 holds. Raises OutOfScopeError above h/d = 5.

    >>> round(float(wall_coefficient("D", 0.639)), 3)
    0.752
    """
    rows = read_table("wind/walls_en1991").rows
    ratios = [cast(float, r["h_over_d"]) for r in rows]
    if np.any(np.asarray(h_over_d) > ratios[-1]):
        raise OutOfScopeError(f"height over depth {np.max(h_over_d):.2f}; EN 1991-1-4, Table 7.1 covers ratios up to 5")
    return np.asarray(np.interp(h_over_d, ratios, [cast(float, r[zone]) for r in rows]))
