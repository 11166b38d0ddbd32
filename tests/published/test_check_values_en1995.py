"""Check values of EN 1995-1-1 and of the grades it takes; test_check_values_en.py says what they are."""

import math
import re
from dataclasses import replace

import numpy as np
import pytest

from rooftruss.analysis.effects import combined_extremes, unit_effects
from rooftruss.analysis.frame import solve
from rooftruss.analysis.simplified import simplified_solution
from rooftruss.basis.grades import find_grade
from rooftruss.basis.jobform import read_job
from rooftruss.basis.sections import Section
from rooftruss.design.sizing import size_truss
from rooftruss.shapes.catalogue import Layout
from rooftruss.timber import ec5_formulas as ec5
from rooftruss.timber.ec5_tables import beam_length_rule, product
from rooftruss.timber.ec5_truss import bay_lengths, joint_force, simplified_analysis, truss_rules
from rooftruss.timber.terms import Demand
from tests.check_values import Entry, checks, meet
from tests.en_jobs import BARN, barn, en_spec
from tests.published.test_check_values_en1990 import all_together, made_of, rows_of
from tests.published.test_timber_en1995 import code, demand, lasting, members
from tests.support import framed, load_cases, placed, stiffness

MPA = 1e6


# --- grades, self-weight -----------------------------------------------------------------------------------------


@checks("EN338-C16", "EN338-C40", "EN14080-GL24h", "EN14080-GL28h")
def test_strength_class(entry: Entry) -> None:
    row = find_grade(entry["inputs"]["class"]).values
    meet(entry, {k: row[k] / (1.0 if k.startswith("rho") else MPA) for k in entry["expected"]})


OWN = """
[[grade]]
name = "TR26"
product = "solid timber"
f_m_k = "28.3 MPa"
f_t_0_k = "17.6 MPa"
f_c_0_k = "22.9 MPa"
f_c_90_k = "2.6 MPa"
f_v_k = "4.0 MPa"
E_0_mean = "11000 MPa"
E_0_05 = "7370 MPa"
rho_mean = "440 kg/m^3"
"""


@checks("TR26-DERIVED")
def test_a_trussed_rafter_grade_of_the_job(entry: Entry, tmp_path) -> None:
    """No table has this grade: a job gives its values, rounded as a schedule prints them, and the checks take those.
    There is no shear in the deflections, so a job has no G_mean to give."""
    path = tmp_path / "own.toml"
    path.write_text(BARN.read_text("utf-8") + OWN, "utf-8")
    (grade,) = read_job(path).grades
    found = code().properties(grade, Section(name="deep", breadth=0.047, depth=0.15, source="test"))
    assert found["k_h,m"] == found["k_h,t"] == 1.0
    assert (found["f_m_k"] / MPA, found["E"] / MPA) == pytest.approx(
        [entry["inputs"][k] for k in ("f_m_k", "E_0_mean")]
    )
    meet(entry, {k: found[k] / MPA for k in entry["expected"] if k != "G_mean"}, unknown=["G_mean"])


@checks("SELFWT-35x97")
def test_self_weight(entry: Entry) -> None:
    given = entry["inputs"]
    spec = en_spec()
    size = {"sizes": (f"{given['b_mm']}x{given['h_mm']}",), "grades": (given["class"],)}
    groups = {name: replace(group, **size) for name, group in spec.timber.groups.items()}
    run = size_truss(barn(), replace(spec, timber=replace(spec.timber, groups=groups))).run
    lines = np.linalg.norm(run.cases.q[run.cases.names.index("self-weight")], axis=-1)
    assert np.ptp(lines) < 1e-9
    meet(entry, {"kN_per_m": lines[0] / 1e3})


# --- timber ------------------------------------------------------------------------------------------------------


