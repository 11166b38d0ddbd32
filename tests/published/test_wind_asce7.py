"""Wind loads of ASCE 7-16 and 7-22, chapters 26 and 27, against printed examples and hand arithmetic."""

from functools import partial

import numpy as np
import pytest

from rooftruss.analysis.combinations import CaseHead, combine
from rooftruss.basis.schemes import load_scheme
from rooftruss.errors import JobError, OutOfScopeError
from rooftruss.loads.wind_asce7 import reference_height, wind_cases
from rooftruss.loads.wind_asce7_factors import (
    between_like_signs,
    distance_coefficients,
    elevation_factor,
    exposure_coefficient,
    internal_coefficient,
    net_pressure,
    slope_coefficients,
    velocity_pressure,
)
from rooftruss.units import FOOT, MILE_PER_HOUR, PSF
from tests.load_resultants import force, reactions
from tests.roofs import named, roof_in_feet, values

POUND_FORCE = PSF * FOOT**2
roof = partial(roof_in_feet, span=30.0)


def site(**changes):
    base = {
        "wind_speed": 115 * MILE_PER_HOUR,
        "exposure": "C",
        "enclosure": "enclosed",
        "mean_roof_height": 13.75 * FOOT,
        "building_length": 60 * FOOT,
        "topographic_factor": 1.0,
        "ground_elevation": 0.0,
    }
    return base | changes


def psf(case, surface):
    return sum(float(load.pressure) / PSF for load in case.loads if load.surface == surface)


@pytest.mark.parametrize(
    ("exposure", "K_z"),
    [  # ASCE 7-22, Table 26.10-1 note 1 at 15, 20, 25, 30, 40 ft: 2.41 (z / z_g)^(2 / alpha)
        ("B", (0.5729, 0.6186, 0.6565, 0.6892, 0.7442)),
        ("C", (0.8512, 0.9026, 0.9447, 0.9805, 1.0398)),
        ("D", (1.035, 1.0881, 1.1312, 1.1676, 1.2276)),
    ],
)
def test_exposure_coefficient_of_7_22(exposure, K_z):
    heights = np.array([15, 20, 25, 30, 40]) * FOOT
    assert exposure_coefficient("7-22", heights, exposure) == pytest.approx(np.array(K_z), abs=6e-5)
    assert float(exposure_coefficient("7-22", 5 * FOOT, exposure)) == pytest.approx(K_z[0], abs=6e-5)


def test_exposure_coefficient_of_7_16_table():
    # ASCE 7-16, Table 26.10-1, exposure C: 0.85 to 15 ft, 0.90, 0.94, 0.98 at 20, 25, 30 ft; B 0.57, D 1.03 at 15 ft
    heights = np.array([15, 20, 25, 30]) * FOOT
    assert exposure_coefficient("7-16", heights, "C") == pytest.approx([0.85, 0.90, 0.94, 0.98], abs=6e-3)
    assert float(exposure_coefficient("7-16", 15 * FOOT, "B")) == pytest.approx(0.57, abs=6e-3)
    assert float(exposure_coefficient("7-16", 15 * FOOT, "D")) == pytest.approx(1.03, abs=6e-3)


def test_no_exposure_coefficient_over_the_gradient_height():
    with pytest.raises(
        OutOfScopeError, match=r"ASCE 7-16, Table 26.10-1: no K_z over the gradient height of exposure D"
    ):
        exposure_coefficient("7-16", 701 * FOOT, "D")


@pytest.mark.parametrize(("feet", "K_e"), [(0, 1.0), (361, 0.987), (2000, 0.9302), (5000, 0.8344)])
def test_elevation_factor(feet, K_e):
    # ASCE 7, note of Table 26.9-1; the table prints 0.93 at 2000 ft and 0.83 at 5000 ft
    assert elevation_factor(feet * FOOT) == pytest.approx(K_e, abs=6e-5)


def test_velocity_pressure_of_7_16():
    # 0.00256 x 0.9019 x 0.85 x 115^2 = 25.954 psf, exposure C at 20 ft
    K_h = exposure_coefficient("7-16", 20 * FOOT, "C")
    assert float(K_h) == pytest.approx(0.9019, abs=6e-5)
    q_h = velocity_pressure(115 * MILE_PER_HOUR, K_h, K_zt=1.0, K_e=1.0, K_d=0.85)
    assert float(q_h) / PSF == pytest.approx(25.954, rel=1e-4)


