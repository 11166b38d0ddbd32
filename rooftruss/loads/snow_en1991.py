"""Snow on duopitch and monopitch roofs to EN 1991-1-3:2003+A1:2015: undrifted, drifted, over the eaves, exceptional."""

from collections.abc import Sequence
from typing import cast

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.tables import read_table
from rooftruss.errors import OutOfScopeError
from rooftruss.loads.national_en1991 import chosen
from rooftruss.loads.parts import HALVES, whole_roof
from rooftruss.loads.roof import MONOPITCH, SIDES, ActionCase, Roof, Site, SurfaceLoad, Value
from rooftruss.loads.site import number, optional_number

Array = NDArray[np.float64]
Number = Array | float
WORDS = {"S": ("snow", "s_k", "4.1", "5.1"), "A": ("exceptional snow", "s_Ad", "4.3", "5.2")}
DRIFTS = (  # pattern, words and short of the arrangements (i), (ii), (iii)
    ("undrifted", "undrifted", "undrifted"),
    ("drifted", "drifted, less on the left slope", "less left"),
    ("drifted", "drifted, less on the right slope", "less right"),
)
EDGE = 0.1  # share of a tail over which the load along its edge is spread: a line load is not a surface load


def _constant(name: str) -> float:
    return cast(float, read_table("snow/constants_en1991").rows[0][name])


def shape_coefficient(slope: Number, symbol: str = "mu_1", *, guarded: bool = False) -> Array:
    """Shape coefficient mu_1 or mu_2 [-] of a slope [rad] (...,); EN 1991-1-3:2003, Table 5.2, 5.3.2(2) and 5.3.3(2).

    guarded: guards, a parapet or the like keep snow from sliding off; mu_1 is then not below 0.8.
    Raises OutOfScopeError where the table has no value: outside 0 to 90 deg, and mu_2 from 60 deg on.

    >>> float(shape_coefficient(np.radians(45.0)).round(3)), float(shape_coefficient(np.radians(45.0), guarded=True))
    (0.4, 0.8)
    """
    table = read_table("snow/shape_en1991")
    pairs = [(cast(float, row["slope"]), cast(float, row[symbol])) for row in table.rows]
    at, mu = zip(*(pair for pair in pairs if np.isfinite(pair[1])), strict=True)
    slope = np.asarray(slope, dtype=float)
    if np.any(slope < at[0]) or np.any(slope > at[-1] + 1e-12):
        raise OutOfScopeError(
            f"roof slope {np.degrees(np.max(np.abs(slope))):.1f} deg; EN 1991-1-3, Table 5.2 gives {symbol} from "
            f"{np.degrees(at[0]):.0f} to {np.degrees(at[-1]):.0f} deg"
        )
    found: Array = np.interp(slope, at, mu)
    return np.maximum(found, _constant("mu_guarded")) if guarded else found


def roof_snow(mu: Number, *, exposure: Number, thermal: Number, ground: Number) -> Number:
    """Snow load on the roof s [Pa, on plan]; EN 1991-1-3:2003, eq. (5.1), with s_Ad for `ground` eq. (5.2).

    >>> round(float(roof_snow(0.8, exposure=1.0, thermal=1.0, ground=650.0)))
    520
    """
    return mu * exposure * thermal * ground


def arrangements(left: Number, right: Number) -> tuple[tuple[Number, Number], ...]:
    """Loads on the (left, right) slope, undrifted (i) and drifted (ii), (iii); EN 1991-1-3:2003, 5.3.3 and Fig. 5.3.

    >>> arrangements(0.96, 0.48)
    ((0.96, 0.48), (0.48, 0.48), (0.96, 0.24))
    """
    share = _constant("drift_share")
    return ((left, right), (share * left, right), (left, share * right))


def overhang_load(s: Number) -> Number:
    """Snow hanging over the eaves s_e [N per m of eaves] of an undrifted roof load s [Pa]; EN 1991-1-3:2003, 6.3.

    s_e = k s^2 / gamma with the depth d = s / gamma, k = 3 / d and k <= d gamma (d in m, gamma in kN/m3).

    >>> round(float(overhang_load(3000.0)), 1), round(float(overhang_load(1200.0)), 1)
    (9000.0, 576.0)
    """
    gamma = _constant("overhang_density") / 1000.0  # kN/m3
    s = np.asarray(s, dtype=float) / 1000.0  # kN/m2
    depth = s / gamma
    k = np.minimum(3.0 / np.maximum(depth, 1e-12), depth * gamma)
    return k * s**2 / gamma * 1000.0


def snow_cases(roof: Roof, site: Site) -> list[ActionCase]:
    """Snow cases of a symmetric duopitch roof or a monopitch; none without ground snow.

    A duopitch has three arrangements (Fig. 5.3), a monopitch one, which stands for drifted and undrifted snow
    (5.3.2(3), Fig. 5.2). Snow hangs over both eaves of a duopitch, and over the low eave of a monopitch.

    Site keys: ground_snow s_k [Pa], altitude [m], exposure_coefficient, thermal_coefficient, snow_guards,
    national_choices; optional exceptional_snow s_Ad [Pa] (EN 1991-1-3, 4.3), whose cases are accidental: action "A".
    Raises OutOfScopeError above 1500 m (1.1(2)) and for slopes outside Table 5.2.
    """
    cases: list[ActionCase] = []
    if ground := number(site, "ground_snow", "EN 1991-1-3, 4.1"):
        cases += _roof_cases(roof, site, ground, "S")
        if number(site, "altitude", "EN 1991-1-3, 1.1(2)") > chosen(site).overhang_above:
            cases.append(_overhang_case(roof, cases[0]))
    if exceptional := optional_number(site, "exceptional_snow"):
        cases += _roof_cases(roof, site, exceptional, "A")
    if cases and number(site, "altitude", "EN 1991-1-3, 1.1(2)") > _constant("highest_site"):
        raise OutOfScopeError(
            f"[site] altitude {site['altitude']:.0f} m: EN 1991-1-3, 1.1(2) covers sites up to "
            f"{_constant('highest_site'):.0f} m; above it the national annex decides"
        )
    return [case for case in cases if any(np.any(load.pressure) for load in case.loads)]