def explained(row: dict, loads: Demand, duration: str = "short-term", **options: object) -> dict[str, float]:
    """What an explained check shows: symbol or equation -> value; stresses that stand in its texts [N/mm2]."""
    standard = code(**options)
    steps = standard.explain(members(standard, row), loads, lasting(duration), 0, 0)
    texts = " ".join(step.text for step in steps)
    stresses = {name: float(v) for name, v in re.findall(r"(\S+) = [^=]+ = ([\d.]+) N/mm2", texts)}
    equations = {step.clause.split("eq. ")[-1]: step.value for step in steps if "eq. (6." in step.clause}
    return {step.symbol: step.value for step in steps} | equations | stresses


def row_of(given: Entry) -> dict[str, object]:
    """The member of a check value as `members` takes it."""
    names = {"b_mm": "b", "h_mm": "h", "class": "grade", "l_ef_y_mm": "le_strong", "l_ef_z_mm": "le_weak"}
    return {names[key]: value for key, value in given.items() if key in names}


def short_term(given: Entry, row: dict[str, object], loads: Demand) -> dict[str, float]:
    """The explained check under a short-term load, whose k_mod and gamma_M have to be those of the check value."""
    found = explained(row, loads)
    assert (found["k_mod"], found["gamma_M"]) == (given["k_mod"], given["gamma_M"])
    return found


@checks("KH-72", "KH-97", "KH-145", "KH-150", "KHGL-405")
def test_size_factor(entry: Entry) -> None:
    grade = "GL24h" if entry["id"].startswith("KHGL") else "C24"
    section = Section(name="test", breadth=0.035, depth=entry["inputs"]["h_mm"] / 1e3, source="test")
    meet(entry, {"k_h": code().properties(find_grade(grade), section)["k_h,m"]})


@checks("FD-C24-MED")
def test_design_strength(entry: Entry) -> None:
    given = entry["inputs"]
    row = {"grade": given["class"], "b": 45, "h": 150}  # k_h = 1
    found = explained(row, demand(M=1.0), f"{given['duration']}-term", service_class=given["service_class"])
    assert found["k_h,m"] == found["k_sys"] == 1.0
    meet(entry, {"f_m_d": found["f_m,d"] / MPA})


@checks("FD-C18-SC3")
def test_design_strength_across_the_grain(entry: Entry) -> None:
    given = entry["inputs"]
    standard = code(given["service_class"])
    member, at = members(standard, {"grade": given["class"], "b": 45, "h": 150}), np.array([0.1])
    steps = standard.explain_bearing(np.array([[1e3]]), member, at, lasting(given["duration"]), 0, 0)
    meet(entry, {"f_c_90_d": next(s.value for s in steps if s.symbol == "f_c,90,d") / MPA})


@checks("KC-TABLE-C16", "KC-TABLE-C24")
def test_instability_factor(entry: Entry) -> None:
    k_c, h = {}, 100.0
    for slenderness in entry["inputs"]["lambda"]:
        row = {"grade": entry["inputs"]["class"], "b": 50, "h": h, "le_strong": slenderness * h / math.sqrt(12)}
        found = explained(row, demand(N=-1.0))
        assert found["lambda_y"] == pytest.approx(slenderness)
        k_c[str(slenderness)] = found["k_c,y"]
    meet(entry, {"k_c": k_c})


@checks("KC-C24-35x97-1800", "KC-C16-35x72-1200")
def test_instability_factors_of_truss_members(entry: Entry) -> None:
    found = explained(row_of(entry["inputs"]), demand(N=-1.0))
    meet(entry, {f"{name}_{axis}": found[f"{name},{axis}"] for name in ("lambda_rel", "k_c") for axis in "yz"})


@checks("KCRIT-0.5", "KCRIT-0.75", "KCRIT-2.0", "KCRIT-3.0")
def test_torsion_factor(entry: Entry) -> None:
    meet(entry, {"k_crit": ec5.torsion_factor(entry["inputs"]["lambda_rel_m"])})


