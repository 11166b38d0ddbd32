"""Snow of EN 1991-1-3:2003+A1:2015 against published numbers and hand values."""

import math

import pytest

from rooftruss.errors import JobError, OutOfScopeError
from rooftruss.loads.national_en1991 import national_choices
from rooftruss.loads.roof import Roof
from rooftruss.loads.snow_en1991 import arrangements, overhang_load, roof_snow, shape_coefficient, snow_cases
from tests.roofs import gable_in_metres

SITE = {"ground_snow": 1200.0, "altitude": 300.0, "exposure_coefficient": 1.0, "thermal_coefficient": 1.0}


def gable(pitch_deg: float = 25.0, overhang: float = 0.5) -> Roof:
    return gable_in_metres(pitch_deg, overhang=overhang, span=8.0)


@pytest.mark.parametrize(
    ("pitch_deg", "mu_1"),
    [(0, 0.8), (15, 0.8), (30, 0.8), (35, 0.6667), (40, 0.5333), (60, 0.0), (75, 0.0)],
)
def test_mu_1_of_table_5_2(pitch_deg, mu_1):
    # EN 1991-1-3, Table 5.2: 0.8 up to 30 deg, 0.8(60 - a)/30 up to 60 deg
    assert float(shape_coefficient(math.radians(pitch_deg))) == pytest.approx(mu_1, abs=5e-5)


def test_mu_1_where_snow_cannot_slide_off():
    # EN 1991-1-3, 5.3.2(2): not below 0.8
    assert float(shape_coefficient(math.radians(45), guarded=True)) == 0.8
    assert float(shape_coefficient(math.radians(75), guarded=True)) == 0.8


@pytest.mark.parametrize(("pitch_deg", "mu_2"), [(0, 0.8), (15, 1.2), (30, 1.6), (45, 1.6)])
def test_mu_2_of_table_5_2(pitch_deg, mu_2):
    assert float(shape_coefficient(math.radians(pitch_deg), "mu_2")) == pytest.approx(mu_2, abs=5e-4)


def test_mu_2_is_not_given_above_60_deg():
    with pytest.raises(OutOfScopeError, match=r"Table 5\.2 gives mu_2 from 0 to 60 deg"):
        shape_coefficient(math.radians(65), "mu_2")


def test_single_storey_worked_example():
    # Steel Buildings in Europe (2010), Single-Storey Part 3, Appendix A, pp. 3-36 to 3-38: s_k 0.65 kN/m2, 8.5 deg
    mu = shape_coefficient(math.radians(8.5))
    s = float(roof_snow(mu, exposure=1.0, thermal=1.0, ground=0.65))
    for found, printed in zip(arrangements(s, s), [(0.52, 0.52), (0.26, 0.52), (0.52, 0.26)], strict=True):
        assert found == pytest.approx(printed, abs=0.005)


def test_roof_of_25_and_45_deg():
    # by hand from EN 1991-1-3, Fig. 5.3 and eq. (5.1): mu_1 = 0.8 and 0.4, s_k = 1.2 kN/m2
    left, right = (
        float(roof_snow(shape_coefficient(math.radians(a)), exposure=1.0, thermal=1.0, ground=1.2)) for a in (25, 45)
    )
    expected = [(0.96, 0.48), (0.48, 0.48), (0.96, 0.24)]
    for found, printed in zip(arrangements(left, right), expected, strict=True):
        assert found == pytest.approx(printed, abs=0.002)


@pytest.mark.parametrize(("s", "s_e"), [(0.6, 0.072), (1.2, 0.576), (3.0, 9.0), (4.0, 12.0)])
def test_snow_over_the_eaves(s, s_e):
    # by hand from EN 1991-1-3, 6.3: gamma 3 kN/m3, d = s/gamma, k = min(3/d, d gamma), s_e = k s^2/gamma
    d = s / 3.0
    assert s_e == pytest.approx(min(3 / d, 3 * d) * s**2 / 3)
    assert float(overhang_load(1000 * s)) == pytest.approx(1000 * s_e, rel=1e-9)