def _roof_cases(roof: Roof, site: Site, ground: float, action: str) -> list[ActionCase]:
    """The arrangements for one ground load: s_k (action S) or the exceptional s_Ad (action A)."""
    mu = shape_coefficient(roof.slope, guarded=bool(site.get("snow_guards", False)))
    given = (optional_number(site, key) for key in ("exposure_coefficient", "thermal_coefficient"))
    C_e, C_t = (1.0 if c is None else c for c in given)
    s = roof_snow(mu, exposure=C_e, thermal=C_t, ground=ground)
    word, symbol, clause, eq = WORDS[action]
    shared = (
        Value(symbol=symbol, value=ground, kind="pressure", clause=f"EN 1991-1-3, {clause}"),
        Value(symbol="mu_1", value=mu, kind="ratio", clause="EN 1991-1-3, Table 5.2"),
        Value(symbol="C_e", value=C_e, kind="ratio", clause="EN 1991-1-3, 5.2(7)"),
        Value(symbol="C_t", value=C_t, kind="ratio", clause="EN 1991-1-3, 5.2(8)"),
    )
    if roof.form == MONOPITCH:
        whole = Value(symbol="s", value=s, kind="pressure", clause=f"EN 1991-1-3, eq. ({eq}) and 5.3.2(3)")
        return [
            ActionCase(
                name=f"{word}, undrifted or drifted",
                short="one slope",
                action=action,
                pattern="undrifted",
                loads=whole_roof(s),
                values=(*shared, whole),
            )
        ]
    return _drift_cases(s, action, shared)


def _drift_cases(s: Number, action: str, shared: Sequence[Value]) -> list[ActionCase]:
    """The three arrangements of Fig. 5.3 of a roof load s [Pa]."""
    word, _, _, eq = WORDS[action]
    made = []
    for (left, right), (pattern, drift, short) in zip(arrangements(s, s), DRIFTS, strict=True):
        sides = tuple(
            Value(symbol=f"s, {side}", value=p, kind="pressure", clause=f"EN 1991-1-3, eq. ({eq}) and Fig. 5.3")
            for side, p in zip(SIDES, (left, right), strict=True)
        )
        loads = (*_on(HALVES["left"], left), *_on(HALVES["right"], right))
        made.append(
            ActionCase(
                name=f"{word}, {drift}",
                short=short,
                action=action,
                pattern=pattern,
                loads=loads,
                values=(*shared, *sides),
            )
        )
    return made


def _on(surfaces: Sequence[str], pressure: Number) -> list[SurfaceLoad]:
    return [SurfaceLoad(surface=s, kind="plan", pressure=np.asarray(pressure, dtype=float)) for s in surfaces]


def has_tail(roof: Roof, side: str) -> NDArray[np.bool_]:
    """Whether the roof reaches beyond the wall of a side, and not only over the outer half of the bearing."""
    half_bearing = (np.asarray(roof.span) - roof.bearing_span) / 2
    return np.asarray(roof.tails[SIDES.index(side)] > half_bearing + 1e-6)


def _overhang_case(roof: Roof, undrifted: ActionCase) -> ActionCase:
    """The undrifted case with snow hanging over both eaves, of a monopitch over the low one; EN 1991-1-3, 6.3."""
    s = next(load.pressure for load in undrifted.loads)
    s_e = np.asarray(overhang_load(s))
    single = roof.form == MONOPITCH
    edges = (_edge(roof, side, s_e) for side in ((roof.low,) if single else SIDES))
    shown = Value(symbol="s_e", value=s_e, kind="line load", clause="EN 1991-1-3, 6.3, eq. (6.4)")
    return ActionCase(
        name=f"{undrifted.name}, hanging over the {'low eave' if single else 'eaves'}",
        short=f"over the {'low eave' if single else 'eaves'}",
        action="S",
        pattern="overhang",
        loads=(*undrifted.loads, *edges),
        values=(*undrifted.values, shown),
    )


def _edge(roof: Roof, side: str, s_e: Array) -> SurfaceLoad:
    """The load along an eave [N/m], spread over the last tenth of its tail and raised so that its moment at the bearing
    stays. An eave without a tail has it spread over what there is outside the bearing centre.
    """
    outer = np.maximum(roof.tails[SIDES.index(side)], 1e-9)
    tail = has_tail(roof, side)
    width = np.where(tail, EDGE * outer, outer)
    pressure = s_e / width * np.where(tail, 1 / (1 - EDGE / 2), 1.0)
    end = np.asarray(roof.bearing_span, dtype=float) + outer
    low, high = (-outer, width - outer) if side == SIDES[0] else (end - width, end)
    return SurfaceLoad(surface=f"{side} tail", kind="plan", pressure=pressure, x_from=low, x_to=high)