def lateral(given: Entry, length_mm: float) -> dict[str, float]:
    """Lateral torsional buckling under a uniform load on the compressed edge, by the row of Table 6.1 for it."""
    b, h = given["b_mm"] / 1e3, given["h_mm"] / 1e3
    values = find_grade(given["class"]).values
    ratio, addition = beam_length_rule("uniform load")
    l_ef = ec5.effective_beam_length(length_mm / 1e3, h, ratio=ratio, addition=addition)
    critical = ec5.critical_bending_stress(l_ef, b, h, E_0_05=values["E_0_05"], G_05=values["G_05"])
    slender = math.sqrt(values["f_m_k"] / float(critical))
    return {
        "l_ef_mm": float(l_ef) * 1e3,
        "sigma_m_crit": float(critical) / MPA,
        "lambda_rel_m": slender,
        "k_crit": float(ec5.torsion_factor(slender)),
    }


@checks("BENOIT-232-KCRIT")
def test_lateral_torsional_buckling_of_a_joist(entry: Entry) -> None:
    meet(entry, lateral(entry["inputs"], entry["inputs"]["L_m"] * 1e3))


@checks("MEMBER-635")
def test_lateral_torsional_buckling_with_compression(entry: Entry) -> None:
    """The checks take the moment as constant between restraints (Table 6.1); this value has a uniform load."""
    given = entry["inputs"]
    found = lateral(given, given["L_unrestrained_mm"])
    length = given["L_unrestrained_mm"]
    row = row_of(given) | {"le_strong": length, "le_weak": length, "lu_positive": length}
    shown = short_term(given, row, demand(N=-given["N_c_d_kN"], M=given["M_y_d_kNm"]))
    assert shown["k_h,m"] == given["k_h"]
    c, m = (shown[f"sigma_{x},d"] * MPA / shown[f"f_{y},d"] for x, y in (("c,0", "c,0"), ("m,y", "m")))
    eta = ec5.torsion_and_compression(c, shown["k_c,z"], m, found["k_crit"])
    meet(entry, found | {"k_c_z": shown["k_c,z"], "eta_6_35": eta})


@checks("BHT-COLUMN")
def test_glued_laminated_column(entry: Entry) -> None:
    """Bending about both axes, which no member of a truss has: put into the left sides of (6.23) and (6.24)."""
    given = entry["inputs"]
    standard = code(national_choices="germany")  # gamma_M = 1.3
    strong = {"grade": given["class"], "b": given["b_mm"], "h": given["h_mm"]}
    length = given["L_m"] * 1e3
    options = {"national_choices": "germany"}
    row = strong | {"le_strong": length, "le_weak": length}
    shown = explained(row, demand(N=-given["N_kN"], M=given["M_y_kNm"]), "medium-term", **options)
    assert (shown["k_mod"], shown["gamma_M"], shown["beta_c"]) == (given["k_mod"], given["gamma_M"], given["beta_c"])
    flat = explained(
        strong | {"b": strong["h"], "h": strong["b"]}, demand(M=given["M_z_kNm"]), "medium-term", **options
    )
    steps = standard.explain(members(standard, row), demand(N=-1.0), lasting("medium-term"), 0, 0)
    k = {s.symbol[-1]: float(re.search(r"k = ([\d.]+)", s.text).group(1)) for s in steps if s.symbol[:4] == "k_c,"}
    f_m_d = find_grade(given["class"]).values["f_m_k"] / MPA * given["k_h"] * given["k_mod"] / given["gamma_M"]
    m_y, m_z = shown["sigma_m,y,d"] / f_m_d, flat["sigma_m,y,d"] / f_m_d
    c, k_m = shown["sigma_c,0,d"] * MPA / shown["f_c,0,d"], product("glued laminated timber").k_m
    found = {
        **{f"lambda_rel_{axis}": shown[f"lambda_rel,{axis}"] for axis in "yz"},
        **{f"k_{axis}": k[axis] for axis in "yz"},
        **{f"k_c_{axis}": shown[f"k_c,{axis}"] for axis in "yz"},
        "f_c_0_d": shown["f_c,0,d"] / MPA,
        "sigma_c": shown["sigma_c,0,d"],
        "sigma_m_y": shown["sigma_m,y,d"],
        "sigma_m_z": flat["sigma_m,y,d"],
        "eta_6_23": ec5.column_in_plane(c, shown["k_c,y"], m_y + k_m * m_z),
        "eta_6_24": ec5.column_across(c, shown["k_c,z"], m_y + m_z / k_m, k_m=k_m),
    }
    meet(entry, found)


