"""Zones of wind laid on the trusses of a batch, EN 1991-1-4:2005+A1:2010, for roofs of any form.

Zones are strips over the truss, laid in plan from the windward eave. The underside of a tail takes the pressure of the
wall below it (7.2.1(3)), the rest of the roof the internal pressure.
"""

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from rooftruss.loads.roof import SIDES, ActionCase, Roof, SurfaceLoad, Value
from rooftruss.loads.snow_en1991 import has_tail
from rooftruss.loads.wind_en1991_factors import constant, flat_coefficient, is_flat, wall_coefficient

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]
INTERNAL = ("+i", "-i")  # overpressure, underpressure inside
LINES = {"interior": ("H", "I"), "edge": ("F", "H"), "both": ("F", "H", "I")}  # zones met by wind along the ridge
NEGLIGIBLE = 1e-9  # [m] no strip


@dataclass(frozen=True, slots=True, kw_only=True)
class Wind:
    """What all wind cases of a batch share, arrays (...,)."""

    roof: Roof
    tails: tuple[Array, Array]  # plan width of roof outside the left and the right bearing centre
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

    @property
    def e_across(self) -> Array:
        """e = min(b, 2h) [m] of wind on an eave, b the length of the building; EN 1991-1-4, Fig. 7.6 to 7.8."""
        return np.full_like(self.width, min(self.length, 2 * self.height))

    @property
    def e_along(self) -> Array:
        """e = min(b, 2h) [m] of wind on a gable, b the span; EN 1991-1-4, Fig. 7.6 to 7.8."""
        return np.minimum(self.span, 2 * self.height)

    @property
    def corner(self) -> str:
        """Zone behind the windward eave: F next to a gable, else G."""
        return "G" if self.line == "interior" else "F"


@dataclass(frozen=True, slots=True, kw_only=True)
class Pattern:
    """External pressures of one direction of wind over the truss."""

    name: str
    short: str
    side: str  # from which the strips are laid
    stops: tuple[Array, ...]  # ends of the strips from the windward eave, one more than zones
    zones: tuple[str, ...]
    c_pe: tuple[Array, ...]
    tables: str  # of the coefficients
    walls: tuple[Array, Array]  # c_pe of the walls below the first and the last tail
    here: Flags  # trusses of the batch that have this pattern


@dataclass(frozen=True, slots=True, kw_only=True)
class Piece:
    """The part of a zone over one face (near tail, inside, far tail) on one surface, and its bounds [m]."""

    zone: int
    face: int
    surface: str
    x_from: Array | None
    x_to: Array | None


def walls_across(wind: Wind) -> tuple[Array, Array]:
    """c_pe of the windward and the leeward wall, D and E; EN 1991-1-4, Table 7.1."""
    h_over_d = wind.height / wind.span
    return wall_coefficient("D", h_over_d), wall_coefficient("E", h_over_d)


def _wall_along(wind: Wind, zone: str) -> Array:
    """c_pe of the side walls beside a truss in a roof zone: A by F, B by H, C by I where the walls reach beyond e."""
    e = wind.e_along
    A, B, C = (wall_coefficient(z, np.full_like(e, wind.height / wind.length)) for z in "ABC")
    return {"F": A, "H": B, "I": np.where(wind.length > e, C, B)}[zone]


def flat_across(wind: Wind, side: str, line: str, *, here: Flags) -> Pattern:
    """Zones G (or F), H, I from the windward eave on, I of either sign; EN 1991-1-4, Fig. 7.6 and Table 7.2."""
    e, zones = wind.e_across, (wind.corner, "H", "I")
    return Pattern(
        name=f"wind from the {side}, flat roof, {line} in zone I",
        short=f"{side} flat {line[0]}",
        side=side,
        stops=(0 * e, np.minimum(e / 10, wind.width), np.minimum(e / 2, wind.width), wind.width),
        zones=zones,
        c_pe=tuple(flat_coefficient(z, wind.area, line if z == "I" else "suction") for z in zones),
        tables="Table 7.2",
        walls=walls_across(wind),
        here=here,
    )


def along(
    wind: Wind, *, what: str, corners: tuple[str, str, str], coefficient: Callable[[str, Array], Array], tables: str
) -> Iterator[Pattern]:
    """Patterns of wind along the "ridge" or the "eaves": a truss in zone H or I, one next to a gable in the corners
    (their zones from left to right) or in H; EN 1991-1-4, Fig. 7.7c) and 7.8c). coefficient: c_pe of (zone, slope).
    """
    e, flat = wind.e_along, is_flat(wind.slope)
    reach = {"F": e > 0, "H": e > 0, "I": wind.length > e / 2}
    slope = np.maximum(wind.slope, constant("flattest"))
    edge = np.minimum(e / 4, wind.width / 2)
    for zone in LINES[wind.line]:
        zones = corners if zone == "F" else (zone,)
        wall = _wall_along(wind, zone)
        for line, here in (("suction", reach[zone]), ("pressure", reach[zone] & flat & (zone == "I"))):
            if not np.any(here):
                continue
            word = ", pressure" if line == "pressure" else ""
            yield Pattern(
                name=f"wind along the {what}, zone {zone}{word}",
                short=f"along {zone}{word}",
                side=SIDES[0],
                stops=(0 * e, *((edge, wind.width - edge) if zone == "F" else ()), wind.width),
                zones=zones,
                c_pe=tuple(
                    np.where(flat, flat_coefficient(z[0], wind.area, line), coefficient(z, slope)) for z in zones
                ),
                tables=tables,
                walls=(wall, wall),
                here=here,
            )


