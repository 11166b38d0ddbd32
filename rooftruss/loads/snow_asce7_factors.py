"""Snow clauses of ASCE 7-16 and 7-22, chapter 7: one function for one clause. Tables in tables/snow."""

from collections.abc import Mapping
from math import isnan

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rooftruss.basis.tables import Cell, read_table
from rooftruss.errors import JobError, OutOfScopeError
from rooftruss.units import FOOT, PCF, PSF

Array = NDArray[np.float64]
EDITIONS = ("7-16", "7-22")
SAME = 1e-6  # relative room for a limit that the job states in another unit (definitions of the Btu differ by 1e-7)


def rules(edition: str) -> Mapping[str, float]:
    """Limits and allowances of the clauses, SI; NaN where the edition has none."""
    row = read_table(f"snow/rules_asce{edition}").rows[0]
    return {key: cell for key, cell in row.items() if isinstance(cell, float)}


def _cell(row: Mapping[str, Cell], column: str) -> float:
    value = row[column]
    assert isinstance(value, float)
    return value


def exposure_factor(edition: str, terrain: str, exposure: str) -> float:
    """Exposure factor C_e [-]; ASCE 7, Table 7.3-1. Raises OutOfScopeError where the table has no value.

    >>> exposure_factor("7-22", "C", "partially exposed")
    1.0
    """
    C_e = _cell(read_table(f"snow/exposure_asce{edition}").find("terrain", terrain), exposure)
    if isnan(C_e):
        raise OutOfScopeError(
            f"a {exposure} roof in terrain {terrain!r} is not in ASCE {edition}, Table 7.3-1; "
            "take 'partially exposed' or 'fully exposed'"
        )
    return C_e


def importance_factor(edition: str, risk_category: str) -> float:
    """Importance factor I_s [-]; ASCE 7-16, Table 1.5-2. In 7-22 the ground snow load holds it: 1.0."""
    if edition == "7-22":
        return 1.0
    return _cell(read_table("snow/importance_asce7-16").find("risk_category", risk_category), "I_s")


def thermal_factor(edition: str, thermal: str, ground_snow: float, r_value: float | None) -> float:
    """Thermal factor C_t [-]; ASCE 7, Table 7.3-2, in 7-22 with Table 7.3-3 for heated roofs.

    ground_snow [Pa]; r_value of the roof [m2 K/W] where the table asks for it. A ventilated attic is cold under 7-16
    only over R-25 between attic and heated space; without a value it counts as cold, which is the larger load.
    Raises JobError when 7-22 needs an r_value that is not given.

    >>> thermal_factor("7-22", "unheated", 30 * PSF, None)
    1.2
    """
    C_t = _cell(read_table(f"snow/thermal_asce{edition}").find("thermal", thermal), "C_t")
    if isnan(C_t):
        if r_value is None:
            raise JobError(f"[site] roof_r_value is missing; ASCE {edition}, Table 7.3-3 asks for it ({thermal} roof)")
        return heated_thermal_factor(ground_snow, r_value)
    least_cold = rules(edition)["attic_r_cold"]
    if thermal == "ventilated attic" and r_value is not None and r_value <= least_cold * (1 + SAME):
        return _cell(read_table(f"snow/thermal_asce{edition}").find("thermal", "all other"), "C_t")
    return C_t


def heated_thermal_factor(ground_snow: float, r_value: float) -> float:
    """Thermal factor C_t [-] of a heated roof without ventilated space; ASCE 7-22, Table 7.3-3, linear between rows.

    ground_snow [Pa], r_value [m2 K/W]; C_t over R-50 is the value the table's note gives.

    >>> round(heated_thermal_factor(42.9 * PSF, 20 / 5.678263), 4)
    1.0071
    """
    limits = rules("7-22")
    if r_value > limits["C_t_beyond_r"] * (1 + SAME):
        return limits["C_t_beyond"]
    rows = read_table("snow/thermal_heated_asce7-22").rows
    resistances = sorted({_cell(row, "r_value") for row in rows})
    at_snow = []
    for resistance in resistances:
        line = [row for row in rows if row["r_value"] == resistance]
        snows, factors = ([_cell(row, column) for row in line] for column in ("ground_snow", "C_t"))
        at_snow.append(float(np.interp(ground_snow, snows, factors)))
    return float(np.interp(r_value, resistances, at_snow))


