"""Wind cases of a truss under a duopitch roof to EN 1991-1-4:2005+A1:2010.

Zones are strips over the truss, laid in plan from the windward eave. The underside of a tail takes the pressure of the
wall below it (7.2.1(3)), the rest of the roof the internal pressure. c_s c_d = 1 (6.2(1)a)); friction (7.5) is left
out.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.errors import OutOfScopeError
from rooftruss.loads.national_en1991 import chosen
from rooftruss.loads.roof import ActionCase, Roof, Site, SurfaceLoad, Value
from rooftruss.loads.site import number, optional_number, word
from rooftruss.loads.snow_en1991 import has_tail
from rooftruss.loads.wind_en1991_factors import (
    constant,
    flat_coefficient,
    peak_velocity_pressure,
    roof_coefficient,
    wall_coefficient,
)

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]
SURFACES = {  # from the windward eave to the leeward eave
    "left": ("left tail", "left slope", "right slope", "right tail"),
    "right": ("right tail", "right slope", "left slope", "left tail"),
}
LINES = {"interior": ("H", "I"), "edge": ("F", "H"), "both": ("F", "H", "I")}  # zones met by wind along the ridge
INTERNAL = (("+i", "c_pi_over"), ("-i", "c_pi_under"))  # overpressure, underpressure inside
TERRAINS = ("0", "I", "II", "III", "IV")
NEGLIGIBLE = 1e-9  # [m] no strip


@dataclass(frozen=True, slots=True, kw_only=True)
class _Wind:
    """What all wind cases of a batch share, arrays (...,)."""

    roof: Roof
    tail: Array  # plan width of each part from the eave: tail, slope, slope, tail
    width: Array  # eave to eave
    slope: Array
    span: Array
    q_p: Array
    height: float
    length: float  # of the building along the ridge
    area: Array  # loaded area
    line: str  # "interior", "edge" (next to a gable) or "both"
    c_pi: tuple[float, ...]  # overpressure and underpressure inside
    values: tuple[Value, ...]

    def internal(self, c_pi: float) -> Array:
        """c_pi as an array of the batch."""
        return np.full_like(self.width, c_pi)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Pattern:
    """External pressures of one direction of wind over the truss."""

    name: str
    short: str
    side: str  # from which the strips are laid
    stops: tuple[Array, ...]  # ends of the strips from the windward eave, one more than zones
    zones: tuple[str, ...]
    c_pe: tuple[Array, ...]
    walls: tuple[Array, Array]  # c_pe of the walls below the first and the last tail
    here: Flags  # trusses of the batch that have this pattern


@dataclass(frozen=True, slots=True, kw_only=True)
class Strip:
    """A strip of roof between two plan distances from the windward eave, under one net pressure [Pa]."""

    start: Array
    end: Array
    pressure: Array


def wind_cases(roof: Roof, site: Site) -> list[ActionCase]:
    """Wind cases (action W) of one roof or a batch; none where the wind velocity is zero.

    Wind across the ridge from the left and from the right: all zones of the windward slope at their smaller or larger
    values with all of the leeward slope at theirs (four patterns up to 45 deg, one above: 7.2.5, note 1 to Table 7.4a;
    two under 5 deg: 7.2.3). Wind along the ridge: a truss in zone H and one in zone I. Each with internal overpressure
    and underpressure (7.2.9).

    Site keys: basic_wind_velocity v_b,0 [m/s], direction_factor, season_factor, terrain, orography_factor, air_density,
    building_height (to the ridge) [m], building_length [m], national_choices; optional peak_velocity_pressure q_p [Pa],
    in the place of what follows from the first six; wind_loaded_area [m2], else the roof area of one truss; c_pi_over
    and c_pi_under, else 7.2.9(6) note 2; truss_line "interior", "edge" (next to a gable: zones F and G) or "both" (a
    mark that stands in either). Raises JobError for a missing value, OutOfScopeError with the clause for a building of
    15 m or more, a slope over 75 deg and an annex with its own wind profile.
    """
    velocity = number(site, "basic_wind_velocity", "EN 1991-1-4, 4.2")
    if velocity == 0.0 and not optional_number(site, "peak_velocity_pressure"):
        return []
    wind = _wind(roof, site)
    patterns = [*_across(wind, "left"), *_across(wind, "right"), *_along(wind)]
    return [case for pattern in patterns for case in _cases(wind, pattern)]


def _wind(roof: Roof, site: Site) -> _Wind:
    height = number(site, "building_height", "EN 1991-1-4, 7.2.5")
    if height >= constant("cscd_height"):
        raise OutOfScopeError(
            f"[site] building_height {height:.1f} m: c_s c_d = 1 holds below 15 m (EN 1991-1-4, 6.2(1)a)); taller "
            "buildings need the detailed procedure of 6.3, which is not covered"
        )
    q_p, values = _velocity_pressure(site, height)
    width = np.asarray(2 * roof.eave_to_ridge, dtype=float)
    area = np.asarray(roof.spacing * width / np.cos(roof.slope), dtype=float)
    given = optional_number(site, "wind_loaded_area")
    area = area if given is None else np.full_like(area, given)
    return _Wind(
        roof=roof,
        tail=np.broadcast_to(roof.overhang, width.shape),
        width=width,
        slope=np.broadcast_to(roof.slope, width.shape),
        span=np.broadcast_to(roof.span, width.shape),
        q_p=np.full_like(width, q_p),
        height=height,
        length=number(site, "building_length", "EN 1991-1-4, 7.2.5"),
        area=area,
        line=str(site.get("truss_line") or "interior"),
        c_pi=tuple(_internal(site, key) for _, key in INTERNAL),
        values=(*values, Value(symbol="A", value=area, kind="roof area", clause="EN 1991-1-4, 7.2.1(1)")),
    )


def _internal(site: Site, key: str) -> float:
    """Internal coefficient of the site, the one of 7.2.9(6) note 2 (no dominant opening) where it gives none."""
    given = optional_number(site, key)
    return constant(key) if given is None else given


def _velocity_pressure(site: Site, height: float) -> tuple[float, tuple[Value, ...]]:
    """q_p at ridge height, given or computed, and the values that led to it."""
    if given := optional_number(site, "peak_velocity_pressure"):
        return given, (Value(symbol="q_p", value=given, kind="pressure", clause="as given for the site"),)
    choices = chosen(site)
    if choices.own_wind_profile:
        raise OutOfScopeError(
            f"[site] national_choices {choices.name!r}: its wind annex has its own velocity profile in the place of "
            "EN 1991-1-4, 4.3 to 4.5; give peak_velocity_pressure"
        )
    factors = [optional_number(site, key) for key in ("direction_factor", "season_factor", "orography_factor")]
    c_dir, c_season, c_o = (1.0 if f is None else f for f in factors)
    v_b = c_dir * c_season * number(site, "basic_wind_velocity", "EN 1991-1-4, 4.2")
    rho = optional_number(site, "air_density") or constant("rho")
    terrain = word(site, "terrain", TERRAINS, "EN 1991-1-4, Table 4.1")
    q_p = float(peak_velocity_pressure(v_b, height, terrain=terrain, c_o=c_o, rho=rho))
    return q_p, (
        Value(symbol="v_b", value=v_b, kind="speed", clause="EN 1991-1-4, eq. (4.1)"),
        Value(symbol="q_b", value=0.5 * rho * v_b**2, kind="pressure", clause="EN 1991-1-4, eq. (4.10)"),
        Value(symbol="q_p", value=q_p, kind="pressure", clause="EN 1991-1-4, eq. (4.8)"),
    )


def _across(wind: _Wind, side: str) -> Iterator[_Pattern]:
    """Patterns of wind across the ridge that some truss of the batch has."""
    flat = wind.slope < constant("flattest")
    both = ~flat & (wind.slope <= constant("steepest_both"))
    if np.any(flat):
        for line in ("suction", "pressure"):
            yield _flat_across(wind, side, line, flat)
    for windward in ("suction", "pressure"):
        for leeward in ("suction", "pressure"):
            here = ~flat if (windward, leeward) == ("pressure", "suction") else both
            if np.any(here):
                yield _duopitch_across(wind, side, (windward, leeward), here)


def _duopitch_across(wind: _Wind, side: str, lines: tuple[str, str], here: Flags) -> _Pattern:
    """Zones G (or F), H, J, I from the windward eave on; EN 1991-1-4, Fig. 7.8b) and Table 7.4a."""
    half, edge = wind.width / 2, np.minimum(_e_across(wind) / 10, wind.width / 2)
    zones = ("F" if wind.line != "interior" else "G", "H", "J", "I")
    slope = np.where(here, wind.slope, constant("flattest"))
    line_of = (lines[0], lines[0], lines[1], lines[1])
    return _Pattern(
        name=f"wind from the {side}, {lines[0]}/{lines[1]}",
        short=f"{side} {lines[0][0]}/{lines[1][0]}",
        side=side,
        stops=(0 * half, edge, half, half + edge, wind.width),
        zones=zones,
        c_pe=tuple(roof_coefficient("across", z, slope, wind.area, v) for z, v in zip(zones, line_of, strict=True)),
        walls=_walls_across(wind),
        here=here,
    )


def _flat_across(wind: _Wind, side: str, line: str, here: Flags) -> _Pattern:
    """Zones G (or F), H, I from the windward eave on, I of either sign; EN 1991-1-4, Fig. 7.6 and Table 7.2."""
    e = _e_across(wind)
    zones = ("F" if wind.line != "interior" else "G", "H", "I")
    return _Pattern(
        name=f"wind from the {side}, flat roof, {line} in zone I",
        short=f"{side} flat {line[0]}",
        side=side,
        stops=(0 * e, np.minimum(e / 10, wind.width), np.minimum(e / 2, wind.width), wind.width),
        zones=zones,
        c_pe=tuple(flat_coefficient(z, wind.area, line if z == "I" else "suction") for z in zones),
        walls=_walls_across(wind),
        here=here,
    )


def _walls_across(wind: _Wind) -> tuple[Array, Array]:
    """c_pe of the windward and the leeward wall, D and E; EN 1991-1-4, Table 7.1."""
    h_over_d = wind.height / wind.span
    return wall_coefficient("D", h_over_d), wall_coefficient("E", h_over_d)


def _e_across(wind: _Wind) -> Array:
    """e = min(b, 2h) [m], b the length of the building; EN 1991-1-4, Fig. 7.8."""
    return np.full_like(wind.width, min(wind.length, 2 * wind.height))


def _along(wind: _Wind) -> Iterator[_Pattern]:
    """Patterns of wind along the ridge: a truss in zone H or I, one next to a gable in F and G or H."""
    e = np.minimum(wind.span, 2 * wind.height)
    reach = {"F": e > 0, "H": e > 0, "I": wind.length > e / 2}
    flat = wind.slope < constant("flattest")
    for zone in LINES[wind.line]:
        if np.any(reach[zone]):
            yield _along_pattern(wind, zone, e, "suction", reach[zone])
        if zone == "I" and np.any(reach[zone] & flat):
            yield _along_pattern(wind, zone, e, "pressure", reach[zone] & flat)


def _along_pattern(wind: _Wind, zone: str, e: Array, line: str, here: Flags) -> _Pattern:
    """One zone over the whole truss, or F, G, F next to a gable; EN 1991-1-4, Fig. 7.8c) and Tables 7.2, 7.4b."""
    flat = wind.slope < constant("flattest")
    slope = np.maximum(wind.slope, constant("flattest"))
    zones = ("F", "G", "F") if zone == "F" else (zone,)
    corner = np.minimum(e / 4, wind.width / 2)
    inner = (corner, wind.width - corner) if zone == "F" else ()
    wall = _wall_along(wind, zone, e)
    word = ", pressure" if line == "pressure" else ""
    return _Pattern(
        name=f"wind along the ridge, zone {zone}{word}",
        short=f"along {zone}{word}",
        side="left",
        stops=(0 * e, *inner, wind.width),
        zones=zones,
        c_pe=tuple(
            np.where(flat, flat_coefficient(z, wind.area, line), roof_coefficient("along", z, slope, wind.area))
            for z in zones
        ),
        walls=(wall, wall),
        here=here,
    )


def _wall_along(wind: _Wind, zone: str, e: Array) -> Array:
    """c_pe of the side walls beside a truss in a roof zone: A by F, B by H, C by I where the walls reach beyond e."""
    A, B, C = (wall_coefficient(z, np.full_like(e, wind.height / wind.length)) for z in "ABC")
    return {"F": A, "H": B, "I": np.where(wind.length > e, C, B)}[zone]


def _cases(wind: _Wind, pattern: _Pattern) -> Iterator[ActionCase]:
    """The case of a pattern with internal overpressure and the one with underpressure."""
    for (short, _), c_pi in zip(INTERNAL, wind.c_pi, strict=True):
        values = [
            Value(symbol=f"c_pe, {z}", value=c, kind="ratio", clause="EN 1991-1-4, Tables 7.2 and 7.4")
            for z, c in dict(zip(pattern.zones, pattern.c_pe, strict=True)).items()
        ]
        sides = ("side",) if pattern.walls[0] is pattern.walls[1] else ("windward", "leeward")
        values += [
            Value(symbol=f"c_pe, {wall} wall", value=c, kind="ratio", clause="EN 1991-1-4, 7.2.1(3) and Table 7.1")
            for wall, c in zip(sides, pattern.walls, strict=False)
        ]
        values.append(Value(symbol="c_pi", value=c_pi, kind="ratio", clause="EN 1991-1-4, 7.2.9(6)"))
        yield ActionCase(
            name=f"{pattern.name}, c_pi {c_pi:+.2g}",
            short=f"{pattern.short}, {short}",
            action="W",
            pattern="",
            loads=tuple(_laid(wind, pattern.side, _strips(wind, pattern, c_pi))),
            values=(*wind.values, *values),
        )


def _strips(wind: _Wind, pattern: _Pattern, c_pi: float) -> list[Strip]:
    """Net pressures q_p (c_pe - c_p of the other face), cut where the walls stand; EN 1991-1-4, 5.2(3) and Fig. 7.3."""
    tail = has_tail(wind.roof)
    under = [np.where(tail, wall, c_pi) for wall in pattern.walls]
    faces = (
        (0 * wind.tail, wind.tail, under[0]),
        (wind.tail, wind.width - wind.tail, wind.internal(c_pi)),
        (wind.width - wind.tail, wind.width, under[1]),
    )
    found = []
    for start, end, c_pe in zip(pattern.stops[:-1], pattern.stops[1:], pattern.c_pe, strict=True):
        for low, high, other in faces:
            near, far = np.maximum(start, low), np.minimum(end, high)
            if np.any(far > near + NEGLIGIBLE):
                pressure = np.where(pattern.here, wind.q_p * (c_pe - other), 0.0)
                found.append(Strip(start=near, end=far, pressure=pressure))
    return found


def _laid(wind: _Wind, side: str, strips: Sequence[Strip]) -> Iterator[SurfaceLoad]:
    """Strips as loads on the surfaces they reach; without bounds where they cover a surface in the whole batch."""
    ridge = wind.width / 2
    bounds = (0 * wind.width, wind.tail, ridge, wind.width - wind.tail, wind.width)
    for strip in strips:
        near, far = strip.start, strip.end
        x_from, x_to = (near, far) if side == "left" else (wind.width - far, wind.width - near)
        for surface, low, high in zip(SURFACES[side], bounds[:-1], bounds[1:], strict=True):
            if not np.any(np.minimum(far, high) > np.maximum(near, low) + NEGLIGIBLE):
                continue
            whole = bool(np.all((near <= low + NEGLIGIBLE) & (far >= high - NEGLIGIBLE)))
            yield SurfaceLoad(
                surface=surface,
                kind="normal",
                pressure=strip.pressure,
                x_from=None if whole else x_from - wind.tail,
                x_to=None if whole else x_to - wind.tail,
            )
