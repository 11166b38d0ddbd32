"""Snow loads of ASCE 7-16 and 7-22, chapter 7, against printed examples and hand arithmetic."""

from functools import partial

import numpy as np
import pytest

from rooftruss.errors import JobError, OutOfScopeError, TableError
from rooftruss.loads.snow_asce7 import snow_cases
from rooftruss.loads.snow_asce7_factors import (
    drift_height_16,
    drift_height_22,
    eaves_carry_ice,
    exposure_factor,
    flat_roof_snow,
    heated_thermal_factor,
    importance_factor,
    may_slide,
    minimum_snow,
    rain_applies,
    ridge_surcharge,
    slope_factor,
    slope_panel,
    snow_density,
    thermal_factor,
    unbalanced_applies,
)
from rooftruss.units import FOOT, GRAVITY, PCF, PSF
from tests.load_resultants import reactions
from tests.roofs import named, roof_in_feet, values

R_UNIT = 0.1761101838  # m2 K/W in one ft2 h F/Btu (3600 s x 0.09290304 m2 / 1055.056 J x 5/9 K)


roof = partial(roof_in_feet, span=60.0)


def site(**changes):
    base = {
        "risk_category": "II",
        "ground_snow": 30 * PSF,
        "winter_wind_parameter": 0.55,
        "snow_exposure": "partially exposed",
        "exposure": "C",
        "thermal": "just above freezing",
        "roof_surface": "rough",
    }
    return base | changes


def psf(case, surface):
    return [float(load.pressure) / PSF for load in case.loads if load.surface == surface]


def test_flat_roof_snow():
    # ASCE 7-16 eq. 7.3-1: 0.7 x 1.0 x 1.0 x 1.0 x 30
    assert flat_roof_snow(30 * PSF, C_e=1.0, C_t=1.0, I_s=1.0) / PSF == pytest.approx(21.0, rel=1e-6)
    # ASCE 7-22, C7.14 example 1: heated unventilated roof, R-30, p_g 30
    C_t = thermal_factor("7-22", "unventilated", 30 * PSF, 30 * R_UNIT)
    assert C_t == pytest.approx(1.14, abs=1e-6)
    assert flat_roof_snow(30 * PSF, C_e=1.0, C_t=C_t, I_s=1.0) / PSF == pytest.approx(23.94, rel=1e-5)


@pytest.mark.parametrize(
    ("theta_deg", "panel", "slippery", "C_s"),
    [  # ASCE 7, Fig. 7.4-1 and the formulas of C7.4, four printed digits
        (33.69, "a", False, 0.9078),
        (18.435, "a", True, 0.7933),
        (45.0, "b", False, 0.7692),
        (33.69, "c", True, 0.6602),
        (30.0, "a", False, 1.0),
        (70.0, "c", False, 0.0),
        (80.0, "c", False, 0.0),
    ],
)
@pytest.mark.parametrize("edition", ["7-16", "7-22"])
def test_slope_factor(edition, theta_deg, panel, slippery, C_s):
    found = slope_factor(edition, np.radians(theta_deg), panel, slippery=slippery)
    assert float(found) == pytest.approx(C_s, abs=6e-5)


def test_panels_of_the_slope_factor_differ_between_the_editions():
    # 7-16: warm C_t <= 1.0, cold 1.1, cold >= 1.2; 7-22: C_t <= 1.1, between, >= 1.2 (Fig. 7.4-1)
    assert [slope_panel("7-16", C_t) for C_t in (0.85, 1.0, 1.1, 1.2, 1.3)] == ["a", "a", "b", "c", "c"]
    assert [slope_panel("7-22", C_t) for C_t in (0.85, 1.1, 1.14, 1.2, 1.3)] == ["a", "a", "b", "c", "c"]


def test_slippery_warm_roofs_need_resistance_in_7_16_only():
    # 7.4.1: unventilated R-30, ventilated R-20
    assert not may_slide("7-16", "a", "unventilated", 29 * R_UNIT)
    assert may_slide("7-16", "a", "unventilated", 30 * R_UNIT)
    assert may_slide("7-16", "a", "ventilated attic", 20 * R_UNIT)
    assert not may_slide("7-16", "a", "ventilated attic", 19 * R_UNIT)
    assert not may_slide("7-16", "a", "unventilated", None)
    assert may_slide("7-16", "b", "unventilated", None)
    assert may_slide("7-22", "a", "unventilated", 10 * R_UNIT)


