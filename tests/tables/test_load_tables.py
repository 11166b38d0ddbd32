"""Cells of the load tables typed again from the printed pages, and the form of the scheme files."""

import math
import tomllib
from itertools import pairwise

import pytest

from rooftruss.basis.schemes import load_scheme, schemes
from rooftruss.basis.tables import data_folder, read_table
from rooftruss.units import FOOT, INCH, PSF

DEGREE = math.pi / 180
R_UNIT = 0.17611  # m2 K/W in one ft2 h F/Btu

CELLS = [  # (table, row, column, printed value in SI)
    ("snow/exposure_asce7-16", {"terrain": "B"}, "sheltered", 1.2),
    ("snow/exposure_asce7-16", {"terrain": "D"}, "fully exposed", 0.8),
    ("snow/exposure_asce7-22", {"terrain": "C"}, "sheltered", 1.1),
    ("snow/exposure_asce7-22", {"terrain": "above tree line"}, "partially exposed", 0.8),
    ("snow/exposure_asce7-22", {"terrain": "alaska, no trees"}, "fully exposed", 0.7),
    ("snow/importance_asce7-16", {"risk_category": "I"}, "I_s", 0.8),
    ("snow/importance_asce7-16", {"risk_category": "IV"}, "I_s", 1.2),
    ("snow/minimum_asce7-22", {"risk_category": "III"}, "p_m_max", 35 * PSF),
    ("snow/thermal_asce7-16", {"thermal": "unheated"}, "C_t", 1.2),
    ("snow/thermal_asce7-16", {"thermal": "greenhouse"}, "C_t", 0.85),
    ("snow/thermal_asce7-22", {"thermal": "ventilated attic"}, "C_t", 1.2),
    ("snow/thermal_asce7-22", {"thermal": "freezer"}, "C_t", 1.3),
    ("snow/slope_factor_asce7-16", {"panel": "b"}, "knee_rough", 37.5 * DEGREE),
    ("snow/slope_factor_asce7-22", {"panel": "a"}, "knee_slippery", 5 * DEGREE),
    ("snow/slope_factor_asce7-22", {"panel": "c"}, "end", 70 * DEGREE),
    ("snow/rules_asce7-16", {}, "fetch_least", 20 * FOOT),
    ("snow/rules_asce7-16", {}, "pitch_most", 7 / 12),
    ("snow/rules_asce7-16", {}, "rain_surcharge", 5 * PSF),
    ("snow/rules_asce7-22", {}, "rain_surcharge", 8 * PSF),
    ("wind/terrain_asce7-16", {"exposure": "C"}, "alpha", 9.5),
    ("wind/terrain_asce7-16", {"exposure": "C"}, "z_g", 900 * FOOT),
    ("wind/terrain_asce7-16", {"exposure": "B"}, "k", 2.01),
    ("wind/terrain_asce7-22", {"exposure": "B"}, "z_g", 3280 * FOOT),
    ("wind/terrain_asce7-22", {"exposure": "D"}, "alpha", 11.5),
    ("wind/terrain_asce7-22", {"exposure": "C"}, "k", 2.41),
    ("wind/internal_asce7-16", {"enclosure": "partially enclosed"}, "GC_pi", 0.55),
    ("wind/internal_asce7-22", {"enclosure": "partially open"}, "GC_pi", 0.18),
    ("wind/rules_asce7-16", {}, "K_d", 0.85),
    ("wind/rules_asce7-22", {}, "G", 0.85),
    ("wind/rules_asce7-22", {}, "least_roof_pressure", 8 * PSF),
    ("loads/roof_live_asce7", {}, "L_r_least", 12 * PSF),
]


@pytest.mark.parametrize(("table", "row", "column", "printed"), CELLS)
def test_printed_cells(table, row, column, printed):
    assert read_table(table).where(**row)[column] == pytest.approx(printed, rel=1e-9)


