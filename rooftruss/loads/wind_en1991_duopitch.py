"""Wind patterns over a truss under a symmetric duopitch roof; EN 1991-1-4:2005+A1:2010, 7.2.5."""

from collections.abc import Iterator

import numpy as np

from rooftruss.loads.roof import SIDES
from rooftruss.loads.wind_en1991_factors import constant, has_both_lines, is_flat, roof_coefficient
from rooftruss.loads.wind_en1991_laying import Array, Flags, Pattern, Wind, along, flat_across, walls_across


def duopitch_patterns(wind: Wind) -> Iterator[Pattern]:
    """Patterns that some truss of the batch has.

    Wind across the ridge from the left and from the right: all zones of the windward slope at their smaller or larger
    values with all of the leeward slope at theirs, four patterns (note 1 to Table 7.4a) up to 60 deg, so that nothing
    jumps where the table ends a line at 45 deg; one above, two under 5 deg (7.2.3). Wind along the ridge.
    """
    for side in SIDES:
        yield from _across(wind, side)
    yield from along(
        wind,
        what="ridge",
        corners=("F", "G", "F"),
        coefficient=lambda zone, slope: roof_coefficient("along", zone, slope, wind.area),
        tables="Tables 7.2 and 7.4b",
    )


def _across(wind: Wind, side: str) -> Iterator[Pattern]:
    """Patterns of wind across the ridge that some truss of the batch has."""
    flat = is_flat(wind.slope)
    both = ~flat & has_both_lines(wind.slope)
    if np.any(flat):
        for line in ("suction", "pressure"):
            yield flat_across(wind, side, line, here=flat)
    stops, walls = _stops(wind), walls_across(wind)
    for windward in ("suction", "pressure"):
        for leeward in ("suction", "pressure"):
            here = ~flat if (windward, leeward) == ("pressure", "suction") else both
            if np.any(here):
                yield _duopitch_across(wind, side, (windward, leeward), stops, walls, here)


def _stops(wind: Wind) -> tuple[Array, ...]:
    """Ends of zones G (or F), H, J, I from the windward eave on; EN 1991-1-4, Fig. 7.8b)."""
    half, edge = wind.width / 2, np.minimum(wind.e_across / 10, wind.width / 2)
    return 0 * half, edge, half, half + edge, wind.width


def _duopitch_across(
    wind: Wind, side: str, lines: tuple[str, str], stops: tuple[Array, ...], walls: tuple[Array, Array], here: Flags
) -> Pattern:
    """Zones G (or F), H, J, I from the windward eave on; EN 1991-1-4, Table 7.4a."""
    zones = (wind.corner, "H", "J", "I")
    slope = np.where(here, wind.slope, constant("flattest"))
    line_of = (lines[0], lines[0], lines[1], lines[1])
    return Pattern(
        name=f"wind from the {side}, {lines[0]}/{lines[1]}",
        short=f"{side} {lines[0][0]}/{lines[1][0]}",
        side=side,
        stops=stops,
        zones=zones,
        c_pe=tuple(roof_coefficient("across", z, slope, wind.area, v) for z, v in zip(zones, line_of, strict=True)),
        tables="Table 7.4a",
        walls=walls,
        here=here,
    )
