"""Wind cases of a gable truss after ASCE 7-16 or 7-22, chapter 27 (directional procedure, main wind-force system).

Only roof surfaces load a truss; wall pressures go to the walls. Pressures act normal to the roof, on tails from outside
only (their underside is in the open), and on the windward overhang also from below (27.3.3). All trusses get the zone
at the gable end when wind blows along the ridge, since any of them may stand there. Components and cladding (chapter
30) and the envelope procedure (chapter 28) are not covered.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise, product

import numpy as np
from numpy.typing import NDArray

from rooftruss.errors import JobError, OutOfScopeError, nearest
from rooftruss.loads.roof import ActionCase, Array, Roof, Site, SurfaceLoad, Value
from rooftruss.loads.site import number, optional_number, word
from rooftruss.loads.wind_asce7_factors import (
    EDITIONS,
    VALUES,
    distance_coefficients,
    elevation_factor,
    exposure_coefficient,
    internal_coefficient,
    net_pressure,
    rules,
    slope_coefficients,
    velocity_pressure,
)
from rooftruss.units import shown

SURFACES = ("left tail", "left slope", "right slope", "right tail")
ENCLOSURES = ("enclosed", "partially enclosed", "partially open", "open")
OTHER_SIDE = {"left": "right", "right": "left"}
STEEPNESS = 1e-9  # [rad] room for a slope of exactly 10 deg that the job states otherwise
Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Patch:
    """External coefficient on a surface or a stretch of it, in those roofs of the batch where `there` is true."""

    surface: str
    C_p: Array
    there: Bools
    x_from: Array | None = None
    x_to: Array | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Wind:
    """What all wind cases of a batch share."""

    edition: str
    h: Array  # (...,) height for h/L and q_h
    q_h: Array
    K_d: float  # of eq. 27.3-1: 1.0 in 7-16, where q_h holds it
    G: float
    GC_pi: float
    building_length: float
    building_width: Array  # across the ridge: L for wind normal to it
    hangs_over: Bools  # (...,) a tail is longer than half the bearing
    values: tuple[Value, ...]

    def clause(self, text: str) -> str:
        return f"ASCE {self.edition}, {text}"


def wind_cases(roof: Roof, site: Site, edition: str) -> list[ActionCase]:
    """Wind cases (action W) of one roof or a batch; none where the wind speed is zero.

    Site keys: wind_speed [m/s], exposure, enclosure, mean_roof_height [m], building_length [m], building_width [m]
    (optional: the span), topographic_factor,
    ground_elevation [m]. Normal to the ridge: from either side x two windward values x both signs of internal pressure
    (8); parallel to it: two values x two signs (4); least horizontal load from either side (2).
    Raises JobError for a missing value, OutOfScopeError with the clause for an open building, one over 60 ft, and one
    too slender to count as rigid.
    """
    if edition not in EDITIONS:
        raise JobError(f"wind loads of ASCE {edition} are not known; {nearest(edition, EDITIONS)}")
    if number(site, "wind_speed", f"ASCE {edition}, 26.5") == 0.0:
        return []
    wind = _wind(roof, site, edition)
    return [*_normal_to_ridge(roof, wind), *_parallel_to_ridge(wind), *_least(roof, wind)]


def _wind(roof: Roof, site: Site, edition: str) -> _Wind:
    c = f"ASCE {edition}, "
    speed = number(site, "wind_speed", c + "26.5")
    exposure = word(site, "exposure", ("B", "C", "D"), c + "26.7")
    enclosure = word(site, "enclosure", ENCLOSURES, c + "26.12")
    mean_height = number(site, "mean_roof_height", c + "27.3")
    building_length = number(site, "building_length", c + "27.3")
    K_zt = number(site, "topographic_factor", c + "26.8")
    elevation = optional_number(site, "ground_elevation")
    if elevation is None:
        raise JobError(f"[site] ground_elevation is missing; {c}26.9 asks for it (0 ft is on the safe side)")
    given_width = optional_number(site, "building_width")
    width = np.asarray(roof.span, float) if given_width is None else np.maximum(given_width, roof.span)
    _require_scope(width, edition, enclosure, mean_height, building_length)

    limits = rules(edition)
    h = reference_height(roof, mean_height, edition)
    K_h, K_e, K_d, G = (
        exposure_coefficient(edition, h, exposure),
        elevation_factor(elevation),
        limits["K_d"],
        limits["G"],
    )
    q_h = velocity_pressure(speed, K_h, K_zt=K_zt, K_e=K_e, K_d=K_d if edition == "7-16" else 1.0)
    GC_pi = internal_coefficient(edition, enclosure)
    values = (
        Value(symbol="V", value=speed, kind="speed", clause=c + "26.5"),
        Value(symbol="h", value=h, kind="length", clause=c + "26.2"),
        Value(symbol="K_h", value=K_h, kind="factor", clause=c + "Table 26.10-1, note 1"),
        Value(symbol="K_zt", value=K_zt, kind="factor", clause=c + "26.8"),
        Value(symbol="K_e", value=K_e, kind="factor", clause=c + "Table 26.9-1, note"),
        Value(symbol="K_d", value=K_d, kind="factor", clause=c + "Table 26.6-1"),
        Value(symbol="q_h", value=q_h, kind="pressure", clause=c + "eq. 26.10-1"),
        Value(symbol="G", value=G, kind="factor", clause=c + "26.11.1"),
    )
    return _Wind(
        edition=edition,
        h=h,
        q_h=q_h,
        K_d=1.0 if edition == "7-16" else K_d,
        G=G,
        GC_pi=GC_pi,
        building_length=building_length,
        building_width=width,
        hangs_over=np.asarray(roof.overhang > (roof.span - roof.bearing_span) / 2 * (1 + 1e-9)),
        values=values,
    )


def _require_scope(width: Array, edition: str, enclosure: str, height: float, length: float) -> None:
    if enclosure == "open":
        raise OutOfScopeError(
            f"ASCE {edition}, 27.3.2: free roofs of open buildings have their own coefficients, which are not covered"
        )
    for key, value in (("mean_roof_height", height), ("building_length", length)):
        if value == 0.0:
            raise JobError(f"[site] {key} is zero; give the size of the building")
    limit, slender = rules(edition)["low_rise_height"], rules(edition)["slenderness_most"]
    if height > limit * (1 + 1e-9):
        raise OutOfScopeError(
            f"ASCE {edition}, 26.11.2: a mean roof height over {shown(limit, 'length', 'US')} is no low-rise building, "
            "its gust effect factor follows from its natural frequency, which is not covered"
        )
    if np.any(height > slender * np.minimum(width, length)):
        raise OutOfScopeError(
            f"ASCE {edition}, 26.11.2: a building over {slender:g} times as high as wide may be flexible, "
            "which is not covered; where the building is wider than the truss, give [site] building_width"
        )


def reference_height(roof: Roof, mean_height: float, edition: str) -> Array:
    """Height h [m] (...,): mean roof height, the eave height where the slope is not over 10 deg; ASCE 7, 26.2.

    The eave height is taken at the wall line, half the rise of the slope below the mean roof height; the lower end of a
    tail would give less pressure. Raises JobError where the roof is higher than its mean height allows.
    """
    eave = np.asarray(mean_height - roof.pitch * roof.bearing_span / 4)
    if np.any(eave <= 0.0):
        raise JobError("[site] mean_roof_height is less than half the rise of the roof; measure it from the ground")
    flat = np.asarray(roof.slope) <= rules(edition)["zone_slope"] + STEEPNESS
    return np.where(flat, eave, mean_height)


def _normal_to_ridge(roof: Roof, wind: _Wind) -> Iterator[ActionCase]:
    """Both directions, both windward values, both internal pressures; 27.3.1 and Fig. 27.3-1."""
    steep = np.asarray(np.asarray(roof.slope) >= rules(wind.edition)["zone_slope"] - STEEPNESS)
    h_over_L = wind.h / wind.building_width
    first, second, leeward = slope_coefficients(wind.edition, roof.slope, h_over_L)
    one_value = bool(np.all(steep & (first == second)))  # from 60 deg
    for side, k in product(("left", "right"), (0, 1)):
        if k == 1 and one_value:
            continue
        windward = (first, second)[k]
        patches = [*_slopes(side, windward, leeward, steep), *_zones(roof, wind, side, k, h_over_L, ~steep)]
        values = [_ratio(wind, h_over_L)]
        if np.any(steep):
            values += [_coefficient(wind, "windward", windward, steep), _coefficient(wind, "leeward", leeward, steep)]
        if not np.all(steep):
            values += _zone_values(wind, k, h_over_L, ~steep)
        name = f"wind from {side}, {VALUES[k]} value"
        yield from _with_internal(wind, name, f"{side} {k + 1}", patches, values, soffit=f"{side} tail")


def _slopes(side: str, windward: Array, leeward: Array, steep: Bools) -> list[_Patch]:
    """Slopes from 10 deg on: one coefficient on each side of the ridge."""
    if not np.any(steep):
        return []
    return [
        _Patch(surface=f"{end} {part}", C_p=C_p, there=steep)
        for end, C_p in ((side, windward), (OTHER_SIDE[side], leeward))
        for part in ("slope", "tail")
    ]


def _zones(roof: Roof, wind: _Wind, side: str, k: int, h_over_L: Array, flat: Bools) -> list[_Patch]:
    """Slopes under 10 deg: coefficients by the distance from the windward eave, as stretches that some roof has."""
    found = []
    total = roof.bearing_span + 2 * roof.overhang
    for low, high, *both in distance_coefficients(wind.edition, h_over_L):
        near, far = (np.minimum(multiple * wind.h, total) - roof.overhang for multiple in (low, high))
        if side == "right":
            near, far = roof.bearing_span - far, roof.bearing_span - near
        for surface, (start, end) in _extents(roof).items():
            x_from, x_to = np.clip(near, start, end), np.clip(far, start, end)
            there = np.asarray(flat & (x_to > x_from))
            if np.any(there):
                found.append(_Patch(surface=surface, C_p=both[k], there=there, x_from=x_from, x_to=x_to))
    return found


def _extents(roof: Roof) -> dict[str, tuple[Array, Array]]:
    """Plan stretch of each roof surface."""
    right = np.asarray(roof.bearing_span, float)
    stops = (0.0 * right - roof.overhang, 0.0 * right, right / 2, right, right + roof.overhang)
    return dict(zip(SURFACES, pairwise(stops), strict=True))


def _parallel_to_ridge(wind: _Wind) -> Iterator[ActionCase]:
    """Wind along the ridge on a truss at the windward gable; Fig. 27.3-1, L is the length of the building."""
    h_over_L = wind.h / wind.building_length
    _, _, *both = distance_coefficients(wind.edition, h_over_L)[0]
    everywhere = np.ones_like(h_over_L, dtype=bool)
    for k, C_p in enumerate(both):
        patches = [_Patch(surface=surface, C_p=C_p, there=everywhere) for surface in SURFACES]
        values = [_ratio(wind, h_over_L), _coefficient(wind, "", C_p, everywhere)]
        yield from _with_internal(wind, f"wind along ridge, {VALUES[k]} value", f"ridge {k + 1}", patches, values)


def _with_internal(
    wind: _Wind, name: str, short: str, patches: list[_Patch], values: list[Value], soffit: str = ""
) -> Iterator[ActionCase]:
    """The two cases of an external pattern: internal pressure, internal suction; `soffit` names the windward tail."""
    below = _soffit(wind, soffit) if soffit and np.any(wind.hangs_over) else []
    if below:
        values = [
            *values,
            Value(
                symbol="C_p soffit",
                value=rules(wind.edition)["soffit_C_p"],
                kind="factor",
                clause=wind.clause("27.3.3"),
            ),
        ]
    for sign, word_for, direction in (("+i", "internal pressure", 1.0), ("-i", "internal suction", -1.0)):
        GC_pi = direction * wind.GC_pi
        internal = Value(symbol="GC_pi", value=GC_pi, kind="factor", clause=wind.clause("Table 26.13-1"))
        loads = [_pressed(wind, patch, 0.0 if patch.surface.endswith("tail") else GC_pi) for patch in patches]
        yield _case(f"{name}, {word_for}", f"{short}, {sign}", [*loads, *below], [*wind.values, *values, internal])


def _pressed(wind: _Wind, patch: _Patch, GC_pi: float) -> SurfaceLoad:
    p = np.where(patch.there, net_pressure(wind.q_h, patch.C_p, GC_pi, G=wind.G, K_d=wind.K_d), 0.0)
    return SurfaceLoad(surface=patch.surface, kind="normal", pressure=p, x_from=patch.x_from, x_to=patch.x_to)


def _soffit(wind: _Wind, tail: str) -> list[SurfaceLoad]:
    """Pressure on the underside of the windward overhang, upward, beside that on its top; 27.3.3, taken at q_h."""
    patch = _Patch(surface=tail, C_p=np.asarray(-rules(wind.edition)["soffit_C_p"]), there=wind.hangs_over)
    return [_pressed(wind, patch, 0.0)]


def _least(roof: Roof, wind: _Wind) -> Iterator[ActionCase]:
    """Least horizontal load on the vertical projection of the roof, from either side (walls carry theirs); 27.1.5."""
    least = rules(wind.edition)["least_roof_pressure"]
    p = np.full_like(np.asarray(roof.pitch, float), least)
    value = Value(symbol="p least", value=least, kind="pressure", clause=wind.clause("27.1.5"))
    for side, sign in (("left", 1.0), ("right", -1.0)):
        loads = [SurfaceLoad(surface=f"{side} {part}", kind="right", pressure=sign * p) for part in ("slope", "tail")]
        yield _case(f"wind from {side}, least load", f"least {side}", loads, [value])


def _ratio(wind: _Wind, h_over_L: Array) -> Value:
    return Value(symbol="h/L", value=h_over_L, kind="ratio", clause=wind.clause("Fig. 27.3-1"))


def _coefficient(wind: _Wind, place: str, C_p: Array, there: Bools) -> Value:
    """NaN for the roofs of a batch that do not use it."""
    C_p = np.where(there, C_p, np.nan)
    return Value(symbol=f"C_p {place}".strip(), value=C_p, kind="factor", clause=wind.clause("Fig. 27.3-1"))


def _zone_values(wind: _Wind, k: int, h_over_L: Array, flat: Bools) -> list[Value]:
    """Coefficients of the distance zones, for slopes under 10 deg."""
    return [
        _coefficient(wind, f"from {low:g}h to {high:g}h" if np.isfinite(high) else f"beyond {low:g}h", both[k], flat)
        for low, high, *both in distance_coefficients(wind.edition, h_over_L)
    ]


def _case(name: str, short: str, loads: list[SurfaceLoad], values: list[Value]) -> ActionCase:
    return ActionCase(name=name, short=short, action="W", pattern="", loads=tuple(loads), values=tuple(values))
