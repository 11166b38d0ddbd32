"""What must hold for loads on any monopitch roof, and for any truss under one."""

import math
import re
from dataclasses import fields, replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.design.family import GROUPS, Choice, family_of, options_of, unbatched
from rooftruss.design.stages import run
from rooftruss.loads.imposed_en1991 import roof_live_cases
from rooftruss.loads.roof import Roof
from rooftruss.loads.snow_en1991 import snow_cases
from rooftruss.loads.wind_en1991 import wind_cases
from rooftruss.loads.wind_en1991_factors import flat_coefficient
from rooftruss.loads.wind_en1991_monopitch import monopitch_coefficient
from tests.en_jobs import EN_SIZES, barn_at, en_spec
from tests.monopitch import BOTH, MIRROR, custom_monopitch, monopitch_roof
from tests.strategies import numbers

few = settings(max_examples=20, deadline=None)
slow = settings(max_examples=6, deadline=None)
D, E = ((0.25, 0.7), (1.0, 0.8), (5.0, 0.8)), ((0.25, -0.3), (1.0, -0.5), (5.0, -0.7))  # EN 1991-1-4, Table 7.1


SIDES = st.sampled_from(["left", "right"])


@st.composite
def roofs(draw, low=SIDES):
    return monopitch_roof(
        draw(numbers(2.0, 58.0)),
        low=draw(low),
        span=draw(numbers(3.0, 12.0)),
        overhang=draw(numbers(0.0, 1.0)),
        spacing=draw(numbers(0.3, 2.0)),
        bare=draw(st.sampled_from(["", "left", "right"])),
    )


@st.composite
def sites(draw):
    return {
        "ground_snow": draw(numbers(100.0, 5000.0)),
        "altitude": draw(numbers(0.0, 1500.0)),
        "snow_guards": draw(st.booleans()),
        "basic_wind_velocity": 25.0,
        "peak_velocity_pressure": draw(numbers(300.0, 1500.0)),
        "building_height": draw(numbers(4.0, 14.9)),
        "building_length": draw(numbers(5.0, 80.0)),
        "truss_line": draw(st.sampled_from(["interior", "edge"])),
    }


def mirrored(name):
    return re.sub("left|right", lambda word: MIRROR[word[0]], name)


def all_cases(roof, site):
    return [*roof_live_cases(roof, np.asarray(400.0)), *snow_cases(roof, site), *wind_cases(roof, site)]


def ends_of(roof):
    """Plan ends of roof, from the low eave: eave, bearing, bearing, eave; both tails by hand from the overhang."""
    half = (float(roof.span) - float(roof.bearing_span)) / 2
    low, high = (half if roof.bare == side else float(roof.overhang) for side in (roof.low, MIRROR[roof.low]))
    return -low, 0.0, float(roof.bearing_span), float(roof.bearing_span) + high


def pieces(case, roof):
    """(surface, pressure, kind, from, to) of a case in plan from the low bearing, on the surfaces that the roof has."""
    eave, start, end, far = ends_of(roof)
    high = MIRROR[roof.low]
    bounds = {f"{roof.low} tail": (eave, start), f"{roof.low} slope": (start, end), f"{high} tail": (end, far)}
    for load in case.loads:
        if load.surface not in bounds:
            assert load.surface == f"{high} slope"  # no such member: the load falls on nothing
            continue
        a, b = (None if x is None else float(x) for x in (load.x_from, load.x_to))
        if roof.low == "right":
            a, b = (None if x is None else end - x for x in (b, a))
        low, top = bounds[load.surface]
        low, top = low if a is None else max(a, low), top if b is None else min(b, top)
        if top > low:
            yield load.surface, float(load.pressure), load.kind, low, top


def resultants(parts, roof):
    """Force towards the high eave and upwards, and moment about the low bearing of (pressure, kind, from, to)."""
    total, slope, spacing = np.zeros(3), float(roof.pitch), float(roof.spacing)
    for pressure, kind, low, top in parts:
        force, x = pressure * spacing * (top - low), (low + top) / 2
        along, up = (force * slope if kind == "normal" else 0.0), -force
        total += (along, up, x * up - slope * x * along)
    return total


def at(points, ratio):
    return float(np.interp(ratio, *zip(*points, strict=True)))


