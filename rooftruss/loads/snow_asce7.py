"""Snow cases of a gable truss after ASCE 7-16 or 7-22, chapter 7. All snow acts on the horizontal projection.

A truss spans from bearing to bearing and is no member from ridge to eave, so the simple form of 7.6.1 (leeward load
alone, W up to 20 ft) never applies: unbalanced snow is always drift on the lee side. The reduction of the eave load to
a 5 ft strip is not taken; sliding snow and drifts from higher roofs are not covered.
"""

from dataclasses import dataclass

import numpy as np

from rooftruss.errors import JobError, OutOfScopeError, nearest
from rooftruss.loads.roof import ActionCase, Array, Roof, Site, SurfaceLoad, Value
from rooftruss.loads.site import number, optional_number, word
from rooftruss.loads.snow_asce7_factors import (
    EDITIONS,
    SAME,
    drift_height_16,
    drift_height_22,
    eaves_carry_ice,
    exposure_factor,
    flat_roof_snow,
    importance_factor,
    may_slide,
    minimum_snow,
    rain_applies,
    ridge_surcharge,
    rules,
    slope_factor,
    slope_panel,
    snow_density,
    thermal_factor,
    unbalanced_applies,
)
from rooftruss.units import GRAVITY

TAILS = ("left tail", "right tail")
EVERYWHERE = ("left tail", "left slope", "right slope", "right tail")
EXPOSURES = ("fully exposed", "partially exposed", "sheltered")
TERRAINS = ("B", "C", "D", "above tree line", "alaska, no trees")
THERMAL = ("ventilated attic", "unventilated", "just above freezing", "unheated", "freezer", "greenhouse", "all other")


@dataclass(frozen=True, slots=True, kw_only=True)
class _Balanced:
    """Balanced snow on the roofs of a batch, and the site values that all cases share."""

    edition: str
    risk_category: str
    thermal: str
    r_value: float | None
    p_g: float
    I_s: float
    p_f: float
    p_s: Array
    values: tuple[Value, ...]

    def clause(self, text: str) -> str:
        return f"ASCE {self.edition}, {text}"


def snow_cases(roof: Roof, site: Site, edition: str) -> list[ActionCase]:
    """Snow cases (action S) of one roof or a batch; none where the ground snow is zero.

    Site keys: ground_snow [Pa], risk_category, snow_exposure, exposure or snow_terrain, thermal, roof_r_value [m2 K/W],
    roof_surface; 7-22 also winter_wind_parameter where a roof needs the unbalanced case. A case is there when any roof
    of the batch needs it, and is zero on the others. Raises JobError for a missing value and OutOfScopeError with the
    clause for a roof below 1/2 on 12.
    """
    if edition not in EDITIONS:
        raise JobError(f"snow loads of ASCE {edition} are not known; {nearest(edition, EDITIONS)}")
    if number(site, "ground_snow", f"ASCE {edition}, 7.2") == 0.0:
        return []
    if np.any(roof.pitch < rules(edition)["pitch_least"] * (1 - SAME)):
        raise OutOfScopeError(
            f"ASCE {edition}, 7.5: below a pitch of 1/2 on 12 partial snow loading is asked for, which is not covered"
        )
    balanced = _balanced(roof, site, edition)
    full = _case("snow, balanced", "balanced", "balanced", _uniform(EVERYWHERE, balanced.p_s), balanced.values)
    return [
        full,
        *_minimum(roof, balanced),
        *_rain_on_snow(roof, balanced),
        *_unbalanced(roof, site, balanced),
        *_eaves(roof, balanced),
    ]