def cases_of(wind: Wind, patterns: Iterable[Pattern]) -> list[ActionCase]:
    """Two cases of every pattern, with internal overpressure and with underpressure.

    Patterns that share their stops (the same arrays) differ in pressures only: their strips are laid once.
    """
    laid: dict[tuple[object, ...], tuple[Piece, ...]] = {}
    found: list[ActionCase] = []
    every = list(patterns)  # kept until the end, so that no two stops can have one id
    for pattern in every:
        key = (pattern.side, *(id(stop) for stop in pattern.stops))
        if key not in laid:
            laid[key] = tuple(_pieces(wind, pattern.side, pattern.stops))
        found += _two_cases(wind, pattern, laid[key])
    return found


def _two_cases(wind: Wind, pattern: Pattern, pieces: Sequence[Piece]) -> Iterator[ActionCase]:
    external = [
        Value(symbol=f"c_pe, {z}", value=c, kind="ratio", clause=f"EN 1991-1-4, {pattern.tables}")
        for z, c in dict(zip(pattern.zones, pattern.c_pe, strict=True)).items()
    ]
    sides = ("side",) if pattern.walls[0] is pattern.walls[1] else ("windward", "leeward")
    external += [
        Value(symbol=f"c_pe, {wall} wall", value=c, kind="ratio", clause="EN 1991-1-4, 7.2.1(3) and Table 7.1")
        for wall, c in zip(sides, pattern.walls, strict=False)
    ]
    for short, c_pi in zip(INTERNAL, wind.c_pi, strict=True):
        inside = Value(symbol="c_pi", value=c_pi, kind="ratio", clause="EN 1991-1-4, 7.2.9(6)")
        yield ActionCase(
            name=f"{pattern.name}, c_pi {c_pi:+.2g}",
            short=f"{pattern.short}, {short}",
            action="W",
            pattern="",
            loads=tuple(_under_pressure(wind, pattern, c_pi, pieces)),
            values=(*wind.values, *external, inside),
        )


def _pieces(wind: Wind, side: str, stops: Sequence[Array]) -> Iterator[Piece]:
    """Zones between their stops, cut where the walls stand, on the surfaces they reach.

    Without bounds where they cover a surface in the whole batch.
    """
    from_left, eave = side == SIDES[0], wind.tails[0]
    near_tail, far_tail = wind.tails if from_left else wind.tails[::-1]
    walls = (0 * near_tail, near_tail, wind.width - far_tail, wind.width)
    surfaces = wind.roof.surfaces if from_left else wind.roof.surfaces[::-1]
    for zone, (start, end) in enumerate(pairwise(stops)):
        for face, (low, high) in enumerate(pairwise(walls)):
            near, far = np.maximum(start, low), np.minimum(end, high)
            if not np.any(far > near + NEGLIGIBLE):
                continue
            x_from = near - eave if from_left else wind.width - far - eave
            x_to = far - eave if from_left else wind.width - near - eave
            for surface, first, last in surfaces:
                if np.any(np.minimum(x_to, last) > np.maximum(x_from, first) + NEGLIGIBLE):
                    whole = bool(np.all((x_from <= first + NEGLIGIBLE) & (x_to >= last - NEGLIGIBLE)))
                    bounds = (None, None) if whole else (x_from, x_to)
                    yield Piece(zone=zone, face=face, surface=surface, x_from=bounds[0], x_to=bounds[1])


def _under_pressure(wind: Wind, pattern: Pattern, c_pi: float, pieces: Sequence[Piece]) -> Iterator[SurfaceLoad]:
    """Net pressures q_p (c_pe - c_p of the other face) on the pieces; EN 1991-1-4, 5.2(3) and Fig. 7.3."""
    order = SIDES if pattern.side == SIDES[0] else SIDES[::-1]
    under = [np.where(has_tail(wind.roof, side), wall, c_pi) for side, wall in zip(order, pattern.walls, strict=True)]
    faces = (under[0], c_pi, under[1])
    pressures = {
        (zone, face): np.where(pattern.here, wind.q_p * (pattern.c_pe[zone] - faces[face]), 0.0)
        for zone, face in dict.fromkeys((piece.zone, piece.face) for piece in pieces)
    }
    for piece in pieces:
        pressure = pressures[piece.zone, piece.face]
        yield SurfaceLoad(surface=piece.surface, kind="normal", pressure=pressure, x_from=piece.x_from, x_to=piece.x_to)