def flat_roof_snow(ground_snow: float, *, C_e: float, C_t: float, I_s: float) -> float:
    """Flat roof snow load p_f [Pa]; ASCE 7, eq. 7.3-1 (7-22: no I_s, pass 1.0).

    >>> round(flat_roof_snow(30 * PSF, C_e=1.0, C_t=1.0, I_s=1.0) / PSF, 2)
    21.0
    """
    return 0.7 * C_e * C_t * I_s * ground_snow


def minimum_snow(edition: str, ground_snow: float, risk_category: str) -> float:
    """Minimum snow load p_m [Pa] of low-slope roofs; ASCE 7-16, 7.3.4; 7-22, 7.3.3.

    >>> round(minimum_snow("7-22", 60 * PSF, "II") / PSF, 2)
    30.0
    """
    I_s = importance_factor(edition, risk_category)
    return I_s * min(ground_snow, minimum_bound(edition, risk_category))


def minimum_bound(edition: str, risk_category: str) -> float:
    """Ground snow [Pa] beyond which p_m grows no more; ASCE 7-16, 7.3.4; 7-22, Table 7.3-4."""
    if edition == "7-16":
        return rules(edition)["minimum_bound"]
    return _cell(read_table("snow/minimum_asce7-22").find("risk_category", risk_category), "p_m_max")


def slope_panel(edition: str, C_t: float) -> str:
    """Panel "a", "b" or "c" of Fig. 7.4-1 for a thermal factor; ASCE 7, 7.4.1 and 7.4.2."""
    table = read_table(f"snow/slope_factor_asce{edition}")
    if C_t <= _cell(table.where(panel="a"), "C_t_most") + SAME:
        return "a"
    return "c" if C_t >= _cell(table.where(panel="c"), "C_t_least") - SAME else "b"


def may_slide(edition: str, panel: str, thermal: str, r_value: float | None) -> bool:
    """Whether a slippery surface may use the lower line of its panel.

    ASCE 7-16, 7.4.1: on a warm roof only with enough thermal resistance (not given: no). 7-22 has no such gate.
    """
    if edition == "7-22" or panel != "a":
        return True
    key = "slippery_r_ventilated" if thermal == "ventilated attic" else "slippery_r_unventilated"
    return r_value is not None and r_value >= rules(edition)[key] * (1 - SAME)


def slope_factor(edition: str, slope: ArrayLike, panel: str, *, slippery: bool) -> Array:
    """Slope factor C_s [-]; ASCE 7, Fig. 7.4-1. slope [rad] (...,).

    >>> round(float(slope_factor("7-16", np.radians(33.69), "a", slippery=False)), 4)
    0.9078
    """
    row = read_table(f"snow/slope_factor_asce{edition}").where(panel=panel)
    knee = _cell(row, "knee_slippery" if slippery else "knee_rough")
    return np.asarray(np.interp(np.asarray(slope, float), [knee, _cell(row, "end")], [1.0, 0.0]))


def snow_density(ground_snow: ArrayLike) -> Array:
    """Snow density gamma [kg/m3]; ASCE 7, eq. 7.7-1: 0.13 p_g + 14, not over 30 pcf. ground_snow [Pa].

    >>> round(float(snow_density(30 * PSF)) / PCF, 2)
    17.9
    """
    p_g = np.asarray(ground_snow, float) / PSF
    return np.minimum((0.13 * p_g + 14) * PCF, rules("7-22")["gamma_most"])