def _balanced(roof: Roof, site: Site, edition: str) -> _Balanced:
    clause = f"ASCE {edition}, "
    p_g = number(site, "ground_snow", clause + "7.2")
    risk = word(site, "risk_category", ("I", "II", "III", "IV"), clause + "Table 1.5-1")
    terrain_key = "exposure" if site.get("snow_terrain") is None else "snow_terrain"
    terrain = word(site, terrain_key, TERRAINS, clause + "Table 7.3-1")
    thermal = word(site, "thermal", THERMAL, clause + "Table 7.3-2")
    slippery = word(site, "roof_surface", ("rough", "slippery"), clause + "7.4") == "slippery"
    r_value = optional_number(site, "roof_r_value")

    C_e = exposure_factor(edition, terrain, word(site, "snow_exposure", EXPOSURES, clause + "Table 7.3-1"))
    C_t = thermal_factor(edition, thermal, p_g, r_value)
    I_s = importance_factor(edition, risk)
    p_f = flat_roof_snow(p_g, C_e=C_e, C_t=C_t, I_s=I_s)
    panel = slope_panel(edition, C_t)
    C_s = slope_factor(edition, roof.slope, panel, slippery=slippery and may_slide(edition, panel, thermal, r_value))
    importance = (
        [Value(symbol="I_s", value=I_s, kind="factor", clause=clause + "Table 1.5-2")] if edition == "7-16" else []
    )
    values = (
        Value(symbol="p_g", value=p_g, kind="pressure", clause=clause + "7.2"),
        Value(symbol="C_e", value=C_e, kind="factor", clause=clause + "Table 7.3-1"),
        Value(symbol="C_t", value=C_t, kind="factor", clause=clause + _thermal_clause(edition, thermal, r_value)),
        *importance,
        Value(symbol="p_f", value=p_f, kind="pressure", clause=clause + "eq. 7.3-1"),
        Value(symbol="C_s", value=C_s, kind="factor", clause=clause + f"Fig. 7.4-1, panel {panel}"),
        Value(symbol="p_s", value=C_s * p_f, kind="pressure", clause=clause + "eq. 7.4-1"),
    )
    return _Balanced(
        edition=edition,
        risk_category=risk,
        thermal=thermal,
        r_value=r_value,
        p_g=p_g,
        I_s=I_s,
        p_f=p_f,
        p_s=np.asarray(C_s * p_f),
        values=values,
    )


def _thermal_clause(edition: str, thermal: str, r_value: float | None) -> str:
    if edition == "7-22" and thermal in ("unventilated", "all other"):
        return "Table 7.3-3"
    if edition == "7-16" and thermal == "ventilated attic" and r_value is None:
        return "Table 7.3-2 (attic floor taken as better than R-25)"
    return "Table 7.3-2"


def _minimum(roof: Roof, balanced: _Balanced) -> list[ActionCase]:
    """Minimum snow on low slopes: a case of its own, beside nothing else of the chapter; 7-16, 7.3.4; 7-22, 7.3.3."""
    low = roof.slope < rules(balanced.edition)["low_slope"] * (1 - SAME)
    if not np.any(low):
        return []
    p_m = np.where(low, minimum_snow(balanced.edition, balanced.p_g, balanced.risk_category), 0.0)
    clause = balanced.clause("7.3.4" if balanced.edition == "7-16" else "7.3.3")
    values = (balanced.values[0], Value(symbol="p_m", value=p_m, kind="pressure", clause=clause))
    return [_case("snow, minimum", "minimum", "minimum", _uniform(EVERYWHERE, p_m), values)]


def _rain_on_snow(roof: Roof, balanced: _Balanced) -> list[ActionCase]:
    """Rain on the balanced snow of a nearly flat, wide roof; 7.10."""
    wet = rain_applies(balanced.edition, balanced.p_g, balanced.risk_category, roof.slope, roof.eave_to_ridge)
    if not np.any(wet):
        return []
    surcharge = rules(balanced.edition)["rain_surcharge"]
    p = np.where(wet, balanced.p_s + surcharge, 0.0)
    rain = Value(symbol="rain-on-snow surcharge", value=surcharge, kind="pressure", clause=balanced.clause("7.10"))
    return [
        _case("snow, rain on snow", "rain on snow", "rain on snow", _uniform(EVERYWHERE, p), (*balanced.values, rain))
    ]


def _unbalanced(roof: Roof, site: Site, balanced: _Balanced) -> list[ActionCase]:
    """Drift over the ridge, wind from either side; 7.6.1."""
    needed = unbalanced_applies(balanced.edition, roof.pitch)
    if not np.any(needed):
        return []
    h_d, values = _drift(roof, site, balanced)
    gamma = snow_density(balanced.p_g)
    surcharge, width = ridge_surcharge(h_d, gamma * GRAVITY, roof.pitch)
    clause = balanced.clause("7.6.1")
    values += (
        Value(symbol="gamma", value=gamma, kind="density", clause=balanced.clause("eq. 7.7-1")),
        Value(symbol="S", value=1 / np.asarray(roof.pitch), kind="ratio", clause=clause),
        Value(symbol="surcharge", value=np.where(needed, surcharge, 0.0), kind="pressure", clause=clause),
        Value(symbol="surcharge width", value=np.where(needed, width, 0.0), kind="length", clause=clause),
    )
    base = np.where(needed, balanced.p_s, 0.0)
    light = rules(balanced.edition)["windward_share"] * base
    strip = np.where(needed, surcharge, 0.0)
    return [
        _case(
            f"snow, unbalanced, wind from {windward}",
            f"unbal. {windward}",
            "unbalanced",
            (
                *_uniform((f"{windward} slope", f"{windward} tail"), light),
                *_uniform((f"{lee} slope", f"{lee} tail"), base),
                *_strip(roof, lee, strip, width),
            ),
            (*balanced.values, *values),
        )
        for windward, lee in (("left", "right"), ("right", "left"))
    ]


