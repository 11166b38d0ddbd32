"""Trusses and frames of textbooks, handbooks and own exact statics: structures/*.json, each with its source.

`exact` is statics and must be met to 1e-9 of the largest force; `published` is what the source prints, met within
`published_tolerance` (what its rounding allows). Printed errors are listed with their reason in `published_errors`.
"""

import json
import math
from pathlib import Path

import numpy as np
import pytest

from rooftruss.analysis.effects import combined_extremes, unit_effects
from rooftruss.analysis.frame import solve
from rooftruss.analysis.inspection import inspect_case, joint_loads, pin_jointed_axial
from tests.support import framed, joint_cases, load_cases

FILES = sorted((Path(__file__).parent / "structures").glob("*.json"))
ENTRIES = {entry["id"]: entry for path in FILES for entry in json.loads(path.read_text(encoding="utf-8"))}
TRUSSES = [key for key, entry in ENTRIES.items() if "zero_members" in entry]
FRAMES = [key for key, entry in ENTRIES.items() if "where" in entry]
PUBLISHED = [key for key in TRUSSES if {"published", "reactions_published"} & ENTRIES[key].keys()]
DEFLECTIONS = [key for key, entry in ENTRIES.items() if "displacement_targets" in entry]


def test_no_structure_was_lost():
    beams = [key for key in ENTRIES if key.startswith("BEAM")]
    assert (len(TRUSSES), len(FRAMES), len(beams), len(DEFLECTIONS)) == (82, 7, 16, 4)
    assert len(ENTRIES) == 105
    assert all(
        entry["source"] and entry["confidence"] in ("retrieved", "memory", "derived") for entry in ENTRIES.values()
    )


def truss_of(entry):
    return framed(entry["nodes"], entry["members"], entry["supports"])


def solved(entry):
    """Axial forces by member, reactions by node (x, y) and the largest force of a pin-jointed truss."""
    truss = truss_of(entry)
    cases = joint_cases(truss, entry["loads"])
    ea = np.ones(len(entry["members"]))
    axial = pin_jointed_axial(truss, ea, cases)[0]
    reactions = solve(truss, ea, 0 * ea, cases).reactions[0]
    return dict(zip(truss.topology.names, axial, strict=True)), dict(zip(entry["supports"], reactions, strict=True))


@pytest.mark.parametrize("key", TRUSSES)
def test_truss_forces_are_exact(key):
    entry = ENTRIES[key]
    axial, reactions = solved(entry)
    largest = max(abs(force) for force in entry["exact"].values())
    assert axial.keys() == entry["exact"].keys()
    for member, force in entry["exact"].items():
        assert axial[member] == pytest.approx(force, abs=1e-9 * largest), member
    assert reactions.keys() == entry["reactions_exact"].keys()
    for node, force in entry["reactions_exact"].items():
        assert reactions[node] == pytest.approx(force, abs=1e-9 * largest), node


@pytest.mark.parametrize("key", PUBLISHED)
def test_truss_forces_are_those_published(key):
    entry = ENTRIES[key]
    axial, reactions = solved(entry)
    tolerance, errors = entry["published_tolerance"], entry.get("published_errors", {})
    for member, printed in entry.get("published", {}).items():
        if member in errors:
            assert abs(axial[member] - printed) > 0.01 * abs(printed), f"{member}: no error, but listed as one"
        else:
            assert axial[member] == pytest.approx(printed, abs=tolerance[member]), member
    for node, printed in entry.get("reactions_published", {}).items():
        for k, direction in enumerate("xy"):
            if printed[k] is not None:
                allowed = tolerance[f"R_{node}_{direction}"]
                assert reactions[node][k] == pytest.approx(printed[k], abs=allowed), (node, direction)


@pytest.mark.parametrize("key", TRUSSES)
def test_idle_members_are_those_of_the_source(key):
    entry = ENTRIES[key]
    axial, _ = solved(entry)
    largest = max(map(abs, axial.values()))
    assert {m for m, force in axial.items() if abs(force) <= 1e-9 * largest} == set(entry["zero_members"])
    truss = truss_of(entry)
    found = inspect_case(truss, joint_loads(truss, joint_cases(truss, entry["loads"]))[0])
    assert set(found.zero) <= set(entry["zero_members"])
    for one, other in found.collinear:
        assert axial[one] == pytest.approx(axial[other], abs=1e-9 * largest)


@pytest.mark.parametrize(
    ("key", "unseen"),
    [
        # Idle through the balance of more than one joint (a cut, a symmetry), which no single joint shows.
        ("DEFL-HIB-0204", {"BE"}),
        ("HIP5-6in12-UNIT", {"t2-b3"}),
        ("QUEENPOST-45-BOTTOM", {"q1-c2"}),
        ("HOWE6-1of4-LEFT", set()),
        ("PRATT6-1of4-LEFT", set()),
        ("FINK8-30-WIND-SINGER322", {"B-E1", "E1-E2", "C2-E2"}),
        ("WALL-FOSSEE3.5", {"BF", "FD"}),
        ("STUDIO-BJ6.15", set()),
        ("PRATT-PAR-BJ-S6.2", set()),
        ("PAR6-PRATT-UNIT", set()),
    ],
)
def test_inspection_finds_all_but_these(key, unseen):
    entry = ENTRIES[key]
    truss = truss_of(entry)
    found = inspect_case(truss, joint_loads(truss, joint_cases(truss, entry["loads"]))[0])
    assert set(entry["zero_members"]) - set(found.zero) == unseen


