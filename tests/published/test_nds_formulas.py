"""Formulas of the NDS against published worked examples. Tolerance: the digits the source prints."""

import numpy as np
import pytest
import sympy

from rooftruss.timber import nds_formulas as nds
from rooftruss.timber.deflection import creep_and_live_deflection, final_deflection
from rooftruss.timber.nds_tables import (
    bearing_area,
    creep_factor,
    effective_bending_length,
    flat_use_factor,
    require_time_effects,
    sheathed_chord,
)
from rooftruss.timber.terms import Creep
from rooftruss.units import INCH, PCF, PSI


def column(E_min, le, d, F_c_star, c=0.8):
    F_cE = nds.euler_column_stress(E_min, le / d)
    C_P = nds.column_stability_factor(F_c_star, F_cE, c=c)
    return float(F_cE), float(C_P)


@pytest.mark.parametrize(
    ("E_min", "le", "d", "F_c_star", "F_cE", "C_P", "F_c"),
    [
        # HUD Residential Structural Design Guide, 2nd ed. 2017, Example 5.6: SPF No.2 4x4 column, 7.3 ft, C_D 1.0
        (510e3, 87.6, 3.5, 1150 * 1.15, 669.2, 0.4378, 579.0),
        # By hand from NDS 2018 eq. 3.7-1: SPF No.1/No.2 2x4 web, 60 in across the plane, C_D 1.15
        (510e3, 60.0, 1.5, 1520.87, 262.01, 0.1657, 252.0),
        # By hand: DF-L No.2 2x6 chord, 84 in in its plane, C_D 1.15
        (580e3, 84.0, 5.5, 1707.75, 2043.93, 0.7492, 1279.47),
        # By hand: machine rated 2100f-1.8E 2x4, 96 in in its plane, C_D 1.15
        (910e3, 96.0, 3.5, 2156.25, 994.28, 0.4057, 874.83),
        # By hand, LRFD: SP No.2 2x4, 72 in, lambda 0.8: 1450 x 2.40 x 0.90 x 0.8 and 510000 x 1.76 x 0.85
        (510e3 * 1.76 * 0.85, 72.0, 3.5, 2505.6, 1482.0, 0.4946, 6507.0 / 5.25),
    ],
)
def test_column_stability(E_min, le, d, F_c_star, F_cE, C_P, F_c):
    found_F_cE, found_C_P = column(E_min, le, d, F_c_star)
    assert found_F_cE == pytest.approx(F_cE, rel=1e-3)
    assert found_C_P == pytest.approx(C_P, rel=1e-3)
    assert found_C_P * F_c_star == pytest.approx(F_c, rel=1e-3)


def test_slenderness_of_a_web_without_bracing():
    # NDS 2018, 3.7.1.4: l_e/d up to 50; a 2x web may be 75 in long, not 76 in
    assert np.array([75.0, 76.0, 114.0]) / 1.5 == pytest.approx([50.0, 50.667, 76.0], rel=1e-4)


@pytest.mark.parametrize(
    ("lu", "d", "b", "loading", "E_min", "F_b_star", "le", "R_B", "F_bE", "C_L", "tolerance"),
    [
        # AWC Structural Wood Design Examples 2015/2018, E1.2a: DF-L Select Structural 4x16, 20 ft, load at midspan
        (240.0, 15.25, 3.5, "concentrated at midspan", 690e3, 1500.0, 375.0, 21.6, 1776.0, 0.876, 2e-3),
        # AWC E1.6: Hem-Fir No.2 2x8, 12 ft, uniform; C_L for D+Lr+W, D+Lr, D
        (144.0, 7.25, 1.5, "uniform", 470e3, 1632.0, 256.5, 28.75, 682.5, 0.4044, 1e-3),
        (144.0, 7.25, 1.5, "uniform", 470e3, 1275.0, 256.5, 28.75, 682.5, 0.5089, 1e-3),
        (144.0, 7.25, 1.5, "uniform", 470e3, 918.0, 256.5, 28.75, 682.5, 0.6738, 1e-3),
        # AWC E1.8: Southern Pine No.2 2x4, 36 in, load at midspan; C_L for D+S+W
        (36.0, 3.5, 1.5, "concentrated at midspan", 510e3, 1760.0, 59.82, 9.646, 6577.0, 0.9825, 1e-3),
        # By hand from NDS 2018 Table 3.3.3 and eq. 3.3-6: SPF 2x4, 24 in between purlins
        (24.0, 3.5, 1.5, "uniform", 510e3, 1509.37, 49.44, 8.77, 7957.7, 0.9886, 1e-3),
    ],
)
def test_beam_stability(lu, d, b, loading, E_min, F_b_star, le, R_B, F_bE, C_L, tolerance):
    found_le = effective_bending_length(lu, d, loading=loading, edition="2018")
    found_R_B = nds.bending_slenderness(found_le, d, b)
    found_F_bE = nds.euler_bending_stress(E_min, found_R_B)
    assert float(found_le) == pytest.approx(le, rel=tolerance)
    assert float(found_R_B) == pytest.approx(R_B, rel=tolerance)
    assert float(found_F_bE) == pytest.approx(F_bE, rel=tolerance)
    assert float(nds.beam_stability_factor(F_b_star, found_F_bE)) == pytest.approx(C_L, rel=tolerance)