def _drift(roof: Roof, site: Site, balanced: _Balanced) -> tuple[Array, tuple[Value, ...]]:
    """Drift height h_d [m] with the fetch of the windward slope, and its values."""
    W = np.asarray(roof.eave_to_ridge, float)
    l_u = np.fmax(W, rules(balanced.edition)["fetch_least"])  # NaN, no least fetch, is passed over by fmax
    values: tuple[Value, ...] = (
        Value(symbol="W", value=W, kind="length", clause=balanced.clause("7.6.1")),
        Value(symbol="l_u", value=l_u, kind="length", clause=balanced.clause("7.6.1")),
    )
    if balanced.edition == "7-16":
        h_d = drift_height_16(balanced.p_g, l_u, balanced.I_s)
        source = "Fig. 7.6-1"
    else:
        W_2 = number(site, "winter_wind_parameter", balanced.clause("eq. 7.6-1"))
        values += (Value(symbol="W_2", value=W_2, kind="factor", clause=balanced.clause("7.6.1")),)
        h_d = drift_height_22(balanced.p_g, l_u, W_2)
        source = "eq. 7.6-1"
    return h_d, (*values, Value(symbol="h_d", value=h_d, kind="length", clause=balanced.clause(source)))


def _strip(roof: Roof, lee: str, pressure: Array, width: Array) -> tuple[SurfaceLoad, ...]:
    """Surcharge from the ridge down the lee side, cut at the eave; it reaches the tail only beyond the bearing."""
    half = np.asarray(roof.bearing_span / 2)
    on_slope, reach = np.minimum(width, half), np.minimum(width, roof.eave_to_ridge)
    loads = [_beside_ridge(f"{lee} slope", pressure, half, np.zeros_like(on_slope), on_slope)]
    on_tail = np.where(reach > half, pressure, 0.0)
    if np.any(on_tail):
        loads.append(_beside_ridge(f"{lee} tail", on_tail, half, half, np.maximum(reach, half)))
    return tuple(loads)


def _beside_ridge(surface: str, pressure: Array, ridge: Array, near: Array, far: Array) -> SurfaceLoad:
    """Load on a stretch given by its distances from the ridge."""
    x_from, x_to = (ridge + near, ridge + far) if surface.startswith("right") else (ridge - far, ridge - near)
    return SurfaceLoad(surface=surface, kind="plan", pressure=pressure, x_from=x_from, x_to=x_to)


def _eaves(roof: Roof, balanced: _Balanced) -> list[ActionCase]:
    """Ice on the overhangs of a warm roof, beside dead load only; 7-16, 7.4.5; 7-22, 7.4.4."""
    bearing = roof.span - roof.bearing_span
    hangs_over = np.asarray(roof.overhang > bearing / 2 * (1 + SAME))
    if not eaves_carry_ice(balanced.edition, balanced.thermal, balanced.r_value) or not np.any(hangs_over):
        return []
    p = np.where(hangs_over, rules(balanced.edition)["eave_factor"] * balanced.p_f, 0.0)
    clause = balanced.clause("7.4.5" if balanced.edition == "7-16" else "7.4.4")
    values = (*balanced.values, Value(symbol="2 p_f", value=p, kind="pressure", clause=clause))
    return [_case("snow, ice at the eaves", "eaves", "eave", _uniform(TAILS, p), values)]


def _uniform(surfaces: tuple[str, ...], pressure: Array) -> tuple[SurfaceLoad, ...]:
    return tuple(SurfaceLoad(surface=surface, kind="plan", pressure=np.asarray(pressure)) for surface in surfaces)


def _case(name: str, short: str, pattern: str, loads: tuple[SurfaceLoad, ...], values: tuple[Value, ...]) -> ActionCase:
    return ActionCase(name=name, short=short, action="S", pattern=pattern, loads=loads, values=values)
