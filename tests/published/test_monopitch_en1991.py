"""Snow, wind and imposed load on monopitch roofs to EN 1991 against published numbers and hand values."""

import math
from math import degrees

import numpy as np
import pytest

from rooftruss.basis.tables import read_table
from rooftruss.errors import OutOfScopeError
from rooftruss.loads.imposed_en1991 import roof_live_cases
from rooftruss.loads.snow_en1991 import overhang_load, snow_cases
from rooftruss.loads.wind_en1991 import wind_cases
from rooftruss.loads.wind_en1991_monopitch import monopitch_coefficient
from tests.monopitch import MIRROR, monopitch_roof
from tests.roofs import named, values

SNOW = {"ground_snow": 1200.0, "altitude": 300.0}
WIND = {
    "basic_wind_velocity": 23.0,
    "peak_velocity_pressure": 1000.0,
    "building_height": 5.0,
    "building_length": 20.0,
    "wind_loaded_area": 10.0,
    "truss_line": "interior",
}
SLOPES = (5, 15, 30, 45, 60, 75)
LOW = {  # EN 1991-1-4, Table 7.3a, theta = 0, c_pe,10: (smaller, larger) at the slopes above
    "F": [(-1.7, 0), (-0.9, 0.2), (-0.5, 0.7), (0, 0.7), (0, 0.7), (0, 0.8)],
    "G": [(-1.2, 0), (-0.8, 0.2), (-0.5, 0.7), (0, 0.7), (0, 0.7), (0, 0.8)],
    "H": [(-0.6, 0), (-0.3, 0.2), (-0.2, 0.4), (0, 0.6), (0, 0.7), (0, 0.8)],
}
HIGH = {  # theta = 180
    "F": [-2.3, -2.5, -1.1, -0.6, -0.5, -0.5],
    "G": [-1.3, -1.3, -0.8, -0.5, -0.5, -0.5],
    "H": [-0.8, -0.9, -0.8, -0.7, -0.5, -0.5],
}
ALONG = {  # Table 7.3b, theta = 90
    "F_up": [-2.1, -2.4, -2.1, -1.5, -1.2, -1.2],
    "F_low": [-2.1, -1.6, -1.3, -1.3, -1.2, -1.2],
    "G": [-1.8, -1.9, -1.5, -1.4, -1.2, -1.2],
    "H": [-0.6, -0.8, -1.0, -1.0, -1.0, -1.0],
    "I": [-0.5, -0.7, -0.8, -0.9, -0.7, -0.5],
}


def coefficient(direction, zone, slope_deg, area=10.0, line="suction"):
    return float(monopitch_coefficient(direction, zone, math.radians(slope_deg), area, line))


@pytest.mark.parametrize("k", range(6), ids=SLOPES)
def test_rows_of_tables_7_3a_and_7_3b(k):
    for zone, printed in LOW.items():
        found = tuple(coefficient("low eave", zone, SLOPES[k], 10.0, line) for line in ("suction", "pressure"))
        assert found == pytest.approx(printed[k], abs=1e-9)
    for direction, zones in (("high eave", HIGH), ("along", ALONG)):
        for zone, printed in zones.items():
            assert coefficient(direction, zone, SLOPES[k]) == pytest.approx(printed[k], abs=1e-9)


def test_every_cell_of_the_tables_is_there_and_the_negative_line_ends_at_45_deg():
    cells = {
        (r["direction"], r["zone"], round(degrees(r["slope"]))): r for r in read_table("wind/monopitch_en1991").rows
    }
    zones = [*(("low eave", z) for z in LOW), *(("high eave", z) for z in HIGH), *(("along", z) for z in ALONG)]
    assert set(cells) == {(*zone, slope) for zone in zones for slope in SLOPES}
    for (direction, _, slope), row in cells.items():
        assert math.isnan(row["suction_10"]) == (direction == "low eave" and slope > 45)
        assert math.isnan(row["pressure"]) == (direction != "low eave")