@pytest.mark.parametrize(
    ("ratio", "on_length", "on_depth"),
    # NDS 2018 Table 3.3.3, footnote for loadings that are not listed: below 7, 7 to 14.3, above
    [(6.9, 2.06, 0.0), (7.0, 1.63, 3.0), (14.2, 1.63, 3.0), (14.4, 1.84, 0.0), (30.0, 1.84, 0.0)],
)
def test_effective_length_of_an_unlisted_loading(ratio, on_length, on_depth):
    found = effective_bending_length(ratio * 3.5, 3.5, loading="unlisted", edition="2018")
    assert float(found) == pytest.approx(on_length * ratio * 3.5 + on_depth * 3.5, rel=1e-12)


@pytest.mark.parametrize("loading", ["uniform", "concentrated at midspan", "equal end moments", "cantilever tip load"])
def test_the_unlisted_loading_is_never_more_favourable_than_a_listed_one(loading):
    # A bending member of the same length: a step of the printed coefficients at 7 (14.42 d to 14.41 d) is allowed
    lu = np.linspace(0.1, 60, 400)
    listed = effective_bending_length(lu, 1.0, loading=loading, edition="2018")
    unlisted = effective_bending_length(lu, 1.0, loading="unlisted", edition="2018")
    assert np.all(unlisted >= listed * 0.999)


# AWC Structural Wood Design Examples, E1.6: truss bottom chord, tension and bending (stresses in psi)
E1_6 = [
    ("D+Lr+W", 292.4, 1008.0, 526.0, 1632.0, 660.1, 0.6124, 0.3539),
    ("D+Lr", 211.5, 787.5, 526.0, 1275.0, 648.9, 0.6811, 0.4847),
    ("D", 130.6, 567.0, 526.0, 918.0, 618.6, 0.8033, 0.6393),
]


@pytest.mark.parametrize(("name", "f_t", "F_t", "f_b", "F_b_star", "F_b_2star", "first", "second"), E1_6)
def test_tension_and_bending_of_a_bottom_chord(name, f_t, F_t, f_b, F_b_star, F_b_2star, first, second):
    assert float(nds.tension_and_bending(f_t, F_t, f_b, F_b_star)) == pytest.approx(first, rel=1e-3)
    assert float(nds.bending_less_tension(f_b, f_t, F_b_2star)) == pytest.approx(second, rel=1e-3)


# AWC Structural Wood Design Examples, E1.8: truss chord bent both ways under compression (Southern Pine No.2 2x4);
# combination, C_D, axial lb, edgewise and flatwise load lb at midspan of 36 in, eq. 3.9-3, eq. 3.9-4
E1_8 = [
    ("D+S+W", 1.6, 900.0, 120.0, 150.0, 0.9757, 0.2384),
    ("D+S", 1.15, 900.0, 0.0, 150.0, 1.0373, 0.2355),
    ("D", 0.9, 300.0, 0.0, 50.0, 0.3502, 0.0785),
]


@pytest.mark.parametrize(("name", "C_D", "axial", "edge", "flat", "eq_3", "eq_4"), E1_8)
def test_compression_and_bending_about_both_axes(name, C_D, axial, edge, flat, eq_3, eq_4):
    L, E_min, C_fu = 36.0, 510e3, flat_use_factor(1.5 * INCH, 3.5 * INCH, edition="2018")
    f_c, f_b1, f_b2 = axial / 5.25, edge * L / 4 / 3.0625, flat * L / 4 / 1.3125
    F_cE1, F_cE2 = nds.euler_column_stress(E_min, L / 3.5), nds.euler_column_stress(E_min, L / 1.5)
    le = effective_bending_length(L, 3.5, loading="concentrated at midspan", edition="2018")
    F_bE = nds.euler_bending_stress(E_min, nds.bending_slenderness(le, 3.5, 1.5))
    F_c = nds.column_stability_factor(1450 * C_D, F_cE2, c=0.8) * 1450 * C_D
    F_b1 = nds.beam_stability_factor(1100 * C_D, F_bE) * 1100 * C_D
    found = nds.compression_and_bending(
        f_c, F_c, F_cE1, f_b1, F_b1, f_b2=f_b2, F_b2=1100 * C_D * C_fu, F_cE2=F_cE2, F_bE=F_bE
    )
    assert float(found) == pytest.approx(eq_3, rel=2e-3)
    assert float(nds.compression_and_bending_stability(f_c, F_cE2, f_b1, F_bE)) == pytest.approx(eq_4, rel=2e-3)