def test_metric_example_of_a_partially_enclosed_gable():
    # published verification of a 7-16 gable: 52 m/s, exposure C, 110 m over the sea, eave 5 m, mean roof 6.5 m,
    # 24 m wide, 36.87 deg. It uses 0.613 where 0.00256 psf/mph2 is 0.6133: 0.06 % apart.
    K_e = elevation_factor(110.0)
    assert K_e == pytest.approx(0.987, abs=1e-4)
    K_eave, K_h = exposure_coefficient("7-16", np.array([5.0, 6.5]), "C")
    assert (K_eave, K_h) == pytest.approx((0.86503, 0.91415), rel=1e-4)
    q_eave, q_h = velocity_pressure(52.0, np.array([K_eave, K_h]), K_zt=1.0, K_e=K_e, K_d=0.85)
    assert (q_eave, q_h) == pytest.approx((1202.9, 1271.2), rel=1e-3)
    _, second, leeward = slope_coefficients("7-16", np.radians(36.87), 6.5 / 24)
    assert float(second) == pytest.approx(0.393225, rel=1e-4)
    assert float(leeward) == -0.6
    outside = net_pressure(q_h, np.array([second, leeward]), 0.0, G=0.85, K_d=1.0)
    assert outside == pytest.approx([424.9, -648.3], rel=1e-3)
    parallel = [float(first) for _, _, first, _ in distance_coefficients("7-16", 6.5 / 28)]
    assert parallel == pytest.approx([-0.9, -0.9, -0.5, -0.3])


@pytest.mark.parametrize("edition", ["7-16", "7-22"])
def test_coefficients_by_distance(edition):
    # Fig. 27.3-1: to h/2, h, 2h, beyond; h/L up to 0.5 and from 1.0
    half, one = distance_coefficients(edition, 0.5), distance_coefficients(edition, 1.0)
    assert [float(z[2]) for z in half] == [-0.9, -0.9, -0.5, -0.3]
    assert [float(z[2]) for z in one] == [-1.3, -0.7, -0.7, -0.7]
    assert {float(z[3]) for z in half + one} == {-0.18}
    assert [(z[0], z[1]) for z in half] == [(0, 0.5), (0.5, 1), (1, 2), (2, np.inf)]
    between = distance_coefficients(edition, 0.75)
    assert [float(z[2]) for z in between] == pytest.approx([-1.1, -0.8, -0.6, -0.5])


@pytest.mark.parametrize(
    ("theta_deg", "h_over_L", "C_p"),
    [  # Fig. 27.3-1, linear in theta, then in h/L, between like signs
        (18.435, 0.5, (-0.4939, -0.0563, -0.5687)),
        (33.69, 0.25, (-0.0524, 0.3738, -0.6)),
        (22.62, 0.375, (-0.2976, 0.1786, -0.6)),
        (14.036, 0.1958, (-0.5386, -0.0347, -0.4614)),
        (36.87, 0.5208, (-0.1626, 0.3145, -0.6)),
        (10.0, 1.5, (-1.3, -0.18, -0.7)),
        (52.5, 0.2, (0.0, 0.5, -0.6)),  # second value from 0.4 at 45 to 0.01 theta at 60 deg
        (65.0, 0.7, (0.65, 0.65, -0.6)),
        (85.0, 0.3, (0.8, 0.8, -0.6)),
    ],
)
@pytest.mark.parametrize("edition", ["7-16", "7-22"])
def test_coefficients_of_slopes(edition, theta_deg, h_over_L, C_p):
    found = [float(c) for c in slope_coefficients(edition, np.radians(theta_deg), h_over_L)]
    assert found == pytest.approx(C_p, abs=1e-4)


def test_only_like_signs_are_interpolated():
    # 17.5 deg: second value +0.1 at h/L 0.25 and -0.09 at 0.5; half way the negative one counts as zero
    assert float(between_like_signs(0.1, -0.09, 0.5, +1)) == pytest.approx(0.05)
    assert float(slope_coefficients("7-22", np.radians(17.5), 0.375)[1]) == pytest.approx(0.05)
    assert float(between_like_signs(-0.2, 0.4, 0.5, -1)) == pytest.approx(-0.1)
    assert float(between_like_signs(-0.2, -0.4, 0.5, -1)) == pytest.approx(-0.3)