def unbalanced_applies(edition: str, pitch: ArrayLike) -> NDArray[np.bool_]:
    """Whether a gable needs the unbalanced case: pitch [-] from 1/2 to 7 on 12, both included; ASCE 7, 7.6.1.

    The limits are compared as rise over run: 7 on 12 is 30.26 deg, a little over the rounded 30.2 deg of the text.
    """
    limits, p = rules(edition), np.asarray(pitch, float)
    return (p >= limits["pitch_least"] * (1 - SAME)) & (p <= limits["pitch_most"] * (1 + SAME))


def drift_height_16(ground_snow: ArrayLike, fetch: ArrayLike, I_s: float) -> Array:
    """Drift height h_d [m]; ASCE 7-16, Fig. 7.6-1. ground_snow [Pa], fetch l_u [m], already at its least value or more.

    >>> round(float(drift_height_16(30 * PSF, 30 * FOOT, 1.0)) / FOOT, 4)
    1.8601
    """
    p_g, l_u = np.asarray(ground_snow, float) / PSF, np.asarray(fetch, float) / FOOT
    h_d = np.sqrt(I_s) * (0.43 * np.cbrt(l_u) * (p_g + 10) ** 0.25 - 1.5)
    return np.asarray(h_d * FOOT)


def drift_height_22(ground_snow: ArrayLike, fetch: ArrayLike, W_2: float) -> Array:
    """Drift height h_d [m]; ASCE 7-22, eq. 7.6-1. ground_snow [Pa], fetch l_u [m], winter wind parameter W_2 [-].

    >>> round(float(drift_height_22(30 * PSF, 30 * FOOT, 0.55)) / FOOT, 4)
    2.4689
    """
    p_g, l_u = np.asarray(ground_snow, float) / PSF, np.asarray(fetch, float) / FOOT
    gamma = snow_density(ground_snow) / PCF
    return np.asarray(1.5 * np.sqrt(p_g**0.74 * l_u**0.70 * W_2**1.7 / gamma) * FOOT)


def ridge_surcharge(h_d: ArrayLike, weight: ArrayLike, pitch: ArrayLike) -> tuple[Array, Array]:
    """Drift surcharge [Pa] on the leeward slope and its width [m] from the ridge; ASCE 7, 7.6.1 and Fig. 7.6-2.

    h_d [m], weight of the snow [N/m3], pitch as rise over run; S is the run for a rise of one.
    """
    h, w, S = np.asarray(h_d, float), np.asarray(weight, float), 1 / np.asarray(pitch, float)
    return np.asarray(h * w / np.sqrt(S)), np.asarray(8 / 3 * h * np.sqrt(S))


def rain_applies(
    edition: str, ground_snow: float, risk_category: str, slope: ArrayLike, W: ArrayLike
) -> NDArray[np.bool_]:
    """Whether rain falls on the balanced snow: low ground snow, and slope [deg] under W/50, W in ft; ASCE 7, 7.10.

    ground_snow [Pa], slope [rad], W eave to ridge [m].
    """
    most = rules("7-16")["rain_ground_snow"] if edition == "7-16" else minimum_bound(edition, risk_category)
    flat = np.degrees(slope) < np.asarray(W, float) / FOOT / 50
    return np.asarray(flat & (0 < ground_snow <= most * (1 + SAME)))


def eaves_carry_ice(edition: str, thermal: str, r_value: float | None) -> bool:
    """Whether the overhang carries ice: a warm roof that is poorly insulated; ASCE 7-16, 7.4.5; 7-22, 7.4.4.

    Without an r_value an unventilated heated roof counts as poorly insulated; a ventilated attic does not.
    """
    limits = rules(edition)
    if thermal == "ventilated attic":
        return r_value is not None and r_value < limits["eave_r_ventilated"] * (1 - SAME)
    if thermal in ("unventilated", "all other", "greenhouse"):
        return r_value is None or r_value < limits["eave_r_unventilated"] * (1 - SAME)
    return False