@pytest.mark.parametrize(
    ("R", "C_t"),
    [  # ASCE 7-22, Table 7.3-3 at p_g 10, 20, 30, 40, 50, 60, 70 psf
        (20, [1.20, 1.11, 1.05, 1.01, 1.00, 1.00, 1.00]),
        (30, [1.20, 1.17, 1.14, 1.13, 1.12, 1.11, 1.10]),
        (40, [1.20, 1.19, 1.17, 1.16, 1.16, 1.15, 1.15]),
        (50, [1.20, 1.20, 1.19, 1.19, 1.19, 1.18, 1.18]),
    ],
)
def test_thermal_factors_of_heated_roofs(R, C_t):
    rows = [row for row in read_table("snow/thermal_heated_asce7-22").rows if abs(row["r_value"] / R_UNIT - R) < 0.01]
    assert [round(row["ground_snow"] / PSF) for row in rows] == [10, 20, 30, 40, 50, 60, 70]
    assert [row["C_t"] for row in rows] == C_t


@pytest.mark.parametrize("edition", ["7-16", "7-22"])
@pytest.mark.parametrize(
    ("ratio", "windward_first", "windward_second", "leeward"),
    [  # ASCE 7, Fig. 27.3-1 at 10, 15, 20, 25, 30, 35, 45 deg
        (0.25, (-0.7, -0.5, -0.3, -0.2, -0.2, 0, 0), (-0.18, 0, 0.2, 0.3, 0.3, 0.4, 0.4), (-0.3, -0.5, -0.6)),
        (0.5, (-0.9, -0.7, -0.4, -0.3, -0.2, -0.2, 0), (-0.18, -0.18, 0, 0.2, 0.2, 0.3, 0.4), (-0.5, -0.5, -0.6)),
        (1.0, (-1.3, -1.0, -0.7, -0.5, -0.3, -0.2, 0), (-0.18, -0.18, -0.18, 0, 0.2, 0.2, 0.3), (-0.7, -0.6, -0.6)),
    ],
)
def test_roof_coefficients(edition, ratio, windward_first, windward_second, leeward):
    rows = [row for row in read_table(f"wind/roof_slope_asce{edition}").rows if row["h_over_L"] == ratio][:7]
    assert [round(row["slope"] / DEGREE) for row in rows] == [10, 15, 20, 25, 30, 35, 45]
    assert tuple(row["windward_first"] for row in rows) == windward_first
    assert tuple(row["windward_second"] for row in rows) == windward_second
    assert tuple(row["leeward"] for row in rows[:3]) == leeward


def test_neighbours_along_the_slope_never_differ_in_sign():
    # the reason why the slope is interpolated plainly
    for edition in ("7-16", "7-22"):
        rows = read_table(f"wind/roof_slope_asce{edition}").rows
        for column in ("windward_first", "windward_second", "leeward"):
            for a, b in pairwise(rows):
                assert a["h_over_L"] != b["h_over_L"] or a[column] * b[column] >= 0


def test_the_same_numbers_stand_in_both_editions_where_nothing_changed():
    for name in ("wind/roof_slope", "wind/roof_distance", "wind/internal", "snow/exposure"):
        old, new = (read_table(f"{name}_asce{edition}") for edition in ("7-16", "7-22"))
        for a, b in zip(old.rows, new.rows, strict=True):
            for column in old.columns:
                same = a[column] == b[column] or (a[column] != a[column] and b[column] != b[column])
                assert same or column == "source"


def test_one_row_tables_stay_one_row():
    for name in ("snow/rules_asce7-16", "snow/rules_asce7-22", "wind/rules_asce7-16", "wind/rules_asce7-22"):
        assert len(read_table(name).rows) == 1


def test_units_of_the_reduction_limits():
    # 1/2 on 12, in inches per foot
    assert read_table("snow/rules_asce7-22").rows[0]["pitch_least"] == pytest.approx(0.5 * INCH / FOOT)


@pytest.mark.parametrize("name", schemes())
def test_schemes_load_and_name_known_sources(name):
    scheme = load_scheme(name)
    sources = tomllib.loads((data_folder("tables") / "sources.toml").read_text("utf-8"))
    assert scheme.source.split()[0] in sources
    assert scheme.name == name