def pressures(case):
    return [(load.surface, float(load.pressure)) for load in case.loads]


def test_cases_of_an_ordinary_roof():
    cases = snow_cases(gable(), SITE)
    assert [c.name for c in cases] == [
        "snow, undrifted",
        "snow, drifted, less on the left slope",
        "snow, drifted, less on the right slope",
    ]
    assert {c.action for c in cases} == {"S"}
    assert pressures(cases[1]) == [
        ("left tail", 480.0),
        ("left slope", 480.0),
        ("right slope", 960.0),
        ("right tail", 960.0),
    ]
    assert {v.symbol for v in cases[0].values} >= {"s_k", "mu_1", "C_e", "C_t"}


def test_no_ground_snow_no_case():
    assert snow_cases(gable(), SITE | {"ground_snow": 0.0}) == []


def test_snow_slides_off_a_steep_roof_but_not_past_guards():
    assert snow_cases(gable(62.0), SITE) == []
    assert len(snow_cases(gable(62.0), SITE | {"snow_guards": True})) == 3


@pytest.mark.parametrize(("altitude", "choices", "count"), [(800.0, "recommended", 3), (801.0, "recommended", 4)])
def test_eaves_are_loaded_at_high_sites(altitude, choices, count):
    # EN 1991-1-3, 6.3 note: recommended for sites above 800 m
    assert len(snow_cases(gable(), SITE | {"altitude": altitude, "national_choices": choices})) == count


def test_france_loads_the_eaves_above_900_m():
    site = SITE | {"altitude": 850.0, "national_choices": "france"}
    assert len(snow_cases(gable(), site)) == 3
    assert len(snow_cases(gable(), site | {"altitude": 950.0})) == 4


def test_edge_load_keeps_its_moment_at_the_bearing():
    roof = gable(overhang=0.5)
    case = snow_cases(roof, SITE | {"altitude": 1000.0})[-1]
    edge = next(load for load in case.loads if load.x_from is not None and load.surface == "left tail")
    width, middle = float(edge.x_to - edge.x_from), float(edge.x_to + edge.x_from) / 2
    s_e = float(overhang_load(960.0))
    assert float(edge.pressure) * width * -middle == pytest.approx(s_e * 0.55)
    assert float(edge.pressure) * width >= s_e


def test_edge_load_without_a_tail_stays_over_the_wall():
    case = snow_cases(gable(overhang=0.0), SITE | {"altitude": 1000.0})[-1]
    edge = next(load for load in case.loads if load.x_from is not None and load.surface == "left tail")
    assert float(edge.pressure) * 0.05 == pytest.approx(float(overhang_load(960.0)))


def test_exceptional_snow_is_an_accidental_action():
    cases = snow_cases(gable(), SITE | {"exceptional_snow": 2400.0})
    exceptional = [c for c in cases if c.action == "A"]
    assert exceptional[0].name == "exceptional snow, undrifted"
    assert pressures(exceptional[0])[0] == ("left tail", pytest.approx(1920.0))  # eq. (5.2): 0.8 x 2.4 kN/m2


def test_sites_above_1500_m_are_refused():
    with pytest.raises(OutOfScopeError, match=r"altitude 1600 m: EN 1991-1-3, 1\.1\(2\)"):
        snow_cases(gable(), SITE | {"altitude": 1600.0})


@pytest.mark.parametrize("country", ["united kingdom", "ireland", "sweden", "denmark", "norway"])
def test_countries_without_values_are_refused_by_name(country):
    with pytest.raises(OutOfScopeError, match=f"'{country}' is not covered"):
        national_choices(country)


def test_why_the_united_kingdom_is_refused():
    with pytest.raises(OutOfScopeError, match="replace the roof pressure coefficients"):
        national_choices("united kingdom")


def test_an_unknown_country_is_told_the_nearest():
    with pytest.raises(JobError, match="did you mean 'germany'"):
        national_choices("germani")


def test_a_missing_ground_snow_names_its_clause():
    with pytest.raises(JobError, match=r"ground_snow is missing; EN 1991-1-3, 4\.1"):
        snow_cases(gable(), {"altitude": 100.0})
