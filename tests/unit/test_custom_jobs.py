"""Trusses given joint by joint in a job file: same pipeline, same results; what does not fit is refused in words."""

import copy
import tomllib
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from rooftruss.basis.jobform import job_from_mapping, with_overrides
from rooftruss.basis.newjob import new_job_text
from rooftruss.basis.schemes import schemes
from rooftruss.errors import JobError, OutOfScopeError, UnstableTrussError
from rooftruss.output.result import truss_record
from rooftruss.run import run_job
from tests.custom_jobs import CALM, FOOT, KING, KING_MEMBERS, LENGTH, SHED, THREE, as_rows, design, job, rows
from tests.end_to_end.recompute import recompute


def effects_agree(made) -> bool:
    """Whether an independent frame, from the record of the truss alone, has the same forces and reactions."""
    record = truss_record(made)
    again = recompute(record)
    scale = max(float(np.abs(v).max()) for v in again.axial.values())
    for c, case in enumerate(record["cases"]):
        told = record["effects"][case["name"]]
        for member, found in told["members"].items():
            pairs = ((found["axial"], again.axial[member]), (found["moment"], again.moment[member]))
            if not all(np.allclose(one, two[c, [0, -1]], rtol=1e-4, atol=1e-7 * scale) for one, two in pairs):
                return False
        if not all(np.allclose(told["reactions"][n], r[c], rtol=1e-4, atol=1e-6) for n, r in again.reactions.items()):
            return False
    return True


@pytest.mark.parametrize("changes", [{}, {"longest_stock": "14 ft"}, {"shape": "howe", "overhang": "0 in"}])
def test_a_shape_of_the_catalogue_given_joint_by_joint_has_its_results(changes):
    listed = design(truss=changes)
    given = design(truss={**changes, **as_rows(listed.run.truss)})
    assert given.run.members.names == listed.run.members.names
    assert given.run.cases.names == listed.run.cases.names
    assert given.run.combinations.names == listed.run.combinations.names
    for name in ("tension", "compression", "moment", "shear"):
        one, two = (getattr(d.outcome.envelope, name).value for d in (given, listed))
        assert one == pytest.approx(two, rel=1e-9, abs=1e-6)
    assert given.run.checks.utilisation == pytest.approx(listed.run.checks.utilisation, rel=1e-9, abs=1e-9)
    assert given.run.bearing == pytest.approx(listed.run.bearing, rel=1e-9)
    assert given.outcome.deflection.places == listed.outcome.deflection.places
    assert given.outcome.deflection.ratio == pytest.approx(listed.outcome.deflection.ratio, rel=1e-9, abs=1e-9)
    assert given.outcome.volume == pytest.approx(listed.outcome.volume)


def test_point_loads_stand_on_the_members_of_a_custom_truss():
    point = {"action": "D", "chord": "bottom", "position": "13 ft", "force": "200 lbf", "note": "unit"}
    made = design(truss=THREE, loads={"point": [point]})
    (placed,) = made.run.cases.points
    assert made.run.members.names[placed.member] == "bottom 2"
    assert float(placed.at) == pytest.approx((13 - 1.75 / 12 - LENGTH / 2) * FOOT)


def test_three_bearings_share_the_load_as_an_independent_frame_says():
    made = design(truss=THREE)
    assert effects_agree(made)
    record = truss_record(made)
    dead = made.run.cases.names.index("dead, bottom chord")
    up = made.run.solution.reactions[dead, :, 1]
    # 7 psf x 2 ft on 23.708 ft of bottom chord; the middle bearing takes the most of it
    assert float(up.sum()) == pytest.approx(7 * 2 * LENGTH * 4.4482216, rel=1e-6)
    assert float(up[1]) > 2 * float(up[0]) == pytest.approx(2 * float(up[2]))
    assert [s["node"] for s in record["supports"]] == ["A", "B", "C"]


def test_an_inner_bearing_has_its_own_length_and_halves_the_span_of_the_deflection_limits():
    made = design(truss=THREE)
    assert made.run.bearing_lengths == pytest.approx(np.array([3.5, 5.5, 3.5]) * FOOT / 12)
    down = np.maximum(made.run.reactions[..., 1], 0.0)
    strength = made.run.members.properties["Fc_perp"][0] * 1.5 * FOOT / 12
    assert made.run.bearing == pytest.approx(down / strength / made.run.bearing_lengths)
    place = [p.name for p in made.outcome.deflection.places].index("bottom 1")
    limit = float(made.outcome.deflection.limit[place])
    assert LENGTH / 2 * FOOT / limit == pytest.approx(round(LENGTH / 2 * FOOT / limit))  # l/180 or l/240 of half