@pytest.mark.parametrize("key", DEFLECTIONS)
def test_joint_movements(key):
    """Movement and virtual-work sum N n L of a joint (movement times EA)."""
    entry = ENTRIES[key]
    truss = truss_of(entry)
    ea = np.full(len(entry["members"]), float(entry["E"] * entry["A"]))
    moved = solve(truss, ea, 0 * ea, joint_cases(truss, entry["loads"])).displacements[0]
    exact, printed = entry["displacements_exact"], entry.get("displacements_published", {})
    assert set(exact) == {f"{what}_{name}" for name in entry["displacement_targets"] for what in ("sum_NnL", "disp")}
    for name, (node, direction) in entry["displacement_targets"].items():
        value = moved[truss.topology.nodes.index(node), "xy".index(direction)]
        for label, number in ((f"disp_{name}", value), (f"sum_NnL_{name}", value * ea[0])):
            assert number == pytest.approx(exact[label], rel=1e-9), label
            if label in printed:
                assert number == pytest.approx(printed[label], abs=entry["published_tolerance"][label]), label


def test_lengths_and_angles_of_a_published_fink_truss():
    entry = ENTRIES["FINKW-30FT-5in12"]
    truss = truss_of(entry)
    length = dict(zip(truss.topology.names, truss.length, strict=True))
    along = dict(zip(truss.topology.names, truss.direction, strict=True))

    def angle(one, other):
        return math.degrees(math.acos(float(np.dot(one, other))))

    found = {
        "L_AF": length["AG"] + length["GF"],
        "L_AG": length["AG"],
        "L_GB": length["GB"],
        "L_BF": length["BF"],
        "ang_slope": angle(along["AG"], [1.0, 0.0]),
        "ang_AGB": angle(-along["AG"], along["GB"]),
        "ang_GBA": angle(-along["GB"], -along["AB"]),
        "ang_FGB": angle(along["GF"], along["GB"]),
        "ang_GFB": angle(-along["GF"], -along["BF"]),
        "ang_GBF": angle(-along["GB"], along["BF"]),
        "ang_FBC": angle(along["BF"], along["BC"]),
    }
    assert found == pytest.approx(entry["geometry_exact"], rel=1e-8)
    assert found == pytest.approx(entry["geometry_published"], abs=0.0051)


@pytest.mark.parametrize("key", FRAMES)
def test_frames(key):
    """Closed forms hold for members that do not stretch; these stretch a billionth, so 1e-6 of the largest value."""
    entry = ENTRIES[key]
    properties = [entry["member_properties"][row[0]] for row in entry["members"]]
    pins = {row[0]: (p[3], p[4]) for row, p in zip(entry["members"], properties, strict=True)}
    truss = framed(entry["nodes"], entry["members"], entry["supports"], pins)
    number = {name: k for k, name in enumerate(truss.topology.names)}
    loads = [(number[m], 0.0, float(truss.length[number[m]]), qx, qy) for m, qx, qy in entry["loads"]["udl"]]
    nodal = {truss.topology.nodes.index(n): (f[0], f[1]) for n, f in entry["loads"]["nodes"].items()}
    middles = [(k, float(truss.length[k]) / 2) for k in range(len(number))]
    cases = load_cases(truss, [(loads, (), nodal)], extra_cuts=middles)
    ea, ei = np.array([p[0] * p[1] for p in properties]), np.array([p[0] * p[2] for p in properties])
    solution = solve(truss, ea, ei, cases)
    effects = unit_effects(truss, cases, solution)
    moments = effects.values[0, :, 0]
    largest = combined_extremes(effects, np.eye(1)).moment_max[0]

    def value(kind, name):
        what, which = kind.split()
        if what == "reaction":
            support = [s.node for s in truss.topology.supports].index(truss.topology.nodes.index(name))
            return solution.reactions[0, support, "xy".index(which)]
        if what == "move":
            return solution.displacements[0, truss.topology.nodes.index(name), "xy".index(which)]
        k, ends = number[name], solution.end_forces[0, number[name]]
        return {
            "axial start": -ends[0],
            "axial end": ends[3],
            "axial middle": (ends[3] - ends[0]) / 2,
            "moment start": -ends[2],
            "moment end": ends[5],
            "moment middle": moments[2 * k + 1],
            "moment largest": largest[k],
        }[kind]

    for label, exact in entry["exact"].items():
        found = float(value(*entry["where"][label]))
        found = abs(found) if label.endswith("_abs") else found
        scale = max(abs(v) for k, v in entry["exact"].items() if k.startswith("uy") == label.startswith("uy"))
        assert found == pytest.approx(exact, abs=1e-6 * scale), label
        if label in entry.get("published", {}):
            assert found == pytest.approx(entry["published"][label], abs=entry["published_tolerance"][label]), label
