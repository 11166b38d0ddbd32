"""What must hold for snow and wind on any gable: mirror, batch, monotony, and bounds of interpolation."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.loads.roof import Roof
from rooftruss.loads.snow_asce7 import snow_cases
from rooftruss.loads.snow_asce7_factors import (
    drift_height_16,
    drift_height_22,
    heated_thermal_factor,
    slope_factor,
)
from rooftruss.loads.wind_asce7 import wind_cases
from rooftruss.loads.wind_asce7_factors import between_like_signs, exposure_coefficient, slope_coefficients
from rooftruss.units import FOOT, PSF
from tests.load_resultants import force, reactions
from tests.roofs import roof_of

editions = st.sampled_from(["7-16", "7-22"])
few = settings(max_examples=40, deadline=None)


@st.composite
def roofs(draw):
    span = draw(st.floats(3.0, 25.0))
    pitch = draw(st.floats(0.5, 20.0)) / 12
    overhang = draw(st.floats(0.05, 1.0))
    return roof_of(
        pitch=pitch, span=span, bearing_span=span - 0.1, overhang=overhang, spacing=draw(st.floats(0.3, 2.0))
    )


@st.composite
def sites(draw):
    return {
        "risk_category": draw(st.sampled_from(["I", "II", "III", "IV"])),
        "ground_snow": draw(st.floats(100.0, 5000.0)),
        "winter_wind_parameter": draw(st.floats(0.25, 0.65)),
        "snow_exposure": draw(st.sampled_from(["fully exposed", "partially exposed", "sheltered"])),
        "exposure": draw(st.sampled_from(["B", "C", "D"])),
        "thermal": draw(st.sampled_from(["ventilated attic", "unventilated", "unheated", "greenhouse"])),
        "roof_r_value": draw(st.floats(1.0, 10.0)),
        "roof_surface": draw(st.sampled_from(["rough", "slippery"])),
        "wind_speed": draw(st.floats(25.0, 80.0)),
        "enclosure": draw(st.sampled_from(["enclosed", "partially enclosed", "partially open"])),
        "mean_roof_height": 12.0,
        "building_length": draw(st.floats(8.0, 100.0)),
        "topographic_factor": 1.0,
        "ground_elevation": 0.0,
    }


def mirrored_name(name):
    return " ".join({"left": "right", "right": "left"}.get(word, word) for word in name.replace(",", " ,").split())


@few
@given(roofs(), sites(), editions)
def test_left_and_right_are_mirror_images(roof, site, edition):
    cases = {mirrored_name(c.name): c for c in [*snow_cases(roof, site, edition), *wind_cases(roof, site, edition)]}
    for name, case in cases.items():
        left, right, horizontal = reactions(case, roof)
        # the mirrored case pushes the other way, and its pin is at the other end: compare the resultants
        other_left, other_right, other_horizontal = reactions(cases[mirrored_name(name)], roof)
        scale = abs(left) + abs(right) + abs(horizontal) + 1.0
        assert (other_right, other_left) == pytest.approx((left, right), abs=1e-9 * scale)
        assert other_horizontal == pytest.approx(-horizontal, abs=1e-9 * scale)


@few
@given(st.lists(roofs(), min_size=2, max_size=4), sites(), editions)
def test_a_batch_loads_each_roof_as_it_would_be_alone(many, site, edition):
    names = ("pitch", "span", "bearing_span", "overhang", "rise", "spacing")
    batch = Roof(**{n: np.array([float(getattr(r, n)) for r in many]) for n in names})
    for build in (snow_cases, wind_cases):
        together = {c.name: c for c in build(batch, site, edition)}
        for k, roof in enumerate(many):
            alone = {c.name: c for c in build(roof, site, edition)}
            assert set(alone) <= set(together)
            for name, case in together.items():
                found = total(case.loads, roof, k)
                expected = total(alone[name].loads, roof, None) if name in alone else np.zeros(2)
                if name in alone or "second value" not in name:  # from 60 deg both values are one
                    assert found == pytest.approx(expected, rel=1e-9, abs=1e-6)


def total(loads, roof, k):
    """Sum of the forces of a case on roof k of its batch [N]."""
    picked = [
        type(load)(
            surface=load.surface,
            kind=load.kind,
            pressure=one(load.pressure, k),
            x_from=one(load.x_from, k),
            x_to=one(load.x_to, k),
        )
        for load in loads
    ]
    return np.sum([force(load, roof)[:2] for load in picked], axis=0)


def one(value, k):
    """Value of roof k; a value without a batch axis holds for all."""
    return value if value is None or k is None or np.ndim(value) == 0 else value[k]


@few
@given(roofs(), sites(), editions)
def test_snow_never_lifts_and_unbalanced_snow_is_heavier_on_the_lee_side(roof, site, edition):
    for case in snow_cases(roof, site, edition):
        assert all(float(load.pressure) >= 0 for load in case.loads)
        left, right, horizontal = reactions(case, roof)
        assert horizontal == 0.0
        if case.pattern == "unbalanced":
            assert (right > left) == (case.short == "unbal. left")


@few
@given(roofs(), sites(), editions)
def test_stretches_stay_on_their_surface(roof, site, edition):
    B, o = float(roof.bearing_span), float(roof.overhang)
    ends = {"left tail": (-o, 0), "left slope": (0, B / 2), "right slope": (B / 2, B), "right tail": (B, B + o)}
    for case in [*snow_cases(roof, site, edition), *wind_cases(roof, site, edition)]:
        for load in case.loads:
            if load.x_from is not None:
                low, high = ends[load.surface]
                assert low - 1e-9 <= float(load.x_from) <= float(load.x_to) <= high + 1e-9


@few
@given(roofs(), sites())
def test_suction_inside_and_pressure_inside_differ_by_the_internal_coefficient(roof, site):
    cases = {c.short: c for c in wind_cases(roof, site, "7-22")}
    for short in ("left 1", "right 2", "ridge 1"):
        if f"{short}, +i" not in cases:
            continue
        values = {v.symbol: v.value for v in cases[f"{short}, +i"].values}
        step = 2 * values["GC_pi"] * values["K_d"] * values["q_h"]
        for plus, minus in zip(cases[f"{short}, +i"].loads, cases[f"{short}, -i"].loads, strict=True):
            expected = 0.0 if plus.surface.endswith("tail") else step
            assert float(minus.pressure - plus.pressure) == pytest.approx(float(expected), rel=1e-9, abs=1e-9)


@few
@given(editions, st.floats(10.0, 90.0), st.floats(0.01, 3.0))
def test_coefficients_stay_inside_the_figure(edition, degrees, ratio):
    first, second, leeward = slope_coefficients(edition, np.radians(degrees), ratio)
    assert -1.3 <= float(first) <= float(second) <= 0.8
    assert -0.7 <= float(leeward) <= -0.3
    assert degrees >= 60 - 1e-6 or float(first) <= 0.0


@few
@given(st.floats(-2, 2), st.floats(-2, 2), st.floats(0, 1), st.sampled_from([-1, 1]))
def test_interpolation_between_like_signs(a, b, share, sign):
    found = float(between_like_signs(a, b, share, sign))
    assert min(a, b) - 1e-12 <= found <= max(a, b) + 1e-12
    if a * b < 0 and 0 < share < 1:
        assert found * sign >= 0  # nothing of the other sign is left
    else:
        assert found == pytest.approx(a + share * (b - a), abs=1e-12)


@few
@given(editions, st.floats(0, 1.5), st.floats(0, 1.5), st.sampled_from("abc"), st.booleans())
def test_steeper_roofs_keep_less_snow(edition, one_slope, other, panel, slippery):
    low, high = sorted((one_slope, other))
    factors = slope_factor(edition, np.array([low, high]), panel, slippery=slippery)
    assert 0.0 <= factors[1] <= factors[0] <= 1.0
    assert np.all(slope_factor(edition, np.array([low, high]), panel, slippery=True) <= factors + 1e-12)


@few
@given(st.floats(10, 100), st.floats(10, 100), st.floats(6.1, 100), st.floats(6.1, 100))
def test_drifts_grow_with_snow_and_fetch(p, q, near, far):
    (p, q), (near, far) = sorted((p, q)), sorted((near, far))
    assert drift_height_16(p * PSF, near, 1.0) <= drift_height_16(q * PSF, far, 1.0)
    # 7-22: p_g^0.74 over a density that grows more slowly than that
    assert drift_height_22(p * PSF, near, 0.45) <= drift_height_22(q * PSF, far, 0.45) * (1 + 1e-12)


@few
@given(st.floats(1, 100), st.floats(1, 100), st.floats(0.5, 12), st.floats(0.5, 12))
def test_better_insulation_never_lowers_the_thermal_factor(p, q, thin, thick):
    (p, q), (thin, thick) = sorted((p, q)), sorted((thin, thick))
    assert heated_thermal_factor(p * PSF, thick) >= heated_thermal_factor(p * PSF, thin) - 1e-12
    assert heated_thermal_factor(q * PSF, thin) <= heated_thermal_factor(p * PSF, thin) + 1e-12


@few
@given(editions, st.floats(1, 300), st.floats(1, 300))
def test_pressure_grows_with_height_and_with_openness(edition, one_height, other):
    low, high = sorted((one_height, other))
    by_terrain = [exposure_coefficient(edition, np.array([low, high]) * FOOT, exposure) for exposure in "BCD"]
    for K_z in by_terrain:
        assert K_z[0] <= K_z[1]
    assert np.all(np.diff(by_terrain, axis=0) > 0)
