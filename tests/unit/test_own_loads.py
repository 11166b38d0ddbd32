"""Loads that a job gives itself: cases, and point loads that are walked along a chord."""

import numpy as np
import pytest

from rooftruss.basis.job import OwnCase
from rooftruss.design.batch import check_many
from rooftruss.design.case_values import case_values
from rooftruss.errors import JobError
from rooftruss.output.result import truss_record
from tests.custom_jobs import LENGTH, THREE, design, job
from tests.end_to_end.recompute import recompute

POUND = 4.4482216152605
SIZES = {"top chord": ("2x6", "DF-L SS"), "bottom chord": ("2x6", "DF-L SS"), "web": ("2x4", "DF-L No.2")}


def case(name="own", action="Lr", **keys):
    return {"name": name, "action": action, **keys}


def with_case(*cases, **changes):
    return design(loads={"case": list(cases)}, **changes)


def message(*cases, **changes):
    with pytest.raises(JobError) as error:
        with_case(*cases, **changes)
    return str(error.value)


def on(made, name):
    """Vertical reactions of a case [lbf]."""
    return made.run.solution.reactions[made.run.cases.names.index(name), :, 1] / POUND


# --- cases of the job's own -----------------------------------------------------------------------------------------


def test_a_case_on_the_whole_roof_is_the_roof_live_load_of_the_standard():
    """20 psf reduced by R_2 = 0.9 at 6/12 (ASCE 7, 4.8.2): 18 psf on plan."""
    made = with_case(case(loads=[{"surface": "roof", "kind": "plan", "pressure": "18 psf"}]))
    full, own = (made.run.cases.names.index(n) for n in ("roof live", "own"))
    assert made.run.solution.end_forces[own] == pytest.approx(made.run.solution.end_forces[full], rel=1e-9, abs=1e-6)
    assert any("Lr(own)" in name for name in made.run.combinations.names)


def test_members_and_a_stretch_carry_what_lies_on_them():
    """Panels of 5.927 ft on plan; 12 ft to 16 ft from the outside is 11.854 ft to 15.854 ft from the middle."""
    own = [
        case("two panels", loads=[{"members": ["top 1", "top 2"], "kind": "plan", "pressure": "10 psf"}]),
        case("stretch", loads=[{"surface": "right slope", "kind": "plan", "line": "30 lbf/ft", "to": "16 ft"}]),
        case(
            "piece", loads=[{"members": ["top 3"], "kind": "plan", "line": "30 lbf/ft", "from": "14 ft", "to": "99 ft"}]
        ),
    ]
    own[2]["loads"][0]["to"] = "40 ft"
    made = with_case(*own)
    quarter = LENGTH / 4
    assert on(made, "two panels").sum() == pytest.approx(10 * 2 * 2 * quarter)
    assert on(made, "stretch").sum() == pytest.approx(30 * (16 - 1.75 / 12 - LENGTH / 2))
    assert on(made, "piece").sum() == pytest.approx(30 * (3 * quarter - (14 - 1.75 / 12)))
    found = case_values(made, "PIECE")
    ((member, start, end, qx, qy),) = found.stretches
    assert (member, qx) == ("top 3", 0.0)
    assert (end - start) * qy / POUND == pytest.approx(-on(made, "piece").sum())
    assert found.resultant == pytest.approx((0.0, -on(made, "piece").sum() * POUND))


def test_normal_and_sideways_loads_push_where_they_should():
    made = with_case(
        case("gust", "W", loads=[{"surface": "left slope", "kind": "normal", "pressure": "-10 psf"}]),
        case("push", "W", loads=[{"surface": "left slope", "kind": "right", "pressure": "10 psf"}]),
    )
    rise, run = LENGTH / 4, LENGTH / 2
    assert case_values(made, "gust").resultant == pytest.approx((-20 * rise * POUND, 20 * run * POUND))
    assert case_values(made, "push").resultant == pytest.approx((20 * rise * POUND, 0.0), abs=1e-6)


def test_points_of_a_case_act_in_it_alone_and_an_independent_frame_agrees():
    own = case("hoist", "L", points=[{"chord": "bottom", "position": "9 ft", "force": "300 lbf"}])
    made = with_case(own)
    assert on(made, "hoist").sum() == pytest.approx(300)
    assert on(made, "ceiling live").sum() == pytest.approx(10 * 2 * LENGTH)
    record = truss_record(made)
    again = recompute(record)
    c = [x["name"] for x in record["cases"]].index("hoist")
    for member, found in record["effects"]["hoist"]["members"].items():
        assert found["moment"] == pytest.approx(again.moment[member][c, [0, -1]].tolist(), rel=1e-6, abs=1e-3)


