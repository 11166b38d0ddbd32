"""EN 1995-1-1:2004+A1:2008+A2:2014 against published numbers and hand values."""

import math

import numpy as np
import pytest

from rooftruss.analysis.frame import solve
from rooftruss.basis.grades import find_grade, user_grade
from rooftruss.basis.sections import Section, find_section
from rooftruss.errors import JobError, OutOfScopeError, TableError
from rooftruss.timber import ec5_formulas as ec5
from rooftruss.timber.ec5 import Ec5, ec5_standard
from rooftruss.timber.ec5_check import RULES
from rooftruss.timber.ec5_resistance import resistances
from rooftruss.timber.ec5_tables import modification_factor
from rooftruss.timber.terms import Demand, Durations, Members
from tests.support import framed, load_cases

NAME = "EN 1995-1-1"
MPA = 1e6


def code(service_class: int = 1, **options: object) -> Ec5:
    return ec5_standard(NAME, {"service_class": service_class, **options})


def members(standard: Ec5, *rows: dict) -> Members:
    """One row per member: grade, b, h and any of le_strong, le_weak, lu_positive, lu_negative, plies, sharing [mm]."""
    made = []
    for row in rows:
        section = Section(name="test", breadth=row["b"] / 1e3, depth=row["h"] / 1e3, source="test")
        made.append((section, standard.properties(find_grade(row["grade"]), section)))

    def metres(key: str) -> np.ndarray:
        return np.array([row.get(key, 0.0) / 1e3 for row in rows])

    return Members(
        names=tuple(f"member {n}" for n in range(len(rows))),
        roles=("top chord",) * len(rows),
        breadth=np.array([s.breadth for s, _ in made]),
        depth=np.array([s.depth for s, _ in made]),
        plies=np.array([float(row.get("plies", 1)) for row in rows]),
        length=metres("le_strong"),
        le_strong=metres("le_strong"),
        le_weak=metres("le_weak"),
        lu_positive=metres("lu_positive"),
        lu_negative=metres("lu_negative"),
        load_sharing=np.array([bool(row.get("sharing", False)) for row in rows]),
        properties={key: np.array([p[key] for _, p in made]) for key in made[0][1]},
    )


def demand(N: float = 0.0, M: float = 0.0, V: float = 0.0) -> Demand:
    """One member, one combination: axial force (tension positive) [kN], moment [kN m], shear [kN]."""

    def cell(value: float) -> np.ndarray:
        return np.array([[max(value, 0.0) * 1e3]])

    return Demand(
        tension=cell(N), compression=cell(-N), moment_positive=cell(M), moment_negative=cell(-M), shear=cell(V)
    )


def lasting(*names: str) -> Durations:
    return Durations(names=names, time_effect=np.full(len(names), np.nan))


SHORT = lasting("short-term")


def explained(standard: Ec5, row: dict, loads: Demand, durations: Durations = SHORT) -> dict[str, float]:
    """Symbol or equation number -> value, of every step; and what `check` finds must agree with the last one."""
    member = members(standard, row)
    steps = standard.explain(member, loads, durations, 0, 0)
    checks = standard.check(member, loads, durations)
    assert steps[-1].value == pytest.approx(float(checks.utilisation[0, 0]), rel=1e-12)
    assert RULES[int(checks.rule[0])].clause in steps[-1].clause
    found = {step.symbol: step.value for step in steps}
    return found | {step.clause.split("eq. ")[-1]: step.value for step in steps if "eq. (6." in step.clause}


# --- factors -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("h", "k_h"), [(72, 1.1581), (97, 1.0911), (145, 1.0068), (150, 1.0), (220, 1.0), (30, 1.3)])
def test_size_factor_of_solid_timber(h, k_h):
    # EN 1995-1-1, eq. (3.1), by hand
    assert float(ec5.size_factor(h / 1e3, size=0.15, power=0.2, most=1.3)) == pytest.approx(k_h, abs=5e-5)


def test_size_factor_of_glued_laminated_timber():
    # EN 1995-1-1, eq. (3.2), by hand
    assert float(ec5.size_factor(0.405, size=0.6, power=0.1, most=1.1)) == pytest.approx(1.0401, abs=5e-5)
    properties = code().properties(find_grade("GL24h"), Section(name="t", breadth=0.1, depth=0.405, source="test"))
    assert properties["k_h,m"] == pytest.approx(1.0401, abs=5e-5)


