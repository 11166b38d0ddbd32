"""Cells of the Eurocode tables typed again from the printed pages, and relations that hold between their values."""

import math

import pytest

from rooftruss.basis.grades import find_grade, grades
from rooftruss.basis.sections import find_section, sections
from rooftruss.basis.tables import read_settings, read_table

MPA = 1e6
EN338 = {  # EN 338:2016, Table 1: f_m f_t0 f_t90 f_c0 f_c90 f_v E_0,mean E_0,05 E_90 G rho_k rho_mean
    "C16": (16, 8.5, 0.4, 17, 2.2, 3.2, 8000, 5400, 270, 500, 310, 370),
    "C24": (24, 14.5, 0.4, 21, 2.5, 4.0, 11000, 7400, 370, 690, 350, 420),
    "C30": (30, 19.0, 0.4, 24, 2.7, 4.0, 12000, 8000, 400, 750, 380, 460),
    "C40": (40, 26.0, 0.4, 27, 2.8, 4.0, 14000, 9400, 470, 880, 400, 480),
}
EN14080 = {  # EN 14080:2013, Table 5
    "GL24h": (24, 19.2, 0.5, 24, 2.5, 3.5, 11500, 9600, 300, 650, 385, 420),
    "GL28h": (28, 22.3, 0.5, 28, 2.5, 3.5, 12600, 10500, 300, 650, 425, 460),
}
COLUMNS = ("f_m_k", "f_t_0_k", "f_t_90_k", "f_c_0_k", "f_c_90_k", "f_v_k", "E_0_mean", "E_0_05", "E_90_mean", "G_mean")
C_CLASSES = ("C14", "C16", "C18", "C20", "C22", "C24", "C27", "C30", "C35", "C40", "C45", "C50")


@pytest.mark.parametrize("name", [*EN338, *EN14080])
def test_strength_classes(name):
    values = find_grade(name).values
    printed = (EN338 | EN14080)[name]
    assert [values[c] / MPA for c in COLUMNS] == pytest.approx(printed[:-2])
    assert (values["rho_k"], values["rho_mean"]) == printed[-2:]


@pytest.mark.parametrize("name", C_CLASSES)
def test_softwood_classes_follow_the_relations_of_en_384(name):
    # EN 384:2016: the classes are rounded from these, so a mistyped cell stands out
    v = {key: cell / MPA for key, cell in find_grade(name).values.items() if isinstance(cell, float)}
    f, rho = v["f_m_k"], v["rho_k"] * MPA
    assert v["f_t_0_k"] == pytest.approx(-3.07 + 0.73 * f, abs=0.25)
    assert v["f_c_0_k"] == pytest.approx(4.3 * math.sqrt(f), abs=0.6)
    assert v["f_c_90_k"] == pytest.approx(0.007 * rho, abs=0.06)
    assert v["E_0_05"] == pytest.approx(0.67 * v["E_0_mean"], abs=50)
    assert v["E_90_mean"] == pytest.approx(v["E_0_mean"] / 30, abs=10)
    assert v["G_mean"] == pytest.approx(v["E_0_mean"] / 16, abs=10)
    assert v["rho_mean"] * MPA == pytest.approx(1.2 * rho, abs=10)


def test_glued_laminated_classes_have_a_shear_modulus_at_the_fifth_percentile():
    assert {g.values["G_05"] / MPA for g in grades("EN") if g.name.startswith("GL")} == {540.0}
    assert all(math.isnan(find_grade(n).values["G_05"]) for n in C_CLASSES)


def test_stronger_classes_are_stronger_in_everything():
    for family in (C_CLASSES, ("GL20h", "GL22h", "GL24h", "GL26h", "GL28h", "GL30h", "GL32h")):
        rows = [find_grade(n).values for n in family]
        for column in (*COLUMNS, "rho_k", "rho_mean"):
            values = [row[column] for row in rows]
            assert values == sorted(values), column


CELLS = [  # (table, row, column, printed value in SI)
    ("snow/constants_en1991", {}, "drift_share", 0.5),
    ("snow/constants_en1991", {}, "overhang_density", 3000.0),
    ("wind/terrain_en1991", {"category": "0"}, "z_0", 0.003),
    ("wind/terrain_en1991", {"category": "III"}, "z_0", 0.3),
    ("wind/terrain_en1991", {"category": "III"}, "z_min", 5.0),
    ("wind/constants_en1991", {}, "rho", 1.25),
    ("wind/constants_en1991", {}, "c_pi_over", 0.2),
    ("wind/constants_en1991", {}, "c_pi_under", -0.3),
    ("wind/walls_en1991", {"h_over_d": 0.25}, "D", 0.7),
    ("wind/walls_en1991", {"h_over_d": 1.0}, "E", -0.5),
    ("wind/walls_en1991", {"h_over_d": 5.0}, "B", -0.8),
    ("wind/flat_en1991", {"zone": "G"}, "suction_10", -1.2),
    ("loads/imposed_roof_en1991", {"category": "H"}, "q_k", 400.0),
    ("timber/k_def_en1995", {"service_class": 2.0}, "k_def", 0.8),
    ("timber/product_en1995", {"product": "solid timber"}, "beta_c", 0.2),
    ("timber/product_en1995", {"product": "glued laminated timber"}, "size", 0.6),
    ("timber/bending_length_en1995", {"loading": "uniform load"}, "ratio", 0.9),
    ("timber/system_strength_en1995", {}, "k_sys", 1.1),
]