@pytest.mark.parametrize(
    ("enclosure", "GC_pi"), [("enclosed", 0.18), ("partially enclosed", 0.55), ("partially open", 0.18)]
)
def test_internal_coefficient(enclosure, GC_pi):
    # Table 26.13-1
    assert internal_coefficient("7-22", enclosure) == GC_pi
    assert internal_coefficient("7-16", enclosure) == GC_pi


ENCLOSED, PARTIAL = "enclosed", "partially enclosed"
# eq. 27.3-1 by hand, 115 mph, exposure C, K_d = G = 0.85. Pressures [psf], positive towards the surface:
# windward first +i -i, windward second +i -i, leeward +i -i
PRESSURES = [
    ("7-22", 3, 60, 11.75, ENCLOSED, 0.8512, 28.817, (-15.622, -6.804, -5.131, 3.687, -14.016, -5.198)),
    ("7-22", 4, 60, 13.0, ENCLOSED, 0.8512, 28.817, (-11.958, -3.140, -1.548, 7.270, -16.249, -7.431)),
    ("7-16", 6, 30, 13.75, ENCLOSED, 0.8489, 24.429, (-9.739, -0.944, 0.102, 8.896, -16.856, -8.062)),
    ("7-22", 6, 30, 13.75, ENCLOSED, 0.8512, 28.817, (-9.765, -0.947, 0.102, 8.920, -16.901, -8.083)),
    ("7-16", 9, 30, 15.625, ENCLOSED, 0.8562, 24.640, (-7.841, 1.030, 2.152, 11.023, -17.001, -8.131)),
    ("7-22", 9, 30, 15.625, ENCLOSED, 0.8583, 29.058, (-7.860, 1.032, 2.158, 11.049, -17.042, -8.151)),
    ("7-16", 6, 30, 13.75, PARTIAL, 0.8489, 24.429, (-18.778, 8.094, -8.937, 17.935, -25.895, 0.977)),
]


@pytest.mark.parametrize(("edition", "rise", "span", "h", "enclosure", "K_h", "q_h", "p"), PRESSURES)
def test_pressures_normal_to_the_ridge(edition, rise, span, h, enclosure, K_h, q_h, p):
    given = site(mean_roof_height=h * FOOT, enclosure=enclosure)
    cases = wind_cases(roof(pitch=rise / 12, span=float(span)), given, edition)
    found = values(named(cases, "left 1, +i"))
    assert float(found["K_h"]) == pytest.approx(K_h, abs=6e-5)
    assert float(found["q_h"]) / PSF == pytest.approx(q_h, rel=1e-4)
    for k, (value, sign) in enumerate((v, s) for v in (1, 2) for s in ("+i", "-i")):
        case = named(cases, f"left {value}, {sign}")
        assert psf(case, "left slope") == pytest.approx(p[k], rel=3e-4, abs=2e-3)
        assert psf(case, "right slope") == pytest.approx(p[4 + k % 2], rel=3e-4, abs=2e-3)


def test_reactions_and_net_uplift_of_a_partially_enclosed_building():
    # statics with the 7-16 pressures -18.778 and -25.895 psf on 15 ft of plan each, rise 7.5 ft, spacing 2 ft:
    # vertical 563.3 and 776.9 lb up at 7.5 and 22.5 ft, horizontal 281.7 left and 388.4 lb right at 3.75 ft
    r = roof()
    case = named(wind_cases(r, site(enclosure=PARTIAL), "7-16"), "left 1, +i")
    left, right, horizontal = (value / POUND_FORCE for value in reactions(case, r))
    assert (left, right, horizontal) == pytest.approx((-630.1, -710.1, -106.8), rel=1e-3)
    # 10 psf of dead load on plan is 300 lb at each end; 2.4.1 row 7, row 5, and 2.3.1 row 5
    heads = [
        CaseHead(name="dead", short="", action="D", pattern="both"),
        CaseHead(name=case.name, short=case.short, action=case.action, pattern=case.pattern),
    ]
    support = np.array([[300.0, 300.0], [left, right]])
    asd, lrfd = (combine(heads, load_scheme(f"asce7-16-{method}"), {}) for method in ("asd", "lrfd"))
    at = {name: row @ support for name, row in zip(asd.names, asd.factors, strict=True)}
    assert at["0.6D + 0.6W(left 1, +i)"] == pytest.approx([-198.0, -246.1], rel=1e-3)
    assert at["D + 0.6W(left 1, +i)"][1] == pytest.approx(-126.1, rel=1e-3)
    worst = lrfd.factors[lrfd.names.index("0.9D + W(left 1, +i)")] @ support
    assert worst == pytest.approx([-360.1, -440.1], rel=1e-3)