def test_size_factor_goes_by_depth_in_bending_and_by_the_larger_side_in_tension():
    properties = code().properties(find_grade("C24"), Section(name="flat", breadth=0.12, depth=0.045, source="test"))
    assert properties["k_h,m"] == pytest.approx((150 / 45) ** 0.2)
    assert properties["k_h,t"] == pytest.approx((150 / 120) ** 0.2)


@pytest.mark.parametrize(
    ("duration", "service_class", "k_mod"),
    [  # EN 1995-1-1, Table 3.1
        ("short-term", 2, 0.9),
        ("medium-term", 2, 0.8),
        ("instantaneous", 1, 1.1),
        ("long-term", 2, 0.7),
        ("permanent", 3, 0.5),
        # DIN EN 1995-1-1/NA, Table NA.1: wind takes the mean of two classes
        ("short-term to instantaneous", 2, 1.0),
        ("short-term to instantaneous", 3, 0.8),
    ],
)
def test_modification_factor(duration, service_class, k_mod):
    assert modification_factor(duration, service_class) == (pytest.approx(k_mod), True)


def test_accidental_loads_take_no_partial_factor():
    # EN 1995-1-1, Table 2.3: gamma_M = 1.0; Table 2.2: accidental loads are instantaneous
    assert modification_factor("accidental", 2) == (1.1, False)
    row = {"grade": "C24", "b": 45, "h": 150}
    basic = explained(code(), row, demand(N=10.0), lasting("instantaneous"))
    accidental = explained(code(), row, demand(N=10.0), lasting("accidental"))
    assert accidental["gamma_M"] == 1.0
    assert basic["utilisation"] == pytest.approx(1.3 * accidental["utilisation"])


def test_design_strengths_of_a_public_verification_set():
    # C24, service class 1, medium term: 24 x 0.8/1.3; C18, service class 3, permanent, across the grain: 2.2 x 0.5/1.3
    k_mod, _ = modification_factor("medium-term", 1)
    assert float(ec5.design_strength(24.0, k_mod=k_mod, gamma_M=1.3, k_sys=1.0)) == pytest.approx(14.769, abs=5e-4)
    k_mod, _ = modification_factor("permanent", 3)
    assert float(ec5.design_strength(2.2, k_mod=k_mod, gamma_M=1.3, k_sys=1.0)) == pytest.approx(0.8462, abs=5e-5)


# --- stability ---------------------------------------------------------------------------------------------------

SLENDERNESS = (20, 40, 60, 80, 100, 120, 150, 180)
K_C = {  # by hand from EN 1995-1-1, (6.21) to (6.29), strengths of EN 338:2016
    "C16": (17, 5400, (0.9871, 0.8702, 0.6360, 0.4123, 0.2777, 0.1979, 0.1295, 0.0911)),
    "C24": (21, 7400, (0.9912, 0.8867, 0.6764, 0.4496, 0.3052, 0.2181, 0.1430, 0.1007)),
}


@pytest.mark.parametrize("grade", K_C)
def test_instability_factor(grade):
    f_c, E, printed = K_C[grade]
    side = 0.1
    for slenderness, k_c in zip(SLENDERNESS, printed, strict=True):
        length = slenderness * side / math.sqrt(12)
        slender = ec5.relative_slenderness(length, side, f_c_0_k=f_c, E_0_05=E)
        assert float(ec5.column_factor(slender, beta_c=0.2)) == pytest.approx(k_c, abs=5e-5 + 2e-4 * k_c)


def test_instability_factor_solves_its_quadratic():
    # (6.25) is the smaller root of 1/k_c: k_c^2 lambda^2 ... kappa^2 - 2 k kappa + lambda^2 = 0 with kappa = 1/k_c
    slender = np.linspace(0.31, 4.0, 50)
    k = 0.5 * (1 + 0.2 * (slender - 0.3) + slender**2)
    kappa = 1 / ec5.column_factor(slender, beta_c=0.2)
    np.testing.assert_allclose(kappa**2 - 2 * k * kappa + slender**2, 0.0, atol=1e-9)