@pytest.mark.parametrize(
    ("p_g", "l_u", "I_s", "h_d_ft"),
    [  # ASCE 7-16 Fig. 7.6-1: sqrt(I_s) (0.43 l_u^(1/3) (p_g + 10)^(1/4) - 1.5)
        (30, 30, 1.0, 1.8601),
        (25, 60, 1.1, 2.7212),
        (40, 20, 1.0, 1.6038),
        (60, 25, 1.2, 2.3408),
    ],
)
def test_drift_height_of_7_16(p_g, l_u, I_s, h_d_ft):
    assert float(drift_height_16(p_g * PSF, l_u * FOOT, I_s)) / FOOT == pytest.approx(h_d_ft, abs=6e-5)


def test_drift_height_of_7_22():
    # ASCE 7-22, C7.14 example 1 prints 2.46 ft (rounded); eq. 7.6-1 by hand 2.4689
    # and 1.7942 for p_g 40 psf, l_u 16 ft, W_2 0.45
    assert float(drift_height_22(30 * PSF, 30 * FOOT, 0.55)) / FOOT == pytest.approx(2.4689, abs=6e-5)
    assert float(drift_height_22(40 * PSF, 16 * FOOT, 0.45)) / FOOT == pytest.approx(1.7942, abs=6e-5)


@pytest.mark.parametrize(("p_g", "gamma_pcf"), [(30, 17.9), (50, 20.5), (150, 30.0)])
def test_snow_density(p_g, gamma_pcf):
    # ASCE 7, eq. 7.7-1
    assert float(snow_density(p_g * PSF)) / PCF == pytest.approx(gamma_pcf, rel=1e-9)


@pytest.mark.parametrize(
    ("p_g", "R", "C_t"),
    [  # ASCE 7-22, Table 7.3-3, linear between its cells
        (30, 30, 1.14),
        (42.9, 20, 1.0071),
        (5, 60, 1.2),
        (80, 50, 1.18),
        (35, 35, (1.13 + 1.14 + 1.17 + 1.16) / 4),
        (70, 5, 1.0),
    ],
)
def test_thermal_factor_of_heated_roofs(p_g, R, C_t):
    assert heated_thermal_factor(p_g * PSF, R * R_UNIT) == pytest.approx(C_t, abs=6e-5)


def test_thermal_factor_of_a_ventilated_attic_by_edition():
    # Table 7.3-2: 7-16 1.1 with more than R-25, else 1.0; 7-22 1.2
    assert thermal_factor("7-16", "ventilated attic", 30 * PSF, 30 * R_UNIT) == 1.1
    assert thermal_factor("7-16", "ventilated attic", 30 * PSF, 25 * R_UNIT) == 1.0
    assert thermal_factor("7-16", "ventilated attic", 30 * PSF, None) == 1.1
    assert thermal_factor("7-22", "ventilated attic", 30 * PSF, None) == 1.2


def test_a_heated_roof_needs_its_resistance_in_7_22():
    with pytest.raises(JobError, match=r"roof_r_value is missing; ASCE 7-22, Table 7.3-3"):
        thermal_factor("7-22", "unventilated", 30 * PSF, None)


def test_minimum_snow():
    # 7-16, 7.3.4: I_s p_g up to 20 psf, then 20 I_s; 7-22, Table 7.3-4: 25/30/35/40 psf
    assert minimum_snow("7-16", 15 * PSF, "III") / PSF == pytest.approx(16.5)
    assert minimum_snow("7-16", 60 * PSF, "IV") / PSF == pytest.approx(24.0)
    for risk, p_m in (("I", 25), ("II", 30), ("III", 35), ("IV", 40)):
        assert minimum_snow("7-22", 60 * PSF, risk) / PSF == pytest.approx(p_m, rel=1e-9)
    assert minimum_snow("7-22", 12 * PSF, "IV") / PSF == pytest.approx(12)