def factors(made, name):
    column = made.run.cases.names.index(name)
    return made.run.combinations.factors[:, column]


def test_a_case_stands_in_the_place_of_one_or_joins_all_of_its_action():
    load = [{"surface": "ceiling", "kind": "plan", "pressure": "5 psf"}]
    alone, joining = with_case(case("alone", "L", loads=load)), with_case(case("joins", "L", joins=True, loads=load))
    assert not np.any((factors(alone, "alone") > 0) & (factors(alone, "ceiling live") > 0))
    assert np.array_equal(factors(joining, "joins"), factors(joining, "ceiling live"))
    assert len(joining.run.combinations.names) < len(alone.run.combinations.names)


def test_dead_load_of_the_job_counts_where_it_adds_unless_it_is_certain():
    load = [{"surface": "roof", "kind": "slope", "pressure": "5 psf"}]
    made = with_case(case("later", "D", loads=load), case("always", "D", pattern="both", loads=load))
    least = factors(made, "least dead, top chord") > 0
    assert np.any(least)
    assert np.all(factors(made, "later")[least] == 0)
    assert np.all(factors(made, "always")[least] > 0)
    assert np.array_equal(factors(made, "later") > 0, factors(made, "dead, top chord") > 0)


def test_snow_of_the_job_accompanies_only_as_a_pattern_the_scheme_lists():
    load = [{"surface": "left slope", "kind": "plan", "pressure": "50 psf"}]
    made = with_case(case("drift", "S", loads=load), case("even", "S", pattern="balanced", loads=load))
    wind = np.any(made.run.combinations.factors[:, [h.action == "W" for h in made.run.cases.heads]] > 0, axis=1)
    assert not np.any(wind & (factors(made, "drift") > 0))
    assert np.any(wind & (factors(made, "even") > 0))


@pytest.mark.parametrize(
    ("own", "text"),
    [
        (
            {"loads": [{"members": ["top 9"], "kind": "plan", "pressure": "1 psf"}]},
            "[[loads.case]] 'own': there is no member",
        ),
        (
            {"loads": [{"members": ["web 1"], "kind": "plan", "pressure": "1 psf"}]},
            "'web 1' is a web, which no area load",
        ),
        ({"loads": [{"kind": "plan", "pressure": "1 psf"}]}, "case 1 loads 1: give either members or a surface"),
        (
            {"loads": [{"members": ["top 1"], "surface": "roof", "kind": "plan", "pressure": "1 psf"}]},
            "give either members or a surface, not both",
        ),
        ({"loads": [{"surface": "roof", "kind": "plan"}]}, "case 1 loads 1: give either a pressure or a line load"),
        (
            {"loads": [{"surface": "roof", "kind": "plan", "pressure": "1 psf", "line": "1 lbf/ft"}]},
            "give either a pressure or a line load, not both",
        ),
        (
            {"loads": [{"surface": "roof", "kind": "plan", "line": "1 lbf/ft", "from": "9 ft", "to": "8 ft"}]},
            "case 1 loads 1: from must be left of to",
        ),
        (
            {"loads": [{"surface": "wall", "kind": "plan", "line": "1 lbf/ft"}]},
            "loads 1 surface: 'wall' is not a choice",
        ),
        ({"loads": [{"surface": "roof", "kind": "up", "line": "1 lbf/ft"}]}, "loads 1 kind: 'up' is not a choice"),
        ({"loads": {"surface": "roof"}}, "case 1 loads: is not a list of tables; write loads = [{ ... }, ...]"),
        ({}, "[loads] case 1: holds no load; give it loads = [...] or points = [...]"),
        (
            {"points": [{"chord": "top", "position": "30 ft", "force": "1 lbf"}]},
            "'own' points position: 30 ft (9.14 m) is outside",
        ),
        ({"action": "E"}, "[loads] case 1 action: 'E' is not a choice here"),
        (
            {"pattern": "balanced"},
            "case 1 pattern: 'balanced' is not a pattern here; the scheme asce7-22-asd has none for Lr",
        ),
        ({"action": "S", "pattern": "even"}, "case 1 pattern: 'even' is not a pattern here; did you mean 'eave'?"),
        ({"action": "S", "pattern": "eave", "joins": True}, "a case that joins every other case of its action has no"),
        ({"nmae": "x"}, "[loads] case 1: there is no key 'nmae'; did you mean 'name'?"),
        (
            {"name": "roof live", "points": [{"chord": "top", "position": "9 ft", "force": "1 lbf"}]},
            "take another name",
        ),
    ],
)
def test_a_wrong_case_is_told(own, text):
    assert text in message(case() | own)


