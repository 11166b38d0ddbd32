"""Roof live load of ASCE 7, 4.8.2."""

import numpy as np
import pytest

from rooftruss.loads.imposed import area_factor, ceiling_live_cases, pitch_factor, roof_live_cases, roof_live_load
from rooftruss.loads.roof import Roof
from rooftruss.units import FOOT, PSF


@pytest.mark.parametrize(
    ("A_t_ft2", "F", "R_1", "R_2", "L_r_psf"),
    [  # ASCE 7, eq. 4.8-1: R_1 and R_2 of 4.8.2 by hand, 12 <= L_r <= 20 psf
        (60, 4, 1.0, 1.0, 20.0),
        (400, 3, 0.8, 1.0, 16.0),
        (700, 12, 0.6, 0.6, 12.0),
        (200, 6, 1.0, 0.9, 18.0),  # both ends of the R_1 and R_2 lines
        (600, 4, 0.6, 1.0, 12.0),
    ],
)
def test_roof_live_load_of_an_ordinary_roof(A_t_ft2, F, R_1, R_2, L_r_psf):
    assert float(area_factor(A_t_ft2 * FOOT**2)) == pytest.approx(R_1, rel=1e-9)
    assert float(pitch_factor(F / 12)) == pytest.approx(R_2, rel=1e-9)
    assert float(roof_live_load(20 * PSF, R_1, R_2)) / PSF == pytest.approx(L_r_psf, rel=1e-9)


@pytest.mark.parametrize(
    ("L_o_psf", "R", "L_r_psf"),
    [
        (30, 0.6, 30.0),  # no load of an ordinary roof: 4.8.2 does not reduce it
        (20, 1.0, 20.0),
        (16, 0.8, 12.8),
        (16, 0.6, 12.0),  # not below 12 psf
        (10, 0.6, 10.0),  # nor below what was asked for
    ],
)
def test_basic_loads_other_than_20_psf(L_o_psf, R, L_r_psf):
    assert float(roof_live_load(L_o_psf * PSF, R, 1.0)) / PSF == pytest.approx(L_r_psf, rel=1e-9)


def roof(**changes):
    feet = {"span": 28.0, "bearing_span": 27.7, "overhang": 1.5, "rise": 6.925, "spacing": 2.0} | changes
    return Roof(pitch=np.asarray(0.5), **{k: np.asarray(v * FOOT) for k, v in feet.items()})


def test_roof_live_cases_cover_the_whole_roof_and_each_half():
    cases = roof_live_cases(roof(), np.asarray(20 * PSF))
    assert [case.name for case in cases] == ["roof live", "roof live, left half", "roof live, right half"]
    halves = [{load.surface for load in case.loads} for case in cases]
    assert halves[0] == halves[1] | halves[2]
    assert halves[1] == {"left slope", "left tail"}
    for case in cases:
        assert case.action == "Lr"
        assert {load.kind for load in case.loads} == {"plan"}
        # 28 ft x 2 ft = 56 ft2 gives R_1 = 1; 6 in/ft gives R_2 = 0.9
        assert [float(load.pressure) / PSF for load in case.loads] == pytest.approx([18.0] * len(case.loads))


def test_ceiling_live_case_and_absent_loads():
    (case,) = ceiling_live_cases(np.asarray(10 * PSF))
    assert (case.action, case.loads[0].surface, case.loads[0].kind) == ("L", "ceiling", "plan")
    assert float(case.loads[0].pressure) == pytest.approx(10 * PSF)
    assert ceiling_live_cases(np.zeros(3)) == []
    assert roof_live_cases(roof(), np.asarray(0.0)) == []


def test_a_batch_keeps_its_shape():
    spans = np.array([20.0, 150.0, 400.0]) * FOOT
    many = roof(span=spans / FOOT, bearing_span=spans / FOOT)
    full = roof_live_cases(many, np.full(3, 20 * PSF))[0]
    # 40, 300 and 800 ft2 with R_2 = 0.9: 18, 16.2 and, at its floor, 12 psf (10.8)
    assert full.loads[0].pressure / PSF == pytest.approx([18.0, 16.2, 12.0])
