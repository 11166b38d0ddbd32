"""Wind cases of a truss under a duopitch or monopitch roof to EN 1991-1-4:2005+A1:2010.

c_s c_d = 1 (6.2(1)a)); friction (7.5) is left out.
"""

import numpy as np

from rooftruss.errors import OutOfScopeError
from rooftruss.loads.national_en1991 import chosen
from rooftruss.loads.roof import MONOPITCH, ActionCase, Roof, Site, Value
from rooftruss.loads.site import number, optional_number, word
from rooftruss.loads.wind_en1991_duopitch import duopitch_patterns
from rooftruss.loads.wind_en1991_factors import constant, peak_velocity_pressure
from rooftruss.loads.wind_en1991_laying import Wind, cases_of
from rooftruss.loads.wind_en1991_monopitch import monopitch_patterns

INTERNAL = ("c_pi_over", "c_pi_under")  # overpressure, underpressure inside
TERRAINS = ("0", "I", "II", "III", "IV")


def wind_cases(roof: Roof, site: Site) -> list[ActionCase]:
    """Wind cases (action W) of one roof or a batch; none where the wind velocity is zero.

    The patterns of a duopitch (7.2.5) are those of loads.wind_en1991_duopitch, those of a monopitch (7.2.4) those of
    loads.wind_en1991_monopitch. Each comes with internal overpressure and underpressure (7.2.9).

    Site keys: basic_wind_velocity v_b,0 [m/s], direction_factor, season_factor, terrain, orography_factor, air_density,
    building_height (to the highest point) [m], building_length [m], national_choices; optional peak_velocity_pressure
    q_p [Pa], in the place of what follows from the first six; wind_loaded_area [m2], else the roof area of one truss;
    c_pi_over and c_pi_under, else 7.2.9(6) note 2; truss_line "interior", "edge" (next to a gable: zones F and G) or
    "both" (a mark that stands in either). Raises JobError for a missing value, OutOfScopeError with the clause for a
    building of 15 m or more, a slope over 75 deg and an annex with its own wind profile.
    """
    velocity = number(site, "basic_wind_velocity", "EN 1991-1-4, 4.2")
    if velocity == 0.0 and not optional_number(site, "peak_velocity_pressure"):
        return []
    wind = _wind(roof, site)
    patterns = monopitch_patterns(wind) if roof.form == MONOPITCH else duopitch_patterns(wind)
    return cases_of(wind, patterns)


def _wind(roof: Roof, site: Site) -> Wind:
    height = number(site, "building_height", "EN 1991-1-4, 7.2")
    if height >= constant("cscd_height"):
        raise OutOfScopeError(
            f"[site] building_height {height:.1f} m: c_s c_d = 1 holds below 15 m (EN 1991-1-4, 6.2(1)a)); taller "
            "buildings need the detailed procedure of 6.3, which is not covered"
        )
    q_p, values = _velocity_pressure(site, height)
    left, right = roof.tails
    width = np.asarray(roof.bearing_span + left + right, dtype=float)
    area = np.asarray(roof.spacing * width / np.cos(roof.slope), dtype=float)
    given = optional_number(site, "wind_loaded_area")
    area = area if given is None else np.full_like(area, given)
    return Wind(
        roof=roof,
        tails=(np.broadcast_to(left, width.shape), np.broadcast_to(right, width.shape)),
        width=width,
        slope=np.broadcast_to(roof.slope, width.shape),
        span=np.broadcast_to(roof.span, width.shape),
        q_p=np.full_like(width, q_p),
        height=height,
        length=number(site, "building_length", "EN 1991-1-4, 7.2"),
        area=area,
        line=str(site.get("truss_line") or "interior"),
        c_pi=tuple(_internal(site, key) for key in INTERNAL),
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