def net_pressures(case, roof, site):
    """(pressure, "normal", from, to) that EN 1991-1-4, Fig. 7.7 asks for under one case of wind onto an eave."""
    eave, start, end, far = ends_of(roof)
    width, area = far - eave, float(roof.spacing) * (far - eave) / math.cos(math.atan(float(roof.pitch)))
    slope, edge = math.atan(float(roof.pitch)), site["truss_line"] == "edge"
    e = min(site["building_length"], 2 * site["building_height"])
    onto_low = case.name.startswith(f"wind from the {roof.low}")
    if "flat" in case.name:
        stops = [0.0, min(e / 10, width), min(e / 2, width), width]
        line = "pressure" if "pressure" in case.name else "suction"
        c_pe = [*(flat_coefficient(z, area) for z in ("F" if edge else "G", "H")), flat_coefficient("I", area, line)]
    else:
        stops = [0.0, min(e / 10, width), width]
        direction = "low eave" if onto_low else "high eave"
        line = "pressure" if "pressure" in case.name else "suction"
        c_pe = [monopitch_coefficient(direction, z, slope, area, line) for z in ("F" if edge else "G", "H")]
    c_pi = 0.2 if "+0.2" in case.name else -0.3
    ratio = site["building_height"] / float(roof.span)
    walls = (at(D, ratio), at(E, ratio)) if onto_low else (at(E, ratio), at(D, ratio))  # at the low and the high eave
    half = (float(roof.span) - float(roof.bearing_span)) / 2
    under = [w if t > half + 1e-6 else c_pi for w, t in zip(walls, (start - eave, far - end), strict=True)]
    places = [eave + s if onto_low else far - s for s in stops]
    cuts = sorted({*places, start, end})
    for low, top in pairwise(cuts):
        x = (low + top) / 2
        zone = next(k for k in range(len(c_pe)) if min(places[k : k + 2]) <= x <= max(places[k : k + 2]))
        inside = under[0] if x < start else under[1] if x > end else c_pi
        yield site["peak_velocity_pressure"] * (float(c_pe[zone]) - inside), "normal", low, top


@few
@given(roofs(), sites())
def test_wind_onto_an_eave_is_pressure_times_area(roof, site):
    cases = [c for c in wind_cases(roof, site) if c.name.startswith("wind from")]
    assert {c.name.split()[3].rstrip(",") for c in cases} == {"left", "right"}
    for case in cases:
        found = resultants([part[1:] for part in pieces(case, roof)], roof)
        expected = resultants(net_pressures(case, roof, site), roof)
        assert found == pytest.approx(expected, abs=1e-6 * (1 + np.abs(expected).max())), case.name


@few
@given(roofs(), sites())
def test_wind_covers_every_surface_once_and_snow_lies_on_the_whole_roof(roof, site):
    eave, _, _, far = ends_of(roof)
    for case in all_cases(roof, site):
        parts = list(pieces(case, roof))
        if case.action == "W":
            assert sum(p[4] - p[3] for p in parts) == pytest.approx(far - eave)
            ends = sorted(p[3:] for p in parts)
            assert all(one[1] <= two[0] + 1e-6 for one, two in pairwise(ends))
        if case.pattern == "undrifted":
            (s,) = {p[1] for p in parts}
            assert resultants([p[1:] for p in parts], roof)[1] == pytest.approx(-s * float(roof.spacing) * (far - eave))


@few
@given(roofs(low=st.just("left")), sites())
def test_the_mirrored_roof_has_the_mirrored_loads(roof, site):
    image = replace(roof, low="right", bare=MIRROR.get(roof.bare, ""))
    one, other = all_cases(roof, site), {c.name: c for c in all_cases(image, site)}
    assert len(one) == len(other)
    for case in one:
        name = mirrored(case.name)
        found, expected = (
            resultants([p[1:] for p in pieces(c, r)], r) for c, r in ((other[name], image), (case, roof))
        )
        assert found == pytest.approx(expected, rel=1e-9, abs=1e-6)


@few
@given(st.lists(roofs(low=st.just("left")), min_size=2, max_size=4), sites())
def test_a_batch_loads_each_roof_as_it_would_be_alone(many, site):
    many = [replace(roof, bare=many[0].bare) for roof in many]
    numeric = [f.name for f in fields(Roof) if f.name not in ("form", "low", "bare")]
    batch = replace(many[0], **{n: np.array([float(getattr(roof, n)) for roof in many]) for n in numeric})
    for k, roof in enumerate(many):
        alone = {c.name: c for c in all_cases(roof, site)}
        for case in all_cases(batch, site):
            one = [
                replace(load, **{n: None if v is None else np.broadcast_to(v, len(many))[k] for n, v in given_.items()})
                for load in case.loads
                for given_ in [{n: getattr(load, n) for n in ("pressure", "x_from", "x_to")}]
            ]
            found = resultants([p[1:] for p in pieces(replace(case, loads=tuple(one)), roof)], roof)
            expected = np.zeros(3)
            if case.name in alone:
                expected = resultants([p[1:] for p in pieces(alone[case.name], roof)], roof)
            assert found == pytest.approx(expected, abs=1e-6)