@checks("MEMBER-TIE")
def test_tie(entry: Entry) -> None:
    given = entry["inputs"]
    found = short_term(given, row_of(given), demand(N=given["N_t_d_kN"], M=given["M_y_d_kNm"]))
    assert found["k_sys"] == given["k_sys"]
    t, m = found["sigma_t,0,d/f_t,0,d"], found["sigma_m,y,d/f_m,y,d"]
    expected = {
        "sigma_t_0_d": found["sigma_t,0,d"],
        "sigma_m_y_d": found["sigma_m,y,d"],
        "f_t_0_d": found["f_t,0,d"] / MPA,
        "f_m_y_d": found["f_m,d"] / MPA,
        "eta_6_17": found["(6.17)"],
        "eta_6_18": ec5.bending_and_tension(t, product("solid timber").k_m * m),  # never the larger without sigma_m,z
    }
    meet(entry, expected)


@checks("MEMBER-WEB", "MEMBER-WEB-BRACED")
def test_web(entry: Entry) -> None:
    given = entry["inputs"]
    shown = short_term(given, row_of(given), demand(N=-given["N_c_d_kN"]))
    found = {
        "lambda_z": shown["lambda_z"],
        "lambda_rel_z": shown["lambda_rel,z"],
        "k_c_y": shown["k_c,y"],
        "k_c_z": shown["k_c,z"],
        "sigma_c_0_d": shown["sigma_c,0,d"],
        "f_c_0_d": shown["f_c,0,d"] / MPA,
        "eta": shown["utilisation"],
    }
    meet(entry, {key: found[key] for key in entry["expected"]})


@checks("MEMBER-619")
def test_stocky_member(entry: Entry) -> None:
    given = entry["inputs"]
    found = short_term(given, row_of(given), demand(N=-given["N_c_d_kN"], M=given["M_y_d_kNm"]))
    c, m = found["sigma_c,0,d/f_c,0,d"], found["sigma_m,y,d/f_m,y,d"]
    eta = ec5.bending_and_compression(c, product("solid timber").k_m * m)  # never the larger without sigma_m,z
    meet(entry, {"eta_6_19": found["(6.19)"], "eta_6_20": eta})


@checks("SHEAR-KCR")
def test_shear(entry: Entry) -> None:
    given = entry["inputs"]
    found = short_term(given, row_of(given), demand(V=given["V_d_kN"]))
    assert found["k_cr"] == given["k_cr"]
    meet(entry, {"tau_d": found["tau_d"], "f_v_d": found["f_v,d"] / MPA, "eta": found["utilisation"]})


# --- trusses -----------------------------------------------------------------------------------------------------


@checks("TRUSS-FRD")
def test_force_that_every_joint_passes_on(entry: Entry) -> None:
    meet(entry, {"F_r_d_kN": joint_force(entry["inputs"]["L_truss_m"]) / 1e3})


@checks("TRUSS-LEF")
def test_effective_lengths_of_the_simplified_analysis(entry: Entry) -> None:
    in_bay, at_node = (v * 1e3 for v in bay_lengths(np.array(entry["inputs"]["bays_mm"]) / 1e3))
    found = {
        "outer_bay_mm": in_bay[0],
        "inner_bay_mm": in_bay[1],
        "at_node_between_1_and_2_mm": at_node[0],
        "axial_force_factor": truss_rules("simplified", node_loaded=False).compression,
    }
    meet(entry, found)