@pytest.mark.parametrize(
    ("row", "expected"),
    [  # by hand from EN 1995-1-1, 6.3.2
        (
            {"grade": "C24", "b": 35, "h": 97, "le_strong": 1800, "le_weak": 600},
            {"lambda_rel,y": 1.090, "lambda_rel,z": 1.007, "k_c,y": 0.6224, "k_c,z": 0.6842},
        ),
        (
            {"grade": "C16", "b": 35, "h": 72, "le_strong": 1200, "le_weak": 1200},
            {"lambda_rel,y": 1.0311, "lambda_rel,z": 2.1212, "k_c,y": 0.6661, "k_c,z": 0.2018},
        ),
    ],
)
def test_truss_members_in_compression(row, expected):
    found = explained(code(), row, demand(N=-1.0))
    for symbol, value in expected.items():
        assert found[symbol] == pytest.approx(value, rel=1e-3), symbol


@pytest.mark.parametrize(
    ("slender", "k_crit"), [(0.5, 1.0), (0.75, 1.0), (1.0, 0.81), (1.4, 0.51), (2.0, 0.25), (3.0, 0.1111)]
)
def test_torsion_factor(slender, k_crit):
    # EN 1995-1-1, (6.34); a textbook tabulates C18 at 2.0 as 0.25 x 18
    assert float(ec5.torsion_factor(slender)) == pytest.approx(k_crit, abs=6e-4)


def test_lateral_torsional_buckling_of_a_joist():
    # Benoit, Legrand, Tastet, Calcul de structures en bois (2008), Example 2.3.2: C24, 50 x 200, 5 m, load on top
    l_ef = ec5.effective_beam_length(5.0, 0.2, ratio=0.9, addition=2.0)
    critical = ec5.critical_bending_stress(l_ef, 0.05, 0.2, E_0_05=7400.0, G_05=np.nan)
    slender = math.sqrt(24.0 / float(critical))
    assert float(l_ef) == pytest.approx(4.9)
    assert float(critical) == pytest.approx(14.724, abs=5e-4)
    assert slender == pytest.approx(1.2767, abs=5e-5)
    assert float(ec5.torsion_factor(slender)) == pytest.approx(0.6025, abs=5e-5)


def test_critical_stress_of_softwood_is_that_of_any_rectangle_with_its_shear_modulus():
    # (6.32) is (6.31) with E/G = 16 and a torsion constant for b/h near zero: 0.78 against pi/4
    thin = ec5.critical_bending_stress(3.0, 0.01, 1.0, E_0_05=8000.0, G_05=500.0)
    softwood = ec5.critical_bending_stress(3.0, 0.01, 1.0, E_0_05=8000.0, G_05=np.nan)
    assert float(thin / softwood) == pytest.approx(math.pi / 4 / 0.78, rel=4e-3)


def test_glued_laminated_column_with_biaxial_bending():
    # worked example of a published master thesis: GL28h 500 x 400 mm, 3 m, k_mod 0.8, gamma_M 1.3, N 2000 kN
    f_d = 28.0 * 0.8 / 1.3
    slender = {
        s: float(ec5.relative_slenderness(3.0, d, f_c_0_k=28.0, E_0_05=10500.0)) for s, d in (("y", 0.4), ("z", 0.5))
    }
    k_c = {axis: float(ec5.column_factor(value, beta_c=0.1)) for axis, value in slender.items()}
    assert slender == pytest.approx({"y": 0.427, "z": 0.342}, abs=6e-4)
    assert k_c == pytest.approx({"y": 0.985, "z": 0.995}, abs=6e-4)
    assert f_d == pytest.approx(17.231, abs=5e-4)
    c, m_y, m_z = 10.0 / f_d, 3.75 / f_d, 1.8 / f_d
    assert float(ec5.column_in_plane(c, k_c["y"], m_y + 0.7 * m_z)) == pytest.approx(0.88, abs=0.005)
    assert float(ec5.column_across(c, k_c["z"], m_y, k_m=0.7)) + m_z == pytest.approx(0.84, abs=0.005)


# --- members -----------------------------------------------------------------------------------------------------


def test_tie_in_tension_and_bending():
    # by hand from EN 1995-1-1, 6.2.3: C24, 35 x 120, k_mod 0.9
    found = explained(code(), {"grade": "C24", "b": 35, "h": 120}, demand(N=9.0, M=0.3))
    assert found["f_t,0,d"] / MPA == pytest.approx(10.497, rel=1e-4)
    assert found["f_m,d"] / MPA == pytest.approx(17.374, rel=1e-4)
    assert found["sigma_t,0,d/f_t,0,d"] == pytest.approx(2.143 / 10.497, rel=3e-4)
    assert found["(6.17)"] == pytest.approx(0.4097, abs=5e-5)
    assert found["utilisation"] == found["(6.17)"]