SMALL = {  # c_pe,1 of the same tables, from memory of the printed page; at theta = 0 the smaller line
    ("low eave", "F"): [-2.5, -2.0, -1.5, 0],
    ("low eave", "G"): [-2.0, -1.5, -1.5, 0],
    ("low eave", "H"): [-1.2, -0.3, -0.2, 0],
    ("high eave", "F"): [-2.5, -2.8, -2.3, -1.3, -1.0, -1.0],
    ("high eave", "G"): [-2.0, -2.0, -1.5, -0.5, -0.5, -0.5],
    ("high eave", "H"): [-1.2, -1.2, -0.8, -0.7, -0.5, -0.5],
    ("along", "F_up"): [-2.6, -2.9, -2.9, -2.4, -2.0, -2.0],
    ("along", "F_low"): [-2.4, -2.4, -2.0, -2.0, -2.0, -2.0],
    ("along", "G"): [-2.0, -2.5, -2.0, -2.0, -2.0, -2.0],
    ("along", "H"): [-1.2, -1.2, -1.3, -1.3, -1.3, -1.3],
    ("along", "I"): [-0.5, -1.2, -1.2, -1.2, -1.2, -0.5],
}


@pytest.mark.parametrize(("where", "printed"), SMALL.items(), ids=str)
def test_cells_of_small_areas(where, printed):
    found = [coefficient(*where, slope, 1.0) for slope in SLOPES[: len(printed)]]
    assert found == pytest.approx(printed, abs=1e-9)


def test_slope_of_20_deg():
    # by hand, a third of the way from 15 to 30 deg, each line for itself
    low = {"F": (-0.767, 0.367), "G": (-0.7, 0.367), "H": (-0.267, 0.267)}
    for zone, (smaller, larger) in low.items():
        assert coefficient("low eave", zone, 20) == pytest.approx(smaller, abs=5e-4)
        assert coefficient("low eave", zone, 20, 10.0, "pressure") == pytest.approx(larger, abs=5e-4)
    for zone, value in {"F": -2.033, "G": -1.133, "H": -0.867}.items():
        assert coefficient("high eave", zone, 20) == pytest.approx(value, abs=5e-4)


def test_loaded_area_of_4_m2():
    # EN 1991-1-4, Fig. 7.2, by hand at 15 deg: -2.8 + (2.8 - 2.5) log10(4)
    assert coefficient("high eave", "F", 15, 4.0) == pytest.approx(-2.619, abs=5e-4)


def strips(case):
    """(surface, net c_p, from, to) of a case under q_p = 1000 Pa, from the left."""
    ends = [
        (s.surface, round(float(s.pressure) / 1000.0, 4), *(None if x is None else round(float(x), 4) for x in b))
        for s, b in ((load, (load.x_from, load.x_to)) for load in case.loads)
    ]
    order = ("left tail", "left slope", "right slope", "right tail")
    return sorted(ends, key=lambda e: (order.index(e[0]), -99 if e[2] is None else e[2]))


def test_wind_onto_the_low_eave():
    # EN 1991-1-4, Fig. 7.7b) and Table 7.3a by hand at 15 deg: e = min(20, 2 x 5) = 10 m, zone G 1 m deep in plan from
    # the eave at -0.45 m; below the windward tail the wall D at h/d = 5/6: 0.7 + 0.1 (0.8333 - 0.25)/0.75 = 0.7778,
    # below the leeward one E: -0.3 - 0.2 (0.5833/0.75) = -0.4556
    cases = {c.short: c for c in wind_cases(monopitch_roof(15.0), WIND)}
    assert strips(cases["left low s, +i"]) == [
        ("left tail", -1.5778, None, None),
        ("left slope", -1.0, 0.0, 0.55),
        ("left slope", -0.5, 0.55, 5.9),
        ("right tail", 0.1556, None, None),
    ]
    assert strips(cases["left low p, -i"]) == [
        ("left tail", -0.5778, None, None),
        ("left slope", 0.5, 0.0, 0.55),
        ("left slope", 0.5, 0.55, 5.9),
        ("right tail", 0.6556, None, None),
    ]


def test_wind_onto_the_high_eave_has_one_sign_case():
    # zone G reaches 1 m in from the eave at 6.35 m; G -1.3, H -0.9, no larger values in Table 7.3a
    cases = {c.short: c for c in wind_cases(monopitch_roof(15.0), WIND)}
    assert [short for short in cases if short.startswith("right")] == ["right high, +i", "right high, -i"]
    assert strips(cases["right high, -i"]) == [
        ("left tail", -0.4444, None, None),
        ("left slope", -0.6, 0.0, 5.35),
        ("left slope", -1.0, 5.35, 5.9),
        ("right tail", -2.0778, None, None),
    ]