@checks("TRUSS-NODEMOM")
def test_moment_over_the_inner_support_of_a_rafter(entry: Entry) -> None:
    """The rafter of a Fink of four panels, slope 3:4: two bays, loaded across."""
    bays, w = entry["inputs"]["bays_m"], entry["inputs"]["w_normal_kN_m"] * 1e3
    truss = placed(Layout(shape="fink", panels=4, tails=False, raised_heel=False), span=3.2 * bays[0], pitch=0.75)
    rafter = [truss.topology.names.index(name) for name in ("top 1", "top 2")]
    assert truss.length[rafter].tolist() == pytest.approx(bays)
    cases = load_cases(truss, [([(k, 0.0, float(truss.length[k]), 0.6 * w, -0.8 * w) for k in rafter], (), {})])

    def extremes(factor: float) -> tuple[float, float]:
        solution = simplified_solution(truss, *stiffness(truss), cases, support_moments=factor)
        found = combined_extremes(unit_effects(truss, cases, solution), np.eye(1))
        return float(found.moment_min[0, rafter].min()) / 1e3, float(found.moment_max[0, rafter].max()) / 1e3

    node, span = extremes(simplified_analysis().support_moments)
    meet(entry, {"M_node_kNm": node, "M_node_unreduced_kNm": extremes(1.0)[0], "M_span_max_kNm": span})


# --- deflection --------------------------------------------------------------------------------------------------


@checks("DEFL-WFIN")
def test_final_deflection(entry: Entry) -> None:
    given, symbols = entry["inputs"], ["G", "S", "W"]
    standard = code(given["service_class"])
    assert standard.creep().coefficient == given["k_def"]
    made, scheme = made_of(symbols)
    psi_2 = dict(scheme.lasting)
    assert (psi_2["S"], psi_2["W"]) == (given["psi2_S"], given["psi2_W"])
    w = np.array([given[f"w_inst_{s}_mm"] for s in symbols])
    found = {}
    for name, kind in (("w_inst_char_mm", "instantaneous"), ("w_fin_mm", "final")):
        led_by_snow = all_together(symbols, made, rows_of(made, "6.14b", "characteristic"), "S")
        assert led_by_snow["W"] == given["psi0_W"]
        factors = standard.service_factors(
            np.array([list(led_by_snow.values())]), actions=("D", "S", "W"), kinds=(kind,), lasting=psi_2
        )
        found[name] = float(factors[0] @ w)
    meet(entry, found)


@checks("BENOIT-231-CREEP")
def test_creep_of_a_floor(entry: Entry) -> None:
    """The joists of the example are of C24, 75 x 200 mm, and span 4.5 m. A frame of Bernoulli beams leaves out their
    deflection in shear, 1.2 q l^2 / (8 G A) = 0.09 mm, which is added here."""
    given = entry["inputs"]
    lasts = np.array([1.0, given["psi2"]])
    acting = np.array([[1.0, 1.0]])
    grown = ec5.final_factors(acting, lasts, k_def=given["k_def"]) - acting
    q = float((grown @ np.array([given["g_kN_m2"], given["q_kN_m2"]]))[0]) * given["spacing_m"]
    length, count, (b, h) = 4.5, 8, (0.075, 0.2)
    grade = find_grade("C24").values
    nodes = {f"n{k}": (float(x), 0.0) for k, x in enumerate(np.linspace(0.0, length, count + 1))}
    parts = [(f"m{k}", f"n{k}", f"n{k + 1}") for k in range(count)]
    beam = framed(nodes, parts, {"n0": (1, 1), f"n{count}": (0, 1)}, pins=False)
    cases = load_cases(beam, [([(k, 0.0, length / count, 0.0, -1e3 * q) for k in range(count)], (), {})])
    ea, ei = (np.full(count, grade["E_0_mean"] * v) for v in (b * h, b * h**3 / 12))
    bending = -float(solve(beam, ea, ei, cases).displacements[0, count // 2, 1])
    shear = 1.2 * 1e3 * q * length**2 / (8 * grade["G_mean"] * b * h)
    meet(entry, {"q_creep_kN_m": q, "w_creep_mm": 1e3 * (bending + shear)})