def test_flat_tie_takes_the_size_factor_of_its_larger_side():
    # EN 1995-1-1, 3.2(3): width in tension; 120 wide, 45 deep: (150/120)^0.2, not the capped 1.273 of the depth
    found = explained(code(), {"grade": "C24", "b": 120, "h": 45}, demand(N=10.0))
    expected = 10e3 / (120 * 45) / (14.5 * (150 / 120) ** 0.2 * 0.9 / 1.3)
    assert found["utilisation"] == pytest.approx(expected)


def test_web_without_a_brace():
    # by hand from EN 1995-1-1, 6.3.2: C16, 35 x 72, 1.5 m, 3.2 kN, k_mod 0.9
    found = explained(code(), {"grade": "C16", "b": 35, "h": 72, "le_strong": 1500, "le_weak": 1500}, demand(N=-3.2))
    assert found["lambda_rel,z"] == pytest.approx(2.6515, rel=3e-4)
    assert found["k_c,z"] == pytest.approx(0.1321, abs=1e-4)
    assert found["f_c,0,d"] / MPA == pytest.approx(11.769, rel=1e-4)
    assert found["utilisation"] == pytest.approx(0.817, abs=1e-3)


def test_web_with_a_brace_in_the_middle():
    found = explained(code(), {"grade": "C16", "b": 35, "h": 72, "le_strong": 1500, "le_weak": 750}, demand(N=-3.2))
    assert (found["k_c,y"], found["k_c,z"]) == pytest.approx((0.4883, 0.4668), abs=1e-4)
    assert found["utilisation"] == pytest.approx(0.2311, abs=1e-4)


def test_stocky_member():
    # by hand from EN 1995-1-1, 6.2.4: C24, 45 x 220, 30 kN, 3 kN m, k_mod 0.9: (3.030/14.538)^2 + 8.264/16.615
    found = explained(code(), {"grade": "C24", "b": 45, "h": 220}, demand(N=-30.0, M=3.0))
    assert found["(6.19)"] == pytest.approx(0.5408, abs=5e-5)
    assert "(6.23)" not in found


def test_stocky_member_in_compression_alone():
    # 6.1.4 rules; the square of (6.19) is for compression and bending together, and grows faster than the force
    found = explained(code(), {"grade": "C24", "b": 45, "h": 220}, demand(N=-200.0))
    assert found["utilisation"] == pytest.approx(200e3 / (45 * 220) / 14.538, rel=1e-4)
    assert "(6.19)" not in found


def test_lateral_torsional_buckling_with_compression():
    # by hand from EN 1995-1-1, 6.3.3: C24, 45 x 195, 8 kN, 2.2 kN m, k_mod 0.9, with l_ef = 3.09 m: eta 1.4192
    # here the moment is constant: unsupported length 2.7 m gives the same l_ef = 2.7 + 2 x 0.195 m
    row = {"grade": "C24", "b": 45, "h": 195, "le_strong": 3000, "le_weak": 3000, "lu_positive": 2700}
    found = explained(code(), row, demand(N=-8.0, M=2.2))
    assert found["l_ef+"] == pytest.approx(3.09)
    assert found["sigma_m,crit+"] / MPA == pytest.approx(19.398, abs=5e-4)
    assert found["lambda_rel,m+"] == pytest.approx(1.1123, abs=5e-5)
    assert found["k_crit+"] == pytest.approx(0.7258, abs=5e-5)
    assert found["k_c,z"] == pytest.approx(0.0621, abs=5e-5)
    assert found["(6.35)"] == pytest.approx(1.4192, rel=3e-3)


def test_load_on_the_tension_edge_adds_no_length():
    row = {"grade": "C24", "b": 45, "h": 195, "lu_positive": 2700, "lu_negative": 2700}
    assert explained(code(), row, demand(M=-2.0))["l_ef-"] == pytest.approx(2.7)