def test_rain_on_snow_of_the_commentary():
    # ASCE 7-22, C7.10: 1/4 on 12, W 100 ft, category IV, p_g 32: p_s 24.6 (C_t 1.1) and with rain 32.6 psf
    slope = np.arctan(0.25 / 12)
    assert rain_applies("7-22", 32 * PSF, "IV", slope, 100 * FOOT)
    p_s = float(slope_factor("7-22", slope, "a", slippery=False)) * flat_roof_snow(32 * PSF, C_e=1.0, C_t=1.1, I_s=1.0)
    assert p_s / PSF == pytest.approx(24.64, abs=0.05)
    assert minimum_snow("7-22", 32 * PSF, "IV") / PSF == pytest.approx(32.0)
    assert not rain_applies("7-22", 41 * PSF, "IV", slope, 100 * FOOT)  # over p_m,max
    assert not rain_applies("7-16", 32 * PSF, "IV", slope, 100 * FOOT)  # over 20 psf
    assert not rain_applies("7-22", 32 * PSF, "IV", slope, 50 * FOOT)  # 1.19 deg is not under 50/50


@pytest.mark.parametrize(
    ("edition", "surcharge_psf"),
    [("7-16", 5), ("7-22", 8)],  # 7.10
)
def test_rain_case_adds_its_surcharge_to_balanced_snow(edition, surcharge_psf):
    wide = roof(pitch=0.5 / 12, span=260.0)  # 2.39 deg is under 130/50
    cases = snow_cases(wide, site(ground_snow=18 * PSF), edition)
    wet, full = named(cases, "rain on snow"), named(cases, "balanced")
    assert psf(wet, "left slope")[0] - psf(full, "left slope")[0] == pytest.approx(surcharge_psf)
    assert wet.pattern == "rain on snow"


@pytest.mark.parametrize("edition", ["7-16", "7-22"])
def test_unbalanced_snow_from_half_to_seven_on_twelve(edition):
    # 7.6.1; 7 on 12 is 30.256 deg, more than the rounded 30.2 deg of the text
    pitches = np.array([0.25, 0.49, 0.5, 0.51, 6, 7, 7.01, 8]) / 12
    assert unbalanced_applies(edition, pitches).tolist() == [False, False, True, True, True, True, False, False]
    assert bool(unbalanced_applies(edition, np.tan(np.arctan(7 / 12))))


@pytest.mark.parametrize(
    ("edition", "p_g", "C_t_word", "exposure", "risk", "rise", "W", "W_2", "expected"),
    [
        # printed in public notes on 7-16: p_s 23.1, h_d 1.860, 23.54 psf over 7.02 ft, peak 46.64
        ("7-16", 30, "just above freezing", "partially exposed", "II", 6, 30, None, (6.93, 23.1, 23.544, 7.015)),
        # 7.6.1 by hand: C_t 1.1, W = 24 ft
        ("7-16", 50, "just above freezing", "partially exposed", "II", 5, 24, None, (11.55, 38.5, 25.831, 8.064)),
        # 7.6.1 by hand: C_e 0.9, C_t 1.2, I_s 1.1, W = 20 ft
        ("7-16", 70, "unheated", "fully exposed", "III", 6, 20, None, (17.464, 58.212, 34.104, 7.874)),
        # eq. 7.6-1 by hand, W = 16 ft without a least fetch
        ("7-22", 40, "unheated", "partially exposed", "II", 4, 16, 0.45, (10.08, 33.6, 19.889, 8.287)),
    ],
)
def test_unbalanced_snow_on_a_gable(edition, p_g, C_t_word, exposure, risk, rise, W, W_2, expected):
    given = site(ground_snow=p_g * PSF, thermal=C_t_word, snow_exposure=exposure, risk_category=risk)
    given["winter_wind_parameter"] = W_2
    case = named(snow_cases(roof(pitch=rise / 12, span=2 * W), given, edition), "unbal. left")
    light, base, surcharge, width = expected
    assert psf(case, "left slope") == pytest.approx([light], rel=2e-3)
    assert psf(case, "right slope") == pytest.approx([base, surcharge], rel=2e-3)
    strip = case.loads[-1]
    assert float(strip.x_from) / FOOT == pytest.approx(W)
    assert float(strip.x_to - strip.x_from) / FOOT == pytest.approx(width, rel=2e-3)