def test_a_cantilever_beyond_its_bearing_is_limited_by_twice_its_length():
    tails = {**KING, "T": (-1.75 / 12 - 1, (-1.75 / 12 - 1) / 2), "U": (LENGTH + 1.75 / 12 + 1, (-1.75 / 12 - 1) / 2)}
    members = [
        *(("top chord", a, b, p.replace("s", "") if a == "A" else p) for _, a, b, p in KING_MEMBERS[:3]),
        ("top chord", "F", "C", ""),
        *KING_MEMBERS[4:],
        ("tail", "T", "A", "s"),
        ("tail", "C", "U", "e"),
    ]
    made = design(truss=rows(tails, members, {"A": "hv", "C": "v"}))
    assert effects_agree(made)
    found = made.outcome.deflection
    tip = [p.name for p in found.places].index("T")
    assert 2 * (1 + 1.75 / 12) * FOOT / float(found.limit[tip]) in [pytest.approx(n) for n in (120, 180)]  # no ceiling


def test_a_shed_roof_runs_where_neither_snow_nor_wind_acts():
    made = design(truss=SHED, site=CALM)
    assert {h.action for h in made.run.cases.heads} == {"D", "L", "Lr"}
    assert effects_agree(made)
    # roof live of 20 psf on plan: R_2 = 1 at 3/12, R_1 = 1 under 200 ft2; the whole of it comes down at the bearings
    full = made.run.cases.names.index("roof live")
    down = float(made.run.solution.reactions[full, :, 1].sum()) / 4.4482216
    assert down == pytest.approx(20 * 2 * 24, rel=1e-6)  # 24 ft out to out of bearings, 2 ft apart


@pytest.mark.parametrize("site", [{"ground_snow": "0 psf"}, {"wind_speed": "0 mph"}])
def test_snow_or_wind_on_a_shed_roof_is_refused_by_clause(site):
    with pytest.raises(OutOfScopeError) as error:
        design(truss=SHED, site=site)
    assert "demo.toml [[truss]] T1 ASCE 7-22, 7.6.1 and Fig. 27.3-1: " in str(error.value)
    assert "joint 'E' of the top chord is not on slopes of 3/12" in str(error.value)


def test_a_gable_of_another_pitch_than_the_job_says_is_refused():
    with pytest.raises(OutOfScopeError, match=r"not on slopes of 5/12 \(22\.6 deg\) that meet over the middle"):
        design(truss={**THREE, "pitch": "5/12"})
    assert design(truss={**THREE, "pitch": "5/12"}, site=CALM).run.cases.names


def test_a_frame_that_only_its_stiff_chords_hold_is_checked_and_known_as_such():
    """A post-and-tie truss with a room in the middle: no diagonal there, so pinned members would move."""
    half, side = LENGTH / 2, 0.3 * LENGTH
    nodes = {
        "A": (0, 0),
        "B": (side, 0),
        "C": (LENGTH - side, 0),
        "D": (LENGTH, 0),
        "E": (side, 0.8 * side),
        "F": (half, 0.8 * half),
        "G": (LENGTH - side, 0.8 * side),
    }
    members = [
        ("top chord", "A", "E", "s"),
        ("top chord", "E", "F", "e"),
        ("top chord", "F", "G", "s"),
        ("top chord", "G", "D", "e"),
        ("bottom chord", "A", "B", "s"),
        ("bottom chord", "B", "C", ""),
        ("bottom chord", "C", "D", "e"),
        ("web", "B", "E", "se"),
        ("web", "C", "G", "se"),
        ("web", "E", "G", "se"),
    ]
    room = design(truss=rows(nodes, members, {"A": "hv", "D": "v"}, pitch="9.6/12", overhang="0 in"))
    assert not room.run.triangulated
    assert design(truss=THREE).run.triangulated
    assert design().run.triangulated


def test_a_mechanism_is_named_by_joint_and_direction():
    """Enough members for the count, but a square of four pinned ones in the middle."""
    nodes = {"A": (0, 0), "B": (8, 0), "C": (LENGTH - 8, 0), "D": (LENGTH, 0), "E": (8, 4), "G": (LENGTH - 8, 4)}
    members = [
        ("top chord", "A", "E", "se"),
        ("top chord", "E", "G", "se"),
        ("top chord", "G", "D", "se"),
        ("bottom chord", "A", "B", "se"),
        ("bottom chord", "B", "C", "se"),
        ("bottom chord", "C", "D", "se"),
        ("web", "B", "E", "se"),
        ("web", "C", "G", "se"),
    ]
    with pytest.raises(UnstableTrussError, match=r"T1 custom: joint '?[BCEG]'? can move (vertically|horizontally)"):
        design(truss=rows(nodes, members, {"A": "hv", "D": "hv"}, overhang="0 in"), site=CALM)