@few
@given(numbers(5.0, 75.0), st.sampled_from("FGH"), numbers(0.5, 30.0))
def test_coefficients_never_cross_signs(pitch_deg, zone, area):
    slope = math.radians(pitch_deg)
    assert float(monopitch_coefficient("low eave", zone, slope, area)) <= 0.0
    assert float(monopitch_coefficient("low eave", zone, slope, area, "pressure")) >= 0.0
    assert float(monopitch_coefficient("high eave", zone, slope, area)) < 0.0


# --- trusses -----------------------------------------------------------------------------------------------------


def ran(spec, **site):
    groups = {
        g: replace(timber, sizes=EN_SIZES[g][:1], grades=EN_SIZES[g][1:]) for g, timber in spec.timber.groups.items()
    }
    options = options_of(replace(spec, timber=replace(spec.timber, groups=groups)))
    job = barn_at(altitude=950.0, exceptional_snow=3000.0, **site)
    return run(unbatched(family_of(job, [spec])), Choice(options=options, index={g: np.array(0) for g in GROUPS}))


def reaction(made, case, node):
    names = [made.truss.topology.nodes[s.node] for s in made.truss.topology.supports]
    return made.solution.reactions[made.cases.names.index(case), names.index(node)]


trusses = st.fixed_dictionaries(
    {
        "pitch_deg": numbers(3.0, 40.0),
        "span": numbers(3.0, 8.0),
        "overhang": numbers(0.1, 0.8),
        "tails": st.sampled_from([BOTH, ("low",), ("high",), ()]),
        "heel": numbers(0.2, 0.6),
    }
)


@slow
@given(trusses, st.sampled_from(["left", "right"]))
def test_reactions_carry_pressure_times_area(given_, low):
    """Statics of the whole roof from eave to eave, the outer halves of the bearings with it."""
    spec = custom_monopitch(low=low, **given_)
    made = ran(spec, building_height=10.0)
    bare = [end for end in BOTH if end not in given_["tails"]]
    roof = monopitch_roof(
        given_["pitch_deg"],
        low=low,
        span=spec.span,
        overhang=spec.overhang,
        spacing=spec.spacing,
        bare={"low": low, "high": MIRROR[low]}[bare[0]] if len(bare) == 1 else "",
    )
    up_slope = 1.0 if low == "left" else -1.0
    for head in made.cases.heads:
        if head.action not in ("S", "A", "W", "Lr") or not head.loads:
            continue
        along, up, moment = resultants([p[1:] for p in pieces(head, roof)], roof)
        at_low, at_high = reaction(made, head.name, "A"), reaction(made, head.name, "C")
        scale = 1e-6 * (abs(along) + abs(up) + 1.0)
        assert at_low[0] + at_high[0] == pytest.approx(-up_slope * along, abs=scale)
        assert at_low[1] + at_high[1] == pytest.approx(-up, abs=scale)
        if given_["tails"] == BOTH:  # without a tail the roof over the outer half of a bearing loads the joint over it
            # the slope begins `heel` over the bearing, where the horizontal force turns the truss as well
            turning = moment - given_["heel"] * along
            assert at_high[1] * float(roof.bearing_span) == pytest.approx(-turning, abs=10 * scale)


@slow
@given(trusses)
def test_the_mirrored_truss_has_the_mirrored_reactions(given_):
    one, other = (ran(custom_monopitch(low=low, **given_), building_height=10.0) for low in MIRROR)
    assert len(one.cases.names) == len(other.cases.names)
    for head in one.cases.heads:
        if head.action in ("S", "A", "W"):
            name = mirrored(head.name)
            for node in ("A", "C"):
                x, y = reaction(one, head.name, node)
                assert reaction(other, name, node) == pytest.approx((-x, y), abs=1e-6 * (abs(x) + abs(y) + 1.0))


@pytest.mark.parametrize(
    "made", [lambda d: en_spec(pitch=math.tan(math.radians(45 + d))), lambda d: custom_monopitch(pitch_deg=45.0 + d)]
)
def test_effects_are_continuous_at_45_deg(made):
    """EN 1991-1-4, Tables 7.3a and 7.4a have no step at 45 deg: nor have reactions, forces and utilisations."""
    below, above = (ran(made(d), building_height=12.0) for d in (-1e-5, 1e-5))
    assert below.cases.names == above.cases.names
    assert below.combinations.names == above.combinations.names
    for one, two in ((below.reactions, above.reactions), (below.demand.compression, above.demand.compression)):
        assert two == pytest.approx(one, abs=1e-4 * np.abs(one).max())
    assert above.checks.utilisation.max(axis=0) == pytest.approx(below.checks.utilisation.max(axis=0), abs=1e-4)
