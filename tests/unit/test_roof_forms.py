"""Which form a custom truss has, which the standards cover, and how the others are refused."""

import math
from dataclasses import replace

import numpy as np
import pytest

from rooftruss.basis.jobform import read_job
from rooftruss.errors import JobError, OutOfScopeError
from rooftruss.loads.actions import roof_of
from rooftruss.loads.cases import lay_on
from rooftruss.loads.gable import formed
from rooftruss.loads.roof import GABLE, MONOPITCH, ActionCase, SurfaceLoad
from rooftruss.run import run_job
from rooftruss.shapes.custom_layout import custom_layout, made_of
from rooftruss.shapes.forming import dimensions
from tests.custom_jobs import CALM, SHED, THREE, design
from tests.en_jobs import barn_at
from tests.monopitch import BOTH, custom_monopitch, monopitch_job, with_joint


def shape(*specs):
    """(roof, faults) of custom trusses that share their joints."""
    return formed(roof_of(dimensions(specs)), made_of(custom_layout(specs[0])))


@pytest.mark.parametrize("low", ["left", "right"])
@pytest.mark.parametrize(("tails", "bare_end"), [(BOTH, ""), ((), ""), (("low",), "high"), (("high",), "low")], ids=str)
def test_one_slope_from_eave_to_eave_is_a_monopitch(low, tails, bare_end):
    roof, faults = shape(custom_monopitch(low=low, tails=tails))
    other = {"left": "right", "right": "left"}[low]
    assert (roof.form, roof.low, roof.bare) == (MONOPITCH, low, {"": "", "low": low, "high": other}[bare_end])
    assert faults[MONOPITCH] == ""
    assert "meet over the middle" in faults[GABLE]
    assert float(roof.rise[0]) == pytest.approx(5.9 * math.tan(math.radians(15.0)))
    reach = {"low": 0.5 if "low" in tails else 0.05, "high": 0.5 if "high" in tails else 0.05}
    left, right = (float(t[0]) for t in roof.tails)
    assert (left, right) == pytest.approx((reach["low"], reach["high"])[:: 1 if low == "left" else -1])


def test_every_truss_of_a_batch_has_to_fit():
    spec = custom_monopitch()
    roof, faults = shape(spec, replace(spec, mark="C2", pitch=0.3))
    assert roof.form == GABLE
    assert "not on one slope of 16.7 deg (3.6/12) from eave to eave" in faults[MONOPITCH]
    assert shape(spec, replace(spec, mark="C2", spacing=0.9))[0].form == MONOPITCH


@pytest.mark.parametrize(
    ("spec", "fault"),
    [
        (with_joint(custom_monopitch(), "F", 0.0, 0.02), "joint 'F' of the top chord is not on one slope of 15.0 deg"),
        (replace(custom_monopitch(), pitch=math.tan(math.radians(16.0))), "is not on one slope of 16.0 deg (3.44/12)"),
        (with_joint(custom_monopitch(), "F", 0.0, 1.0), "not on slopes of 3.22/12 (15 deg) that meet over the middle"),
    ],
)
def test_what_is_neither_is_refused_by_clause(spec, fault):
    with pytest.raises(OutOfScopeError) as error:
        run_job(replace(barn_at(), trusses=(spec,)))
    text = str(error.value)
    assert (
        "EN 1991-1-3, 5.3.2, 5.3.3 and EN 1991-1-4, 7.2.4, 7.2.5: snow and wind are covered on symmetric gable" in text
    )
    assert "symmetric gable and monopitch roofs only, and here " in text
    assert fault in text
    assert "give them as cases of its own ([[loads.case]])" in text


def test_a_roof_of_no_form_runs_where_neither_snow_nor_wind_acts():
    kinked = with_joint(custom_monopitch(), "F", 0.0, 0.02)
    still = barn_at(ground_snow=0.0, basic_wind_velocity=0.0)
    made = run_job(replace(still, trusses=(kinked,))).designs[0]
    assert {h.action for h in made.run.cases.heads} == {"D", "Lr"}


@pytest.mark.parametrize("site", [{"ground_snow": "0 psf"}, {"wind_speed": "0 mph"}])
def test_a_monopitch_under_asce_7_is_refused_by_clause(site):
    with pytest.raises(OutOfScopeError) as error:
        design(truss=SHED, site=site)
    assert (
        "ASCE 7-22, 7.6.1 and Fig. 27.3-1: snow and wind are covered on symmetric gable roofs only, and here the roof "
        "is a monopitch: joint 'E' of the top chord is not on slopes of 3/12"
    ) in str(error.value)