def changed(**keys):
    return {**copy.deepcopy(THREE), **keys}


@pytest.mark.parametrize(
    ("truss", "message"),
    [
        (
            changed(span="25 ft"),
            "span: 7.620 m less a bearing of 0.089 m is 7.531 m, but the outer bearings 'A' and 'C'",
        ),
        (changed(overhang="12 in"), "overhang: 0.305 m, but the truss has 0 tails"),
        (
            changed(longest_stock="10 ft"),
            "longest_stock: 3.05 m, but the chord piece that ends with 'bottom 1' is 3.61 m",
        ),
        (changed(panels=4), "[[truss]] T1 panels: is fixed by the joints of a custom truss"),
        (changed(heel_height="10 in"), "[[truss]] T1 heel_height: is fixed by the joints"),
        (changed(node=None), "[[truss]] T1 node: is not a list of tables; write [[truss.node]], in two brackets"),
        (changed(node=[]), "nodes: 0 given; a truss has at least three joints"),
        (changed(shape="fink"), "[[truss]] T1 node: belongs to a truss with shape = 'custom'"),
        (
            {"shape": "custom"},
            "[[truss]] T1 support: there is none; a custom truss is given by rows of [[truss.support]]",
        ),
        (changed(support=THREE["support"][:1]), "2 movements are held, at least 3 are needed"),
        (
            changed(support=[THREE["support"][0], {**THREE["support"][1], "vertical": 1}]),
            "support 2 vertical: 1 is not",
        ),
        (
            changed(support=[*THREE["support"][:2], {**THREE["support"][2], "bearing": "7 in"}]),
            "an outer bearing has the",
        ),
        (
            changed(member=[{**row, "role": row["role"].replace("bottom chord", "web")} for row in THREE["member"]]),
            "no member has the role 'bottom chord'",
        ),
        (changed(member=THREE["member"][:4]), "joint 'B' has no member"),
        (changed(member=THREE["member"][4:]), "2 members or supports are missing; the joints can move"),
        (
            changed(member=[*THREE["member"], {"role": "web", "start": "A", "end": "Z"}]),
            "joint 'Z' is not among the nodes",
        ),
        (
            changed(member=[*THREE["member"], {"role": "strut", "start": "A", "end": "E"}]),
            "member 10 role: 'strut' is not a",
        ),
        (
            changed(member=[{**THREE["member"][0], "pinned": "both"}]),
            "member 1 pinned: 'both' is not a list; write some of",
        ),
        (changed(member=[{**THREE["member"][0], "pinned": ["both"]}]), "member 1 pinned: 'both' is not a choice here"),
        (changed(node=[{**THREE["node"][0], "x": 3}]), "node 1 x: 3 has no unit"),
        (changed(node=[{**THREE["node"][0], "z": 3}]), "node 1: there is no key 'z'"),
    ],
)
def test_what_does_not_fit_is_refused_in_words(truss, message):
    stock = truss.pop("longest_stock", "40 ft")
    with pytest.raises(JobError) as error:
        run_job(job(truss=truss, timber={"longest_stock": stock}))
    assert message in str(error.value)
    assert str(error.value).startswith("demo.toml")


def test_pins_left_out_are_those_of_the_model_and_are_printed():
    bare = changed(
        member=[{k: v for k, v in row.items() if k != "pinned" or row["role"] != "web"} for row in THREE["member"]]
    )
    made = run_job(job(truss=bare)).designs[0]
    assert made.run.family.topology == design(truss=THREE).run.family.topology
    texts = [a.text for a in made.run.family.job.assumptions if a.place == "[[truss]] T1 member"]
    assert texts == ["of members whose pinned ends are not given, webs are pinned at both and chords at none"]


def test_a_shape_of_the_catalogue_takes_the_place_of_a_custom_one_without_its_joints():
    other = with_overrides(job(truss=THREE), None, {"shape": "fink"})
    assert (other.trusses[0].shape, other.trusses[0].custom) == ("fink", None)


@pytest.mark.parametrize("scheme", schemes())
def test_the_custom_truss_of_the_fresh_form_runs(scheme):
    text = "\n".join(line.removeprefix("#| ") for line in new_job_text(scheme).splitlines())
    made = job_from_mapping(tomllib.loads(text), "new.toml", Path())
    assert [t.mark for t in made.trusses] == ["T1", "C1"]
    found = run_job(replace(made, trusses=made.trusses[1:])).designs[0]
    assert found.run.members.names == ("top 1", "top 2", "bottom 1", "bottom 2", "post")
    assert effects_agree(found)