def test_wind_along_the_eaves_next_to_a_gable():
    # Fig. 7.7c) and Table 7.3b: e = min(6, 10) = 6 m, corners of 1.5 m in plan, F_up at the high eave
    site = WIND | {"truss_line": "edge"}
    left, right = (
        {c.short: c for c in wind_cases(monopitch_roof(15.0, low=low, overhang=0.0), site)} for low in MIRROR
    )
    assert strips(left["along F, +i"])[1:4] == [
        ("left slope", -1.8, 0.0, 1.45),
        ("left slope", -2.1, 1.45, 4.45),
        ("left slope", -2.6, 4.45, 5.9),
    ]
    assert strips(right["along F, +i"])[1:4] == [
        ("right slope", -2.6, 0.0, 1.45),
        ("right slope", -2.1, 1.45, 4.45),
        ("right slope", -1.8, 4.45, 5.9),
    ]
    assert values(left["left low s, +i"])["c_pe, F"] == pytest.approx(-0.9)
    assert "c_pe, G" not in values(left["left low s, +i"])
    assert [s for s in left if s.startswith("along")] == ["along F, +i", "along F, -i", "along H, +i", "along H, -i"]


def test_wind_along_the_eaves_away_from_the_gables():
    cases = {c.short: c for c in wind_cases(monopitch_roof(15.0), WIND)}
    assert [s for s in cases if s.startswith("along")] == ["along H, +i", "along H, -i", "along I, +i", "along I, -i"]
    assert values(cases["along H, +i"])["c_pe, H"] == pytest.approx(-0.8)
    assert values(cases["along I, +i"])["c_pe, I"] == pytest.approx(-0.7)
    # zone I begins e/2 = 3 m behind the gable
    assert not any("along I" in c.short for c in wind_cases(monopitch_roof(15.0), WIND | {"building_length": 2.9}))


@pytest.mark.parametrize(
    ("pitch_deg", "shorts"),
    [
        (3.0, ["left flat s", "left flat p", "right flat s", "right flat p"]),
        (5.0, ["left low s", "left low p", "right high"]),
        (45.0, ["left low s", "left low p", "right high"]),
        (60.0, ["left low s", "left low p", "right high"]),
        (60.1, ["left low p", "right high"]),
        (75.0, ["left low p", "right high"]),
    ],
)
def test_patterns_across_by_pitch(pitch_deg, shorts):
    found = [
        c.short.removesuffix(", +i") for c in wind_cases(monopitch_roof(pitch_deg), WIND) if c.short.endswith("+i")
    ]
    assert [s for s in found if not s.startswith("along")] == shorts


def test_a_slope_under_5_deg_has_the_zones_of_a_flat_roof():
    # EN 1991-1-4, Table 7.2, sharp eaves: G -1.2 to 1 m, H -0.7 to e/2 = 5 m, I +/-0.2 behind, from either eave
    cases = {c.short: c for c in wind_cases(monopitch_roof(3.0), WIND)}
    assert ("left slope", -0.9, 0.55, 4.55) in strips(cases["left flat p, +i"])
    assert ("left slope", 0.0, 4.55, 5.9) in strips(cases["left flat p, +i"])
    assert ("left slope", -0.4, 0.0, 1.35) in strips(cases["right flat s, +i"])


def test_names_say_where_the_wind_comes_from():
    names = [c.name for c in wind_cases(monopitch_roof(15.0, low="right"), WIND) if c.short.endswith("+i")]
    assert names == [
        "wind from the right onto the low eave, suction, c_pi +0.2",
        "wind from the right onto the low eave, pressure, c_pi +0.2",
        "wind from the left onto the high eave, c_pi +0.2",
        "wind along the eaves, zone H, c_pi +0.2",
        "wind along the eaves, zone I, c_pi +0.2",
    ]


def test_an_end_without_a_tail_takes_no_underside_pressure():
    cases = {c.short: c for c in wind_cases(monopitch_roof(15.0, bare="right"), WIND)}
    found = strips(cases["right high, +i"])
    # the roof ends 0.05 m beyond the bearing centre: G reaches from 5.95 to 4.95 m
    assert found[-1] == ("right tail", -1.5, None, None)
    assert ("left slope", -1.5, 4.95, 5.9) in found
    assert found[0] == ("left tail", pytest.approx(-0.9 + 0.4556, abs=1e-4), None, None)


def test_steep_slopes_are_refused():
    with pytest.raises(OutOfScopeError, match=r"roof slope .* 7\.2\.4 and Table 7\.3 cover 5 to 75 deg"):
        wind_cases(monopitch_roof(76.0), WIND)
    with pytest.raises(OutOfScopeError, match=r"7\.2\.4 and Table 7\.3"):
        coefficient("along", "H", 4.0)