def test_windward_overhang_is_pushed_up_from_below():
    # 27.3.3: q_h 25.95 psf with K_d in it: 0.85 x 0.8 gives 17.646 psf up, C_p -0.3 on top 6.617 psf: 24.263 psf up
    assert float(net_pressure(25.95, -0.8, 0.0, G=0.85, K_d=1.0)) == pytest.approx(-17.646, rel=1e-4)
    assert float(net_pressure(25.95, -0.3 - 0.8, 0.0, G=0.85, K_d=1.0)) == pytest.approx(-24.263, rel=1e-4)
    r = roof(overhang=2.0)
    case = named(wind_cases(r, site(), "7-16"), "left 1, +i")
    q_h, C_p = float(values(case)["q_h"]) / PSF, float(values(case)["C_p windward"])
    assert psf(case, "left tail") == pytest.approx(q_h * 0.85 * (C_p - 0.8))
    assert psf(case, "right tail") == pytest.approx(q_h * 0.85 * -0.6)  # lee tail: top only, no internal pressure
    along = named(wind_cases(r, site(), "7-16"), "ridge 1, +i")
    assert psf(along, "left tail") == pytest.approx(q_h * 0.85 * -0.9)


def test_no_soffit_without_an_overhang():
    flush = roof(bearing_span=29.7, overhang=0.15)
    case = named(wind_cases(flush, site(), "7-22"), "left 1, +i")
    assert "C_p soffit" not in values(case)
    assert len([load for load in case.loads if load.surface == "left tail"]) == 1


@pytest.mark.parametrize("edition", ["7-16", "7-22"])
def test_least_wind_load_on_the_roof(edition):
    # 27.1.5: 8 psf x 7.5 ft of rise x 2 ft = 120 lb, to the right for wind from the left
    r = roof()
    cases = wind_cases(r, site(), edition)
    for short, sign in (("least left", 1), ("least right", -1)):
        pushes = [force(load, r) for load in named(cases, short).loads]
        assert sum(p[0] for p in pushes) / POUND_FORCE == pytest.approx(sign * 120.0)
        assert sum(p[1] for p in pushes) == 0.0


def test_cases_of_a_gable():
    shorts = [case.short for case in wind_cases(roof(overhang=1.0), site(), "7-22")]
    across = [f"{side} {k}, {sign}" for side in ("left", "right") for k in (1, 2) for sign in ("+i", "-i")]
    along = [f"ridge {k}, {sign}" for k in (1, 2) for sign in ("+i", "-i")]
    assert shorts == [*across, *along, "least left", "least right"]
    assert wind_cases(roof(), site(wind_speed=0.0), "7-22") == []


def test_from_60_deg_there_is_one_windward_value():
    steep = wind_cases(roof(pitch=2.0, span=20.0), site(mean_roof_height=20 * FOOT), "7-22")  # 63.4 deg
    assert [c.short for c in steep if c.short.startswith("left")] == ["left 1, +i", "left 1, -i"]


def test_wind_along_the_ridge_takes_the_zone_at_the_gable_end():
    case = named(wind_cases(roof(), site(), "7-22"), "ridge 1, +i")
    # h/L = 13.75/60: -0.9; (0.85 x -0.9 - 0.18) x 0.85 x 28.817 = -23.147
    for surface in ("left slope", "right slope"):
        assert psf(case, surface) == pytest.approx(-23.147, rel=1e-4)
    short = named(wind_cases(roof(), site(building_length=13.75 * FOOT), "7-22"), "ridge 1, +i")
    assert psf(short, "left slope") == pytest.approx((0.85 * -1.3 - 0.18) * 0.85 * 28.817, rel=1e-4)