def test_unbalanced_snow_of_the_7_22_commentary():
    # C7.14 example 1: 6 on 12, W 30 ft, p_g 30, W_2 0.55, R-30: 31.1 psf over 9.3 ft (h_d rounded to 2.46 there)
    heated = site(thermal="unventilated", roof_r_value=30 * R_UNIT)
    case = named(snow_cases(roof(), heated, "7-22"), "unbal. right")
    assert psf(case, "right slope") == pytest.approx([7.182], rel=1e-3)
    assert psf(case, "left slope") == pytest.approx([23.94, 31.249], rel=1e-3)
    strip = case.loads[-1]
    assert float(strip.x_to) / FOOT == pytest.approx(30.0)
    assert float(strip.x_to - strip.x_from) / FOOT == pytest.approx(9.311, rel=1e-3)
    found = values(case)
    assert float(found["h_d"]) / FOOT == pytest.approx(2.4689, rel=1e-4)
    assert float(found["S"]) == pytest.approx(2.0)
    assert float(found["W_2"]) == 0.55


def test_reactions_under_unbalanced_snow():
    # 7-16, p_g 30, 6 on 12, 60 ft span at 2 ft: strips of 6.93, 23.1 and 23.541 psf x 7.015 ft, moments about each end
    r = roof()
    left, right, horizontal = reactions(named(snow_cases(r, site(), "7-16"), "unbal. left"), r)
    pound_force = PSF * FOOT**2
    assert left / pound_force == pytest.approx(804.2, rel=1e-3)
    assert right / pound_force == pytest.approx(1327.9, rel=1e-3)
    assert (left + right) / pound_force == pytest.approx(2132.1, rel=1e-3)
    assert horizontal == 0.0


def test_least_fetch_is_20_ft_in_7_16_and_none_in_7_22():
    small = roof(span=24.0)  # W = 12 ft
    assert float(values(named(snow_cases(small, site(), "7-16"), "unbal. left"))["l_u"]) / FOOT == pytest.approx(20)
    assert float(values(named(snow_cases(small, site(), "7-22"), "unbal. left"))["l_u"]) / FOOT == pytest.approx(12)


def test_surcharge_is_cut_at_the_eave():
    # 1 on 12 gives sqrt(S) = 3.46: wider than the 12 ft from ridge to eave
    low = roof(pitch=1 / 12, span=20.0, overhang=2.0)
    case = named(snow_cases(low, site(), "7-16"), "unbal. left")
    on_slope, on_tail = case.loads[-2:]
    assert float(values(case)["surcharge width"]) / FOOT > 12
    assert (on_slope.surface, on_tail.surface) == ("right slope", "right tail")
    assert [float(x) / FOOT for x in (on_slope.x_from, on_slope.x_to)] == pytest.approx([10, 20])
    assert [float(x) / FOOT for x in (on_tail.x_from, on_tail.x_to)] == pytest.approx([20, 22])


def test_surcharge_reaches_part_of_a_tail():
    half, W = 4.5, 6.5  # 4.5 ft of slope and 2 ft of tail
    h_d = float(drift_height_16(30 * PSF, 20 * FOOT, 1.0))
    _, width = ridge_surcharge(h_d, float(snow_density(30 * PSF)) * GRAVITY, 0.5)
    assert half < float(width) / FOOT < W
    case = named(snow_cases(roof(span=2 * half, overhang=2.0), site(), "7-16"), "unbal. right")
    tail = case.loads[-1]
    assert tail.surface == "left tail"
    assert float(tail.x_from) == pytest.approx(half * FOOT - float(width))
    assert float(tail.x_to) == pytest.approx(0.0, abs=1e-12)


def test_ice_at_the_eaves():
    # 7-16, 7.4.5: 2 p_f = 2 x 0.7 x 40 = 56 psf on the overhang of a ventilated roof below R-20
    poor = site(ground_snow=40 * PSF, thermal="ventilated attic", roof_r_value=19 * R_UNIT)
    cases = snow_cases(roof(overhang=1.5), poor, "7-16")
    case = named(cases, "eaves")
    assert case.pattern == "eave"
    assert {load.surface for load in case.loads} == {"left tail", "right tail"}
    assert psf(case, "left tail") == pytest.approx([56.0])
    good = poor | {"roof_r_value": 20 * R_UNIT}
    assert "eaves" not in [c.short for c in snow_cases(roof(overhang=1.5), good, "7-16")]