@pytest.mark.parametrize(("name", "row", "column", "printed"), CELLS)
def test_cells(name, row, column, printed):
    assert read_table(name).where(**row)[column] == pytest.approx(printed)


def degrees(slope):
    return round(math.degrees(slope))


def test_small_areas_never_take_less_suction():
    for name in ("duopitch_across", "duopitch_along", "flat"):
        for row in read_table(f"wind/{name}_en1991").rows:
            if not math.isnan(row["suction_10"]):
                assert row["suction_1"] <= row["suction_10"] <= 0.0


def test_table_7_4_is_complete():
    across = {(degrees(r["slope"]), r["zone"]) for r in read_table("wind/duopitch_across_en1991").rows}
    along = {(degrees(r["slope"]), r["zone"]) for r in read_table("wind/duopitch_along_en1991").rows}
    slopes = (5, 15, 30, 45, 60, 75)
    assert across == {(a, z) for a in slopes for z in "FGHIJ"}
    assert along == {(a, z) for a in slopes for z in "FGHI"}


def test_table_7_4b_cells():
    cells = {(degrees(r["slope"]), r["zone"]): r["suction_10"] for r in read_table("wind/duopitch_along_en1991").rows}
    assert [cells[a, "G"] for a in (5, 15, 30, 45, 60, 75)] == [-1.3, -1.3, -1.4, -1.4, -1.2, -1.2]
    assert [cells[a, "H"] for a in (5, 15, 30, 45, 60, 75)] == [-0.7, -0.6, -0.8, -0.9, -0.8, -0.8]


def test_cells_of_small_areas():
    # EN 1991-1-4, Tables 7.4a, 7.4b and 7.2, c_pe,1, from memory of the printed tables
    across = {(degrees(r["slope"]), r["zone"]): r["suction_1"] for r in read_table("wind/duopitch_across_en1991").rows}
    along = {(degrees(r["slope"]), r["zone"]): r["suction_1"] for r in read_table("wind/duopitch_along_en1991").rows}
    assert [across[15, z] for z in "FGHIJ"] == [-2.0, -1.5, -0.3, -0.4, -1.5]
    assert [across[30, z] for z in "FGHIJ"] == [-1.5, -1.5, -0.2, -0.4, -0.5]
    assert [along[15, z] for z in "FGHI"] == [-2.0, -2.0, -1.2, -0.5]
    assert [along[60, z] for z in "FGHI"] == [-1.5, -2.0, -1.0, -0.5]


def test_table_3_1_falls_with_duration_and_moisture():
    rows = read_table("timber/k_mod_en1995").rows
    k_mod = {(r["duration"], r["service_class"]): r["k_mod"] for r in rows}
    order = ("permanent", "long-term", "medium-term", "short-term", "short-term to instantaneous", "instantaneous")
    for service_class in (1.0, 2.0, 3.0):
        found = [k_mod[d, service_class] for d in order]
        assert found == sorted(found)
        assert all(k_mod[d, 3.0] <= k_mod[d, service_class] for d in order)


def test_national_values_cover_every_product_and_service_class():
    rows = read_table("timber/national_en1995").rows
    keys = {(r["choice"], r["product"], r["service_class"]) for r in rows}
    choices = {r["choice"] for r in read_table("loads/national_choices_en1991").rows if not r["refusal"]}
    products = {r["product"] for r in read_table("timber/product_en1995").rows}
    assert keys == {(c, p, s) for c in choices for p in products for s in (1.0, 2.0, 3.0)}
    assert all(r["gamma_M"] >= 1.2 and (r["k_cr"] <= 1.0 or r["crack_strength"] > 0) for r in rows)


def test_metric_sections_are_named_by_their_size():
    found = sections("metric")
    assert len(found) > 40
    for s in found:
        breadth, depth = s.name.split("x")
        assert (s.breadth, s.depth) == pytest.approx((float(breadth) / 1e3, float(depth) / 1e3))
    assert find_section("45x195").depth == pytest.approx(0.195)


def test_memory_is_marked_where_a_row_was_not_seen():
    glulam = read_table("grades/glulam_EN14080_2013").rows
    unseen = {r["name"] for r in glulam if "from memory" in str(r["source"])}
    assert {"GL24h", "GL28h", "GL30h", "GL32h"} == {r["name"] for r in glulam} - unseen
    assert {"EN338-2016", "EN14080-2013", "EN1991-1-1"} <= set(read_settings("sources"))