def test_case_names_are_told_apart_and_the_list_is_a_list():
    points = [{"chord": "top", "position": "9 ft", "force": "1 lbf"}]
    assert "[loads] case 2 name: 'Own' is taken" in message(case(points=points), case("Own", points=points))
    with pytest.raises(JobError, match=r"\[loads\] case: is not a list of tables; write \[\[loads.case\]\]"):
        job(loads={"case": {"name": "x"}})


def test_a_truss_has_cases_of_its_own_in_the_place_of_those_of_the_job():
    points = [{"chord": "top", "position": "9 ft", "force": "1 lbf"}]
    made = job(loads={"case": [case(points=points)]}, truss={"case": [case("other", "D", points=points)]})
    (found,) = made.trusses[0].loads.cases
    assert isinstance(found, OwnCase)
    assert (found.name, found.action, found.pattern, found.points[0].action) == ("other", "D", "most", "D")


def test_an_unknown_case_is_told_with_the_nearest():
    with pytest.raises(JobError, match="truss T1 has no load case 'roof life'; did you mean 'roof live'"):
        case_values(design(), "roof life")
    found = case_values(design(), "snow, balanced")
    assert {v.symbol for v in found.head.values} >= {"p_g", "C_e", "C_t", "p_f", "C_s", "p_s"}


# --- walked loads ---------------------------------------------------------------------------------------------------


def test_a_person_stops_at_every_panel_point_and_middle_of_the_top_chord():
    made = design(loads={"maintenance_load": "300 lbf"})
    walked = [h for h in made.run.cases.heads if h.name.startswith("person on roof")]
    members = [m for m in made.run.family.topology.members if m.role in ("top chord", "tail")]
    # a middle each, and the joints between and beyond them but the two bearings
    assert len(walked) == len(members) + len(members) + 1 - 2
    assert {h.action for h in walked} == {"Lr"}
    for head in walked:
        assert on(made, head.name).sum() == pytest.approx(300)
    reactions = on(made, "person on roof, middle of top 1")
    assert reactions[1] == pytest.approx(300 / 8)  # an eighth of the span from the left bearing
    assert on(made, "person on roof, at F").tolist() == pytest.approx([150, 150])


def test_the_place_of_a_person_excludes_the_uniform_load_and_every_other_place():
    made = design(loads={"maintenance_load": "300 lbf"})
    live = [h.action == "Lr" for h in made.run.cases.heads]
    assert np.all(np.count_nonzero(made.run.combinations.factors[:, live], axis=1) <= 1)
    alone = factors(made, "person on roof, middle of top 2")
    assert sorted(set(np.round(alone[made.run.combinations.strength], 3))) == [0.0, 0.75, 1.0]


def test_walked_loads_agree_with_an_independent_frame():
    made = design(truss=THREE, loads={"maintenance_load": "300 lbf", "ceiling_point_load": "200 lbf"})
    names = [h.name for h in made.run.cases.heads if h.name.startswith("load on ceiling")]
    assert names == [
        "load on ceiling, middle of bottom 1",
        "load on ceiling, middle of bottom 2",
    ]  # joints are bearings
    record = truss_record(made)
    again = recompute(record)
    for c, one in enumerate(record["cases"]):
        if "person" in one["name"] or "load on ceiling" in one["name"]:
            for member, found in record["effects"][one["name"]]["members"].items():
                assert found["moment"] == pytest.approx(again.moment[member][c, [0, -1]].tolist(), rel=1e-6, abs=1e-3)
                assert found["axial"] == pytest.approx(again.axial[member][c, [0, -1]].tolist(), rel=1e-6, abs=1e-3)


def test_without_them_the_assumptions_say_so():
    texts = [a.text for a in job().assumptions]
    assert any(t.startswith("no point load is walked along the top chord (ASCE 7-22") for t in texts)
    assert "no point load is walked along the bottom chord" in texts
    assert not any(
        "walked" in a.text
        for a in job(loads={"maintenance_load": "300 lbf", "ceiling_point_load": "1 lbf"}).assumptions
    )


def test_a_batch_walks_each_truss_at_its_own_places():
    """Three spans in one batch give what each gives by itself."""
    spans = ["20 ft", "24 ft", "22 ft"]
    made = job(loads={"maintenance_load": "300 lbf", "ceiling_point_load": "250 lbf"})
    specs = [
        job(loads={"maintenance_load": "300 lbf", "ceiling_point_load": "250 lbf"}, truss={"span": s}).trusses[0]
        for s in spans
    ]
    together = check_many(made, specs, [SIZES])
    apart = [check_many(made, [spec], [SIZES]) for spec in specs]
    assert together.utilisation == pytest.approx([float(one.utilisation[0]) for one in apart], rel=1e-9)
    assert together.down == pytest.approx([float(one.down[0]) for one in apart], rel=1e-9)