def test_low_slopes_have_zones_from_the_windward_eave():
    # 2 on 12 is 9.46 deg. Eave height 12 ft at the wall, tails of 2 ft: edges 6, 12 and 24 ft from the tail end
    low = roof(pitch=2 / 12, span=60.0, overhang=2.0)
    given = site(mean_roof_height=14.5 * FOOT)
    assert float(reference_height(low, 14.5 * FOOT, "7-16")) / FOOT == pytest.approx(12.0)
    case = named(wind_cases(low, given, "7-16"), "left 1, +i")
    q_h = float(values(case)["q_h"]) / PSF
    stretches = [
        (load.surface, float(load.x_from) / FOOT, float(load.x_to) / FOOT, float(load.pressure) / PSF / q_h)
        for load in case.loads
        if load.x_from is not None
    ]
    i = 0.18
    expected = [  # h/L = 0.2: -0.9, -0.9, -0.5, -0.3 times G = 0.85, less the internal pressure except on tails
        ("left tail", -2.0, 0.0, -0.765),
        ("left slope", 0.0, 4.0, -0.765 - i),
        ("left slope", 4.0, 10.0, -0.765 - i),
        ("left slope", 10.0, 22.0, -0.425 - i),
        ("left slope", 22.0, 30.0, -0.255 - i),
        ("right slope", 30.0, 60.0, -0.255 - i),
        ("right tail", 60.0, 62.0, -0.255),
    ]
    assert [s[0] for s in stretches] == [e[0] for e in expected]
    assert np.array([s[1:] for s in stretches]) == pytest.approx(np.array([e[1:] for e in expected]), abs=1e-9)
    second = named(wind_cases(low, given, "7-16"), "left 2, -i")
    for load in second.loads:
        if load.surface.endswith("slope"):
            assert float(load.pressure) / PSF / q_h == pytest.approx(-0.18 * 0.85 + i)


def test_ten_degrees_takes_the_slope_values_at_the_eave_height():
    ten = roof(pitch=float(np.tan(np.radians(10.0))))
    case = named(wind_cases(ten, site(), "7-22"), "left 1, +i")
    assert float(values(case)["h"]) == pytest.approx(13.75 * FOOT - ten.pitch * 30 * FOOT / 4)
    assert "C_p windward" in values(case)
    assert all(load.x_from is None for load in case.loads)


def test_a_mixed_batch_gives_each_roof_its_own_load():
    pitches = np.array([2 / 12, 6 / 12])
    both = roof(pitch=pitches, span=np.full(2, 30.0), overhang=np.full(2, 1.0), spacing=np.full(2, 2.0))
    for k, pitch in enumerate(pitches):
        alone = roof(pitch=pitch, overhang=1.0)
        for case, own in zip(wind_cases(both, site(), "7-22"), wind_cases(alone, site(), "7-22"), strict=True):
            assert case.name == own.name
            total = sum(_vertical(load, k) for load in case.loads if load.kind == "normal")
            expected = sum(-force(load, alone)[1] for load in own.loads if load.kind == "normal") / (2 * FOOT)
            assert total == pytest.approx(expected, rel=1e-9)


def _vertical(load, k):
    lengths = {"left tail": 1.0, "right tail": 1.0, "left slope": 15.0, "right slope": 15.0}
    run = lengths[load.surface] * FOOT if load.x_from is None else float(load.x_to[k] - load.x_from[k])
    return float(load.pressure[k]) * run


@pytest.mark.parametrize(
    ("changes", "error", "text"),
    [
        ({"enclosure": "open"}, OutOfScopeError, r"ASCE 7-22, 27.3.2: free roofs of open buildings"),
        ({"mean_roof_height": 61 * FOOT}, OutOfScopeError, r"26.11.2: a mean roof height over 60 ft"),
        ({"building_length": 3 * FOOT}, OutOfScopeError, r"over 4 times as high as wide"),
        ({"building_length": 0.0}, JobError, r"building_length is zero"),
        ({"mean_roof_height": 3 * FOOT}, JobError, r"less than half the rise of the roof"),
        ({"exposure": "A"}, JobError, r"exposure: 'A' is not in ASCE 7-22, 26.7"),
        ({"wind_speed": None}, JobError, r"wind_speed is missing; ASCE 7-22, 26.5"),
        ({"ground_elevation": None}, JobError, r"ground_elevation is missing"),
    ],
)
def test_wrong_site_values_are_told(changes, error, text):
    with pytest.raises(error, match=text):
        wind_cases(roof(), site(**changes), "7-22")


def test_unknown_edition():
    with pytest.raises(JobError, match="ASCE 7-05 are not known"):
        wind_cases(roof(), site(), "7-05")


def test_elevation_below_the_sea_raises_the_pressure():
    low = values(named(wind_cases(roof(), site(ground_elevation=-100.0), "7-22"), "left 1, +i"))
    assert float(low["K_e"]) > 1.0
