"""Continuous beams: structures/beams.json, each with its source, solved as a chord on unyielding joints."""

import json
from pathlib import Path

import numpy as np
import pytest

from rooftruss.analysis.effects import combined_extremes, unit_effects
from rooftruss.analysis.frame import solve
from tests.support import framed, load_cases, split

PATH = Path(__file__).parent / "structures" / "beams.json"
BEAMS = {entry["id"]: entry for entry in json.loads(PATH.read_text(encoding="utf-8"))}


def beam_of(entry):
    beam = framed(entry["nodes"], entry["members"], entry["supports"], pins=False)
    number = {name: k for k, name in enumerate(beam.topology.names)}
    loads = [(number[m], 0.0, float(beam.length[number[m]]), qx, qy) for m, qx, qy in entry["loads"]["udl"]]
    points = [(number[m], at, fx, fy) for m, fx, fy, at in entry["loads"]["points"]]
    return beam, loads, points


def place_of_largest(effects, cases, member):
    """Distance from the start of a member to its largest moment: where the shear of a segment changes sign."""
    m0, m1, w = effects.values[:3, :, 0]
    best = (-np.inf, 0.0)
    for s in (s for s, k in enumerate(cases.member_of) if k == member):
        run = float(effects.run[s])
        shear = (m1[s] - m0[s]) / run - w[s] * run / 2
        inner = -shear / w[s] if w[s] else 0.0
        for x in (0.0, run, *([inner] if 0 < inner < run else [])):
            best = max(best, (float(m0[s] + shear * x + w[s] * x**2 / 2), float(cases.x0[s] + x)))
    return best[1]


def found_values(entry):
    """All quantities of an entry by its labels."""
    beam, loads, points = beam_of(entry)
    cases = load_cases(beam, [(loads, points, {})])
    ones = np.ones(len(beam.length))
    solution = solve(beam, ones, ones, cases)
    effects = unit_effects(beam, cases, solution)
    ends, largest = solution.end_forces[0], combined_extremes(effects, np.eye(1)).moment_max[0]
    found = {f"R_{k}": reaction[1] for k, reaction in enumerate(solution.reactions[0])}
    for k, name in enumerate(beam.topology.names):
        found[f"M_{k + 1}"] = ends[k, 5]
        found[f"V_left_{name}"], found[f"V_right_{name}"] = ends[k, 1], -ends[k, 4]
        found[f"Mmax_{name}"], found[f"x_Mmax_{name}"] = largest[k], place_of_largest(effects, cases, k)
    return found


@pytest.mark.parametrize("key", BEAMS)
def test_continuous_beam_is_exact(key):
    entry, found = BEAMS[key], found_values(BEAMS[key])
    largest = max(abs(v) for label, v in entry["exact"].items() if not label.endswith("defl_max"))
    labels = [label for label in entry["exact"] if "defl" not in label]
    assert len(labels) > 6
    for label in labels:
        assert found[label] == pytest.approx(entry["exact"][label], abs=1e-9 * largest), label


@pytest.mark.parametrize("key", [key for key, entry in BEAMS.items() if "published" in entry])
def test_continuous_beam_is_as_published(key):
    entry, found = BEAMS[key], found_values(BEAMS[key])
    errors = entry.get("published_errors", {})
    for label, printed in entry["published"].items():
        if label in errors:
            assert abs(found[label] - printed) > 0.005 * abs(printed), f"{label}: listed as a printed error, but agrees"
        elif "defl" not in label:
            assert found[label] == pytest.approx(printed, abs=entry["published_tolerance"][label]), label


@pytest.mark.parametrize("key", [key for key, entry in BEAMS.items() if "defl_max" in entry["exact"]])
def test_largest_deflection_of_a_continuous_beam(key):
    """Deflection times EI at the place given, larger than beside it; places are exact to five figures."""
    entry = BEAMS[key]
    beam, loads, points = beam_of(entry)
    assert not points
    span = int(entry["exact"]["span_defl_max"]) - 1

    def sag(x):
        cut = split(beam, span, x)
        parts = []
        for member, _, high, qx, qy in loads:
            parts += (
                [(member, 0.0, x, qx, qy), (len(beam.length), 0.0, high - x, qx, qy)]
                if member == span
                else [(member, 0.0, high, qx, qy)]
            )
        ones = np.ones(len(cut.length))
        cut_loads = [(m, a, float(cut.length[m]), qx, qy) for m, a, _, qx, qy in parts]
        return -solve(cut, ones, ones, load_cases(cut, [(cut_loads, (), {})])).displacements[0, -1, 1]

    x, largest = entry["exact"]["x_defl_max"], entry["exact"]["defl_max"]
    assert sag(x) == pytest.approx(largest, rel=1e-8)
    assert max(sag(x - 0.01), sag(x + 0.01)) < largest
    printed, tolerance = entry.get("published", {}), entry.get("published_tolerance", {})
    assert sag(x) == pytest.approx(printed["defl_max"], abs=tolerance["defl_max"])
    if "x_defl_max" in printed:
        assert x == pytest.approx(printed["x_defl_max"], abs=tolerance["x_defl_max"])