def test_shear_with_cracks():
    # by hand from EN 1995-1-1, 6.1.7: C24, 35 x 145, 3.1 kN, k_cr 0.67, k_mod 0.9
    found = explained(code(), {"grade": "C24", "b": 35, "h": 145}, demand(V=3.1))
    assert found["f_v,d"] / MPA == pytest.approx(2.769, abs=5e-4)
    assert found["utilisation"] == pytest.approx(0.4938, abs=3e-4)


def test_plies_share_the_force_and_buckle_one_by_one():
    row = {"grade": "C24", "b": 45, "h": 145, "le_strong": 2000, "le_weak": 2000, "lu_positive": 2000}
    one = explained(code(), row, demand(N=-5.0, M=0.5, V=1.0))
    two = explained(code(), row | {"plies": 2}, demand(N=-10.0, M=1.0, V=2.0))
    assert two["utilisation"] == pytest.approx(one["utilisation"])
    assert two["k_c,z"] == one["k_c,z"]


def test_load_sharing_raises_every_strength_by_a_tenth():
    row = {"grade": "C24", "b": 45, "h": 145}
    for loads in (demand(N=5.0), demand(M=1.0), demand(V=1.0)):
        alone = explained(code(), row, loads)["utilisation"]
        assert explained(code(), row | {"sharing": True}, loads)["utilisation"] == pytest.approx(alone / 1.1)


def test_governing_combination_goes_by_duration():
    # EN 1995-1-1, 3.1.3(2): N_G 5 kN, N_S 2 kN, service class 1: 6.75/0.6 = 11.25; 9.75/0.9 = 10.83; 9.75/0.8 = 12.19
    member = members(code(), {"grade": "C24", "b": 45, "h": 150})
    force = np.array([[6750.0], [9750.0], [9750.0]])
    zero = np.zeros_like(force)
    loads = Demand(tension=force, compression=zero, moment_positive=zero, moment_negative=zero, shear=zero)
    found = code().check(member, loads, lasting("permanent", "short-term", "medium-term")).utilisation[:, 0]
    assert found / found[0] * 11.25 == pytest.approx([11.25, 10.833, 12.188], abs=6e-4)


def test_bearing_of_a_heel():
    # by hand from EN 1995-1-1, 6.1.5: C24, 45 mm, bearing 90 mm at the end: l_ef 120 mm, f_c,90,d = 2.5 x 0.9/1.3
    member = members(code(2), {"grade": "C24", "b": 45, "h": 145})
    reaction = np.array([[7000.0], [-3000.0]])
    durations = lasting("short-term", "instantaneous")
    found = code(2).bearing(reaction, member, np.array([0.09]), durations)
    expected = 7000.0 / (45 * 120) / (2.5 * 0.9 / 1.3)
    assert found[:, 0] == pytest.approx([expected, 0.0])
    steps = code(2).explain_bearing(reaction, member, np.array([0.09]), durations, 0, 0)
    assert steps[-1].value == pytest.approx(expected, rel=1e-12)
    assert next(s.value for s in steps if s.symbol == "l_ef") == pytest.approx(0.12)


@pytest.mark.parametrize(
    ("length", "end", "l_ef"), [(0.09, 0.0, 0.12), (0.09, 0.5, 0.15), (0.09, 0.01, 0.13), (0.02, 0.5, 0.06)]
)
def test_contact_length(length, end, l_ef):
    # EN 1995-1-1, 6.1.5(1): 30 mm on each side, not beyond the end, not more than the contact length
    assert float(ec5.contact_length(length, addition=0.03, end_distance=end)) == pytest.approx(l_ef)


@pytest.mark.parametrize(
    ("grade", "length", "k_c_90"),
    [("C24", 0.09, 1.5), ("C24", 0.5, 1.5), ("GL28h", 0.4, 1.75), ("GL28h", 0.41, 1.0)],
)
def test_bearing_away_from_the_loads(grade, length, k_c_90):
    # EN 1995-1-1, 6.1.5(4), discrete supports, l_1 >= 2h: 1.5 solid softwood; 1.75 glued laminated, l up to 400 mm
    row, durations = {"grade": grade, "b": 45, "h": 145}, lasting("short-term")
    clear, over = code(load_over_bearing=False), code()
    force, at = np.array([[7000.0]]), np.array([length])
    plain = over.bearing(force, members(over, row), at, durations)
    assert clear.bearing(force, members(clear, row), at, durations) * k_c_90 == pytest.approx(plain)
    steps = clear.explain_bearing(force, members(clear, row), at, durations, 0, 0)
    assert next(s.value for s in steps if s.symbol == "k_c,90") == k_c_90
    assert steps[-1].value * k_c_90 == pytest.approx(float(plain[0, 0]))
    assert any("6.1.5(4)" in note for note in clear.notes)
    assert not any("6.1.5" in note for note in over.notes)  # the job form prints it where nothing is said