def test_no_ice_load_without_an_overhang():
    poor = site(thermal="unventilated", roof_r_value=20 * R_UNIT)
    inside = roof(span=30.0, bearing_span=29.7, overhang=0.15)  # the roof ends at the outside of the bearing
    assert "eaves" not in [c.short for c in snow_cases(inside, poor, "7-16")]
    assert "eaves" in [c.short for c in snow_cases(roof(overhang=0.5), poor, "7-16")]


@pytest.mark.parametrize(
    ("thermal", "R", "ice"),
    [
        ("unventilated", 29, True),
        ("unventilated", 30, False),
        ("greenhouse", None, True),
        ("ventilated attic", None, False),
        ("unheated", None, False),
        ("freezer", None, False),
    ],
)
def test_which_roofs_carry_ice(thermal, R, ice):
    assert eaves_carry_ice("7-22", thermal, None if R is None else R * R_UNIT) is ice


def test_balanced_snow_holds_its_values():
    given = site(thermal="unventilated", roof_r_value=10 * R_UNIT, risk_category="III")
    steep = roof(pitch=8 / 12)
    found = values(named(snow_cases(steep, given, "7-16"), "balanced"))
    # C_t 1.0, I_s 1.1, panel a at 33.69 deg: 0.9078 x 0.7 x 1.1 x 30
    assert float(found["I_s"]) == 1.1
    assert float(found["p_s"]) / PSF == pytest.approx(0.9078 * 23.1, rel=1e-4)
    assert "I_s" not in values(named(snow_cases(steep, given, "7-22"), "balanced"))


def test_cases_of_a_low_and_of_a_steep_roof():
    low = [c.short for c in snow_cases(roof(pitch=3 / 12), site(), "7-16")]
    assert low == ["balanced", "minimum", "unbal. left", "unbal. right"]
    assert [c.short for c in snow_cases(roof(pitch=8 / 12), site(), "7-16")] == ["balanced"]
    assert snow_cases(roof(), site(ground_snow=0.0), "7-22") == []


def test_a_batch_gets_zero_where_a_case_is_not_required():
    many = roof(
        pitch=np.array([3, 6, 8]) / 12, span=np.full(3, 40.0), overhang=np.full(3, 1.0), spacing=np.full(3, 2.0)
    )
    cases = snow_cases(many, site(), "7-22")
    assert (named(cases, "minimum").loads[0].pressure > 0).tolist() == [True, False, False]
    for load in named(cases, "unbal. left").loads:
        assert (load.pressure > 0).tolist() == [True, True, False] or load.surface == "right tail"


@pytest.mark.parametrize(
    ("changes", "error", "text"),
    [
        ({"ground_snow": None}, JobError, r"ground_snow is missing; ASCE 7-22, 7.2"),
        ({"ground_snow": "40 psf"}, JobError, r"'40 psf' is not a number"),
        ({"ground_snow": -5.0}, JobError, r"ground_snow: -5 is negative"),
        ({"winter_wind_parameter": None}, JobError, r"winter_wind_parameter is missing; ASCE 7-22, eq. 7.6-1"),
        ({"thermal": "warm"}, JobError, r"thermal: 'warm' is not in ASCE 7-22, Table 7.3-2"),
        ({"snow_exposure": "sheltred"}, JobError, r"did you mean 'sheltered'"),
        ({"risk_category": None}, JobError, r"risk_category is missing"),
    ],
)
def test_wrong_site_values_are_told(changes, error, text):
    with pytest.raises(error, match=text):
        snow_cases(roof(), site(**changes), "7-22")


def test_what_the_chapter_does_not_cover():
    with pytest.raises(
        OutOfScopeError, match=r"sheltered roof in terrain 'above tree line' is not in ASCE 7-16, Table 7.3-1"
    ):
        exposure_factor("7-16", "above tree line", "sheltered")
    with pytest.raises(OutOfScopeError, match=r"ASCE 7-16, 7.5: below a pitch of 1/2 on 12"):
        snow_cases(roof(pitch=0.25 / 12), site(), "7-16")
    with pytest.raises(JobError, match="ASCE 7-10 are not known"):
        snow_cases(roof(), site(), "7-10")
    with pytest.raises(TableError, match=r"'V' is not in importance_asce7-16.csv"):
        importance_factor("7-16", "V")


def test_terrain_of_the_snow_may_differ_from_that_of_the_wind():
    found = values(named(snow_cases(roof(), site(snow_terrain="above tree line"), "7-16"), "balanced"))
    assert float(found["C_e"]) == 0.8