def test_half_roof_live_on_a_monopitch_under_asce_7_is_half_its_slope():
    # ASCE 7, 4.3.3: 20 psf on plan, R_1 and R_2 1.0: half of 24 ft x 2 ft x 20 psf each, in pounds
    made = design(truss=SHED, site=CALM)
    for name, share in (("roof live", 1.0), ("roof live, left half", 0.5), ("roof live, right half", 0.5)):
        case = made.run.cases.names.index(name)
        down = float(made.run.solution.reactions[case, :, 1].sum()) / 4.4482216
        assert down == pytest.approx(share * 24 * 2 * 20, rel=1e-6)


def test_a_gable_given_joint_by_joint_keeps_its_halves():
    made = design(truss=THREE)
    case = made.run.cases.names.index("roof live, left half")
    tops = [made.run.cases.member_of.index(made.run.members.names.index(f"top {k}")) for k in (1, 2, 3, 4)]
    assert list(made.run.cases.q[case, tops, 1] < 0) == [True, True, False, False]


def test_a_building_lower_than_its_roof_is_refused(tmp_path):
    path = monopitch_job(tmp_path / "low.toml", custom_monopitch(), ('"6 m"', '"1.5 m"'))
    with pytest.raises(
        JobError, match="less than the rise of the roof; measure it from the ground to its highest poin"
    ):
        run_job(read_job(path))


def test_a_person_walks_over_both_tails():
    made = run_job(replace(barn_at(), trusses=(custom_monopitch(low="right"),))).designs[0]
    stops = [n.removeprefix("person on roof, ") for n in made.run.cases.names if n.startswith("person")]
    assert stops == [
        *("at T", "middle of tail 1", "at H", "middle of top 1", "at G", "middle of top 2", "at F"),
        *("middle of top 3", "at E", "middle of top 4", "at D", "middle of tail 2", "at S"),
    ]
    for name in ("person on roof, at T", "person on roof, middle of tail 2"):
        case = made.run.cases.names.index(name)
        assert float(made.run.solution.reactions[case, :, 1].sum()) == pytest.approx(1000.0)


def test_the_high_end_of_a_slope_without_a_tail_loads_the_joint_over_its_bearing():
    # the roof over the outer half of a bearing of 100 mm, by hand: 0.55 kPa on the slope at 15 deg, 0.6 m apart
    made = run_job(replace(barn_at(), trusses=(custom_monopitch(tails=()),))).designs[0]
    case, joint = made.run.cases.names.index("dead, top chord"), made.run.truss.topology.nodes.index("H")
    assert float(made.run.cases.nodal[case, joint, 1]) == pytest.approx(-550 * 0.6 * 0.05 / math.cos(math.radians(15)))
    whole = float(made.run.solution.reactions[case, :, 1].sum())
    assert whole == pytest.approx(550 * 0.6 * 6.0 / math.cos(math.radians(15)))
    tailed = run_job(replace(barn_at(), trusses=(custom_monopitch(),))).designs[0]
    assert not np.any(tailed.run.cases.nodal[tailed.run.cases.names.index("dead, top chord")])


@pytest.mark.parametrize(("low", "side", "outer"), [("left", "right", (5.91, 5.95)), ("right", "left", (-0.05, -0.01))])
def test_only_the_part_of_a_load_that_lies_outside_the_bearing_reaches_its_joint(low, side, outer):
    # by hand: 1 kPa square to 15 deg on 40 mm of plan beyond the middle of a bearing of 100 mm, trusses 0.6 m apart
    truss = made_of(custom_layout(custom_monopitch(low=low, tails=())))
    reach = {"x_from": np.asarray(outer[0]), "x_to": np.asarray(outer[1] + (0.2 if side == "right" else 0.0))}
    load = SurfaceLoad(surface=f"{side} tail", kind="normal", pressure=np.asarray(1000.0), **reach)
    head = ActionCase(name="wind", short="", action="W", pattern="", loads=(load,))

    def at_joints(on):
        return lay_on(on, [head], np.asarray(0.6), np.zeros(len(on.topology.members))).nodal[0]

    joint = truss.topology.nodes.index("H")
    along = 1000 * 0.6 * 0.04 * math.tan(math.radians(15))
    assert at_joints(truss)[joint] == pytest.approx([along if low == "left" else -along, -1000 * 0.6 * 0.04])
    assert not np.any(np.delete(at_joints(truss), joint, axis=0))
    assert not np.any(at_joints(made_of(custom_layout(custom_monopitch(low=low)))))