# --- snow --------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("pitch_deg", "mu_1"), [(15, 0.8), (30, 0.8), (35, 0.6667), (40, 0.5333)])
def test_one_snow_load_stands_for_drifted_and_undrifted(pitch_deg, mu_1):
    # EN 1991-1-3, 5.3.2(3), Fig. 5.2 and Table 5.2, eq. (5.1): s = mu_1 s_k
    (case,) = snow_cases(monopitch_roof(pitch_deg), SNOW)
    assert (case.name, case.action, case.pattern) == ("snow, undrifted or drifted", "S", "undrifted")
    assert values(case)["mu_1"] == pytest.approx(mu_1, abs=5e-5)
    assert {load.kind for load in case.loads} == {"plan"}
    assert {"left tail", "left slope", "right tail"} <= {load.surface for load in case.loads}
    assert [float(load.pressure) for load in case.loads] == pytest.approx([1200 * mu_1] * 4, abs=0.1)


def test_snow_slides_off_a_steep_slope_but_not_past_guards():
    # EN 1991-1-3, 5.3.2(2)
    assert snow_cases(monopitch_roof(62.0), SNOW) == []
    (case,) = snow_cases(monopitch_roof(62.0), SNOW | {"snow_guards": True})
    assert values(case)["mu_1"] == 0.8


def test_exceptional_snow_is_an_accidental_action():
    cases = snow_cases(monopitch_roof(15.0), SNOW | {"exceptional_snow": 2400.0})
    assert [(c.name, c.action) for c in cases] == [
        ("snow, undrifted or drifted", "S"),
        ("exceptional snow, undrifted or drifted", "A"),
    ]
    assert float(cases[1].loads[0].pressure) == pytest.approx(1920.0)  # eq. (5.2): 0.8 x 2.4 kN/m2


@pytest.mark.parametrize("low", ["left", "right"])
def test_snow_hangs_over_the_low_eave(low):
    # EN 1991-1-3, 6.3 by hand: s = 0.96, d = 0.32 m, k = 0.96, s_e = 0.96 x 0.96^2 / 3 = 0.2949 kN/m at the eave
    plain, over = snow_cases(monopitch_roof(15.0, low=low), SNOW | {"altitude": 1000.0})
    assert (over.short, over.pattern) == ("over the low eave", "overhang")
    assert float(overhang_load(960.0)) == pytest.approx(294.9, abs=0.1)
    (edge,) = [load for load in over.loads if load.x_from is not None]
    assert edge.surface == f"{low} tail"
    assert over.loads[:4] == plain.loads
    ends = sorted(float(x) - (0.0 if low == "left" else 5.9) for x in (edge.x_from, edge.x_to))
    width, arm = ends[1] - ends[0], abs(sum(ends)) / 2
    assert max(map(abs, ends)) == pytest.approx(0.45)
    assert float(edge.pressure) * width * arm == pytest.approx(294.9 * 0.45, rel=1e-3)  # its moment at the bearing


def test_the_low_eave_without_a_tail_keeps_its_edge_load():
    over = snow_cases(monopitch_roof(15.0, bare="left"), SNOW | {"altitude": 1000.0})[-1]
    (edge,) = [load for load in over.loads if load.x_from is not None]
    assert (float(edge.x_from), float(edge.x_to)) == pytest.approx((-0.05, 0.0))
    assert float(edge.pressure) * 0.05 == pytest.approx(float(overhang_load(960.0)))


# --- imposed load ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("low", ["left", "right"])
def test_category_h_in_full_and_on_the_halves_of_the_slope(low):
    # EN 1991-1-1, 6.3.4 and 6.2.1(1): a free action; the halves meet in the middle between the bearings
    roof = monopitch_roof(15.0, low=low)
    cases = roof_live_cases(roof, np.asarray(400.0))
    assert [c.short for c in cases] == ["full", "left", "right"]
    assert {"left tail", f"{low} slope", "right tail"} <= {load.surface for load in cases[0].loads}
    left, right = named(cases, "left"), named(cases, "right")
    assert [(s.surface, s.x_from, None if s.x_to is None else float(s.x_to)) for s in left.loads] == [
        ("left tail", None, None),
        (f"{low} slope", None, 2.95),
    ]
    assert [(s.surface, None if s.x_from is None else float(s.x_from), s.x_to) for s in right.loads] == [
        ("right tail", None, None),
        (f"{low} slope", 2.95, None),
    ]
    assert {float(load.pressure) for case in cases for load in case.loads} == {400.0}
