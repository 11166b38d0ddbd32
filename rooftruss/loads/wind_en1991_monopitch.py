"""Wind patterns over a truss under a monopitch roof; EN 1991-1-4:2005+A1:2010, 7.2.4."""

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.tables import read_table
from rooftruss.loads.roof import SIDES
from rooftruss.loads.wind_en1991_factors import constant, covered_slope, has_both_lines, is_flat, on_line
from rooftruss.loads.wind_en1991_laying import Flags, Pattern, Wind, along, flat_across, walls_across

Array = NDArray[np.float64]
Number = Array | float


def monopitch_coefficient(direction: str, zone: str, slope: Number, area: Number, line: str = "suction") -> Array:
    """External pressure coefficient [-] of a zone of a monopitch roof; EN 1991-1-4:2005, Tables 7.3a and 7.3b.

    direction: "low eave" (theta = 0), "high eave" (180) or "along" the eaves (90); zone "F", "G", "H", along the eaves
    "F_up", "F_low", "G", "H", "I"; slope [rad] and loaded area [m2] (...,); line: "suction" or "pressure", the smaller
    or the larger line at the low eave, the only place that has two. Linear in the slope between values of the same
    line; beyond the last value of a line that value is held. Raises OutOfScopeError for slopes under 5 deg (flat roofs,
    7.2.3) or above 75 deg.

    >>> float(monopitch_coefficient("low eave", "G", np.radians(20.0), 10.0).round(3))
    -0.7
    >>> float(monopitch_coefficient("along", "F_up", np.radians(15.0), 10.0))
    -2.4
    """
    slope = covered_slope(slope, "7.2.4 and Table 7.3")
    rows = [r for r in read_table("wind/monopitch_en1991").rows if (r["direction"], r["zone"]) == (direction, zone)]
    return on_line(rows, line, slope, area)


def monopitch_patterns(wind: Wind) -> Iterator[Pattern]:
    """Patterns that some truss of the batch has: onto the low eave with both sign cases, onto the high eave, along the
    eaves; EN 1991-1-4, 7.2.4(1) to (3). Slopes under 5 deg have the zones of flat roofs (7.2.3).
    """
    flat = is_flat(wind.slope)
    low = wind.roof.low
    high = SIDES[1 - SIDES.index(low)]
    for side in (low, high):
        if np.any(flat):
            for line in ("suction", "pressure"):
                yield flat_across(wind, side, line, here=flat)
    both = ~flat & has_both_lines(wind.slope)
    for line, here in (("suction", both), ("pressure", ~flat)):
        if np.any(here):
            yield _across(wind, low, "low eave", line, here)
    if np.any(~flat):
        yield _across(wind, high, "high eave", "suction", ~flat)
    yield from along(
        wind,
        what="eaves",
        corners=("F_low", "G", "F_up") if low == SIDES[0] else ("F_up", "G", "F_low"),
        coefficient=lambda zone, slope: monopitch_coefficient("along", zone, slope, wind.area),
        tables="Tables 7.2 and 7.3b",
    )


def _across(wind: Wind, side: str, eave: str, line: str, here: Flags) -> Pattern:
    """Zones G (or F), H from the windward eave on; EN 1991-1-4, Fig. 7.7b) and Table 7.3a."""
    zones = (wind.corner, "H")
    slope = np.where(here, wind.slope, constant("flattest"))
    signs = f", {line}" if eave == "low eave" else ""
    return Pattern(
        name=f"wind from the {side} onto the {eave}{signs}",
        short=f"{side} {eave.split()[0]}{signs and f' {line[0]}'}",
        side=side,
        stops=(0 * wind.width, np.minimum(wind.e_across / 10, wind.width), wind.width),
        zones=zones,
        c_pe=tuple(monopitch_coefficient(eave, z, slope, wind.area, line) for z in zones),
        tables="Table 7.3a",
        walls=walls_across(wind),
        here=here,
    )