def test_the_euler_guard_gives_no_negative_ratio():
    # NDS 2018, 3.9.2: f_c must stay below F_cE1. With 600 over 550 psi the amplifier would be 1/(-0.0909)
    assert pytest.approx(-0.0909, abs=1e-4) == 1 - 600 / 550
    f_c = np.array([300.0, 500.0, 549.0, 551.0, 600.0, 1e6])
    found = nds.compression_and_bending(f_c, 500.0, 550.0, 200.0, 1500.0)
    assert np.all(np.isfinite(found))
    assert np.all(np.diff(found) > 0)
    assert np.all(found[1:] > 1)


def test_column_and_beam_factors_are_roots_of_the_published_quadratic():
    # NDS eq. 3.7-1 and 3.3-6 are the smaller roots x of c x^2 - (1 + a) x + a = 0, a = Euler stress over strength
    a, c = sympy.symbols("a c", positive=True)
    published = (1 + a) / (2 * c) - sympy.sqrt(((1 + a) / (2 * c)) ** 2 - a / c)
    assert sympy.simplify(c * published**2 - (1 + a) * published + a) == 0
    for ratio in (0.01, 0.172, 1.0, 5.27, 400.0):
        C_P = float(nds.column_stability_factor(1.0, ratio, c=0.8))
        C_L = float(nds.beam_stability_factor(1.0, ratio))
        assert pytest.approx(float(published.evalf(30, {a: ratio, c: sympy.Rational(4, 5)})), rel=1e-12) == C_P
        assert pytest.approx(float(published.evalf(30, {a: ratio, c: sympy.Rational(19, 20)})), rel=1e-12) == C_L
        assert 0 < C_P < min(ratio, 1) * (1 + 1e-12)


def test_held_members_have_full_factors():
    assert float(nds.column_stability_factor(1500.0, nds.euler_column_stress(5e5, 0.0), c=0.8)) == 1.0
    assert float(nds.beam_stability_factor(1500.0, nds.euler_bending_stress(5e5, 0.0))) == 1.0


@pytest.mark.parametrize(
    ("le", "E", "K_T", "C_T"),
    # By hand from NDS 2018 eq. 4.4-1, K_M = 2300: 1 + 2300 l_e/(K_T E), l_e counted up to 96 in
    [(48.0, 1.4e6, 0.59, 1.1337), (72.0, 1.8e6, 0.82, 1.1122), (120.0, 1.4e6, 0.59, 1 + 2300 * 96 / (0.59 * 1.4e6))],
)
def test_buckling_stiffness(le, E, K_T, C_T):
    rule = sheathed_chord(edition="2018")
    found = nds.buckling_stiffness_factor(le * INCH, E * PSI, K_M=rule.K_M, K_T=K_T, length_up_to=rule.length_up_to)
    assert float(found) == pytest.approx(C_T, rel=1e-4)


@pytest.mark.parametrize(
    ("length", "end_distance", "C_b"),
    # NDS 2018 Table 3.10.4 prints 1.75, 1.25, 1.10 for 0.5, 1.5, 4 in, and 1.00 from 6 in; at a heel 1.0
    [(0.5, 4, 1.75), (1.5, 4, 1.25), (4, 4, 1.10), (6, 4, 1.0), (3.5, 0, 1.0), (3.5, 2.9, 1.0)],
)
def test_bearing_area(length, end_distance, C_b):
    addition, below, least = bearing_area(edition="2018")
    found = nds.bearing_area_factor(
        length * INCH, end_distance * INCH, addition=addition, length_below=below, least_end_distance=least
    )
    assert float(found) == pytest.approx(C_b, abs=0.007)


def test_creep_of_deflection():
    # NDS 2018 eq. 3.5-1 with 0.30 in of dead and 0.35 in of live load; IBC Table 1604.3 note d: 0.5 D + L
    dry = Creep(coefficient=creep_factor("dry", edition="2018") - 1, clause="", text="")
    wet = Creep(coefficient=creep_factor("wet", edition="2018") - 1, clause="", text="")
    assert float(final_deflection(0.30, 0.35, dry)) == pytest.approx(0.80)
    assert float(final_deflection(0.30, 0.35, wet)) == pytest.approx(0.95)
    assert float(creep_and_live_deflection(0.30, 0.35, dry)) == pytest.approx(0.50)


@pytest.mark.parametrize(
    ("G", "pounds"),
    # AWC Wood Structural Design Data, 1992, column of weights: SPF, DF-L, SP, HF at 15 percent
    [(0.42, 28.5), (0.50, 33.6), (0.55, 36.7), (0.43, 29.2)],
)
def test_weight_of_lumber(G, pounds):
    assert float(nds.lumber_density(G, 15.0)) / PCF == pytest.approx(pounds, abs=0.05)


def test_time_effects_outside_the_published_table_are_refused():
    require_time_effects(np.array([0.6, 0.7, 0.8, 1.0, 1.25]), edition="2018")
    for wrong in (np.nan, 0.5, 1.6):
        with pytest.raises(ValueError, match="Table N3"):
            require_time_effects(np.array([0.8, wrong]), edition="2018")