# --- deflection and self-weight ----------------------------------------------------------------------------------


def test_creep_of_a_floor():
    # Benoit, Legrand, Tastet (2008), Example 2.3.1: 0.6 (0.57 + 0.3 x 1.5) 0.5 m = 0.306 kN/m
    lasts = np.array([1.0, 0.3])
    acting = np.array([[1.0, 1.0]])
    grown = ec5.final_factors(acting, lasts, k_def=0.6) - acting
    assert (grown @ np.array([0.57, 1.5]) * 0.5)[0] == pytest.approx(0.306)


def test_creep_of_a_floor_in_millimetres():
    """The same example: w_creep = 3.0604 mm. A joist of 75 x 200 mm over 4.5 m, C24: bending 2.9706 mm, which is ours,
    and 0.0898 mm from shear, 1.2 q l^2 / (8 G A), which a frame of Bernoulli beams leaves out."""
    length, count, q = 4.5, 8, 306.0
    x = np.linspace(0.0, length, count + 1)
    nodes = {f"n{k}": (float(v), 0.0) for k, v in enumerate(x)}
    beam = framed(
        nodes,
        [(f"m{k}", f"n{k}", f"n{k + 1}") for k in range(count)],
        {"n0": (1, 1), f"n{count}": (0, 1)},
        pins=False,
    )
    cases = load_cases(beam, [([(k, 0.0, length / count, 0.0, -q) for k in range(count)], (), {})])
    area, inertia = 0.075 * 0.2, 0.075 * 0.2**3 / 12
    ones = np.ones(count)
    moved = solve(beam, 11e9 * area * ones, 11e9 * inertia * ones, cases).displacements
    bending = -float(moved[0, count // 2, 1])
    shear = 1.2 * q * length**2 / (8 * 690e6 * area)
    assert bending == pytest.approx(2.9706e-3, abs=1e-7)
    assert bending + shear == pytest.approx(3.0604e-3, abs=2e-7)


def test_final_deflection():
    # by hand from EN 1995-1-1, 2.2.3: w_G 3.0, w_S 4.0, w_W 1.5 mm, service class 2: w_inst 7.9, w_fin 10.3 mm
    factors = np.array([[1.0, 1.0, 0.6], [1.0, 1.0, 0.6]])
    found = code(2).service_factors(factors, actions=("D", "S", "W"), kinds=("instantaneous", "final"), lasting={})
    assert found @ np.array([3.0, 4.0, 1.5]) == pytest.approx([7.9, 10.3])


def test_snow_that_lasts_creeps():
    # EN 1990, Table A1.1, above 1000 m: psi_2 of snow 0.2
    found = code(2).service_factors(
        np.array([[1.0, 1.0, 0.0]]), actions=("D", "S", "W"), kinds=("final",), lasting={"S": 0.2, "W": 0.0}
    )
    assert found[0] == pytest.approx([1.8, 1.16, 0.0])


@pytest.mark.parametrize(("service_class", "k_def"), [(1, 0.6), (2, 0.8), (3, 2.0)])
def test_creep_factor(service_class, k_def):
    assert code(service_class).creep().coefficient == k_def


def test_self_weight():
    # EN 338:2016: C24 rho_mean 420 kg/m3; 35 x 97 mm at g = 9.81: 13.99 N/m
    properties = code().properties(find_grade("C24"), Section(name="t", breadth=0.035, depth=0.097, source="test"))
    assert properties["density"] * 9.81 * 0.035 * 0.097 == pytest.approx(13.99, abs=5e-3)
    assert properties["E"] == pytest.approx(11000e6)


# --- national choices, options, refusals -------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("country", "grade", "depth", "service_class", "gamma_M", "k_cr"),
    [
        ("recommended", "C24", 145, 2, 1.3, 0.67),
        ("recommended", "GL28h", 145, 2, 1.25, 0.67),
        ("germany", "C24", 145, 2, 1.3, 0.5),  # 2.0/f_v,k
        ("germany", "GL28h", 145, 2, 1.3, 2.5 / 3.5),
        ("france", "C24", 145, 2, 1.3, 1.0),
        ("france", "C24", 195, 2, 1.3, 0.67),
        ("france", "C24", 145, 3, 1.3, 0.67),
        ("france", "GL28h", 195, 1, 1.25, 1.0),
    ],
)
def test_national_choices(country, grade, depth, service_class, gamma_M, k_cr):
    standard = code(service_class, national_choices=country)
    properties = standard.properties(find_grade(grade), Section(name="t", breadth=0.045, depth=depth / 1e3, source="t"))
    assert properties["gamma_M"] == gamma_M
    assert properties["k_cr"] == pytest.approx(k_cr)


def test_load_sharing_conditions():
    # EN 1995-1-1, 6.6(3): trusses not more than 1.2 m apart
    auto = code()
    assert auto.shares_load(role="top chord", sheathed=True, quantity=3, spacing=1.2)
    assert not auto.shares_load(role="top chord", sheathed=True, quantity=3, spacing=1.25)
    assert not auto.shares_load(role="top chord", sheathed=False, quantity=9, spacing=0.6)
    assert not auto.shares_load(role="web", sheathed=True, quantity=9, spacing=0.6)
    assert not code(load_sharing=False).shares_load(role="top chord", sheathed=True, quantity=9, spacing=0.6)
    assert code(load_sharing=True).shares_load(role="bottom chord", sheathed=False, quantity=1, spacing=2.0)


def test_a_country_without_values_is_refused():
    with pytest.raises(OutOfScopeError, match="'united kingdom': no EN 1995-1-1 values"):
        code(national_choices="united kingdom")


@pytest.mark.parametrize("service_class", [None, 0, 4, "2", True])
def test_service_class_must_be_given(service_class):
    with pytest.raises(JobError, match=r"service_class: .* must be 1, 2 or 3"):
        ec5_standard(NAME, {"service_class": service_class})


def test_load_sharing_must_be_known():
    with pytest.raises(JobError, match="load_sharing: 'yes' must be"):
        code(load_sharing="yes")


def test_grades_of_another_family_are_refused():
    with pytest.raises(JobError, match="is for NDS, the scheme checks by EN 1995-1-1"):
        code().properties(find_grade("SPF No.1/No.2"), find_section("45x95"))


def test_an_incomplete_user_grade_is_told_what_it_lacks():
    grade = user_grade({"name": "own", "family": "EN", "product": "solid timber", "f_m_k": 28.3e6})
    with pytest.raises(JobError, match="grade 'own' lacks f_t_0_k"):
        code().properties(grade, find_section("45x95"))


def test_a_user_grade_without_its_product_is_refused():
    values = find_grade("C24").values
    given = {k: v for k, v in values.items() if isinstance(v, float) and not math.isnan(v)}
    with pytest.raises(JobError, match="product 'none' of the grade is not known"):
        code().properties(
            user_grade({"name": "own", "family": "EN", "product": "none", **given}), find_section("45x95")
        )


def test_an_unknown_duration_is_refused():
    with pytest.raises(TableError, match="load duration 'two months' is not in k_mod_en1995"):
        modification_factor("two months", 1)


def test_deflection_limits_stay_in_the_ranges_of_table_7_2():
    # EN 1995-1-1, Table 7.2: w_inst l/300 to l/500, w_net,fin l/250 to l/350, which w_fin has to meet without precamber
    for ceiling in ("plaster", "non-plaster", "none"):
        assert 300 <= code().deflection_limit(ceiling, "instantaneous").ratio <= 500
        assert 250 <= code().deflection_limit(ceiling, "final").ratio <= 350
    with pytest.raises(JobError, match="kind of deflection 'live' is not one of EN 1995-1-1"):
        code().deflection_limit("none", "live")
    with pytest.raises(JobError, match="ceiling: 'gypsum' is not known"):
        code().deflection_limit("gypsum", "final")


def test_resistances_of_held_members_need_no_reduction():
    r = resistances(members(code(), {"grade": "C24", "b": 45, "h": 145}))
    assert r.positive.k_crit[0] == r.k_c_y[0] == r.k_c_z[0] == 1.0
    assert np.isinf(r.positive.sigma_m_crit[0])
