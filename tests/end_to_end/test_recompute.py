"""The result file holds what another program needs: computed again from it alone, all its results come out."""

import copy
import json
from pathlib import Path

import numpy as np
import pytest

from rooftruss.cli import main
from tests.end_to_end.recompute import Effects, factors, recompute

JOBS = sorted((Path(__file__).parents[2] / "demo_jobs").glob("*.toml"))
NEAR = 1e-3  # asked for; sampling alone leaves an error of this order at most
TINY = 1e-9  # a force below this share of the largest is none
CREEP = 1.5  # NDS 2018 3.5.2: K_cr of seasoned lumber in dry service, on dead load in "total" rows
K_DEF = {"Q-0006": 0.6}  # EN 1995-1-1, Table 3.2: a workshop in service class 1; the others are in class 2, 0.8
PSI_2 = {"L": 0.3}  # EN 1990, Table A1.1: loft of category A; other loads of the demo jobs do not last, but for ...
LONG_SNOW = {"en1990-finland": 0.2}  # ... the snow of Finland


@pytest.fixture(scope="module", params=JOBS, ids=lambda path: path.stem)
def result(request, tmp_path_factory):
    """Result file of a demo job."""
    path = tmp_path_factory.mktemp("result") / "result.json"
    assert main(["envelope", str(request.param), "--json", str(path)]) == 0
    return json.loads(path.read_text("utf-8"))


@pytest.fixture(scope="module")
def computed(result) -> list[tuple[dict, Effects]]:
    """Every truss of the file with its effects, computed again."""
    return [(truss, recompute(truss)) for truss in result["trusses"]]


def close(one, other, scale) -> bool:
    return bool(np.all(np.abs(np.asarray(one) - np.asarray(other)) <= NEAR * np.abs(other) + TINY * scale))


def scales(effects: Effects) -> dict[str, float]:
    """Largest size of each effect in any case."""
    parts = {"axial": effects.axial, "shear": effects.shear, "moment": effects.moment}
    return {name: max(float(np.abs(v).max()) for v in part.values()) for name, part in parts.items()}


def strength(truss: dict) -> list[dict]:
    return [c for c in truss["combinations"] if c["limit_state"] == "strength"]


def wrong_effects(truss: dict, effects: Effects) -> list[tuple[str, str, str]]:
    """(case, member, effect) that differ from the file."""
    largest, out = scales(effects), []
    for c, case in enumerate(truss["cases"]):
        for member, told in truss["effects"][case["name"]]["members"].items():
            for name in ("axial", "shear", "moment"):
                found = getattr(effects, name)[member][c, [0, -1]]
                if not close(told[name], found, largest[name]):
                    out.append((case["name"], member, name))
    return out


def test_every_effect_of_every_case(computed):
    for truss, effects in computed:
        assert wrong_effects(truss, effects) == []


def test_every_reaction_and_movement_of_every_case(computed):
    for truss, effects in computed:
        force = max(float(np.abs(v).max()) for v in effects.reactions.values())
        movement = max(float(np.abs(v).max()) for v in effects.moved.values())
        for c, case in enumerate(truss["cases"]):
            told = truss["effects"][case["name"]]
            assert all(close(told["reactions"][n], r[c], force) for n, r in effects.reactions.items()), case["name"]
            assert all(close(told["displacements"][n], u[c], movement) for n, u in effects.moved.items()), case["name"]


def test_loads_and_reactions_of_every_case_balance(result):
    """Sums of forces and of moments about the origin, from the file as it is."""
    for truss in result["trusses"]:
        place = {n["name"]: np.array([n["x"], n["y"]]) for n in truss["nodes"]}
        line = {m["name"]: (place[m["start"]], place[m["end"]], m["length"]) for m in truss["members"]}
        for case in truss["cases"]:
            forces = [(place[n], r) for n, r in truss["effects"][case["name"]]["reactions"].items()]
            forces += [(place[n["node"]], (n["fx"], n["fy"])) for n in case["node_loads"]]
            for load in case["member_loads"]:
                start, end, length = line[load["member"]]
                run, at = load["to"] - load["from"], (load["to"] + load["from"]) / 2
                forces.append((start + (end - start) * at / length, (load["qx"] * run, load["qy"] * run)))
            for load in case["point_loads"]:
                start, end, length = line[load["member"]]
                forces.append((start + (end - start) * load["at"] / length, (load["fx"], load["fy"])))
            size = sum(abs(fx) + abs(fy) for _, (fx, fy) in forces)
            across = sum(fx for _, (fx, _) in forces), sum(fy for _, (_, fy) in forces)
            about = sum(p[0] * fy - p[1] * fx for p, (fx, fy) in forces)
            assert size > 0, case["name"]
            assert np.abs([*across, about / truss["span"]]).max() < 1e-9 * size, case["name"]


def extremes(truss: dict, effects: Effects, member: str) -> dict[str, np.ndarray]:
    """Signed largest effects of a member under every strength combination (combination,)."""
    rows = factors(truss, strength(truss))
    axial, shear, moment = (rows @ part[member] for part in (effects.axial, effects.shear, effects.moment))
    return {
        "tension": np.maximum(axial.max(axis=1), 0.0),
        "compression": np.maximum(-axial.min(axis=1), 0.0),
        "moment_positive": np.maximum(moment.max(axis=1), 0.0),
        "moment_negative": np.maximum(-moment.min(axis=1), 0.0),
        "shear": np.abs(shear).max(axis=1),
    }


def agrees(told: float, name: str | None, values: np.ndarray, names: list[str], scale: float) -> bool:
    """Whether a governing value is the largest of `values` and the combination named beside it gives that value."""
    if name is None:
        return told == 0 and bool(np.all(values <= TINY * scale))
    return close(told, values.max(), scale) and close(told, values[names.index(name)], scale)


def test_the_envelope_of_every_member_and_the_combinations_it_names(computed):
    for truss, effects in computed:
        names, largest = [c["name"] for c in strength(truss)], scales(effects)
        for row in truss["envelope"]:
            found = extremes(truss, effects, row["member"])
            sign = "moment_positive" if row["moment"] >= 0 else "moment_negative"
            either = np.maximum(found["moment_positive"], found["moment_negative"])
            for name, scale, values in (
                ("tension", largest["axial"], found["tension"]),
                ("compression", largest["axial"], found["compression"]),
                ("shear", largest["shear"], found["shear"]),
                ("moment", largest["moment"], found[sign]),
            ):
                under = row[f"{name}_combination"]
                assert agrees(abs(row[name]), under, values, names, scale), (truss["mark"], row["member"], name)
            assert close(abs(row["moment"]), either.max(), largest["moment"]), row["member"]


def test_the_demand_of_every_check(computed):
    for truss, effects in computed:
        names, largest = [c["name"] for c in strength(truss)], scales(effects)
        checked = 0
        for row in truss["checks"]:
            if row["combination"] is None:
                continue
            found = extremes(truss, effects, row["member"])
            for name, told in row["demand"].items():
                scale = largest.get(name.split("_")[0], largest["axial"])
                assert close(told, found[name][names.index(row["combination"])], scale), (row["member"], name)
            checked += 1
        assert checked >= len(truss["members"]) - 2  # tails may carry nothing


def test_the_governing_reactions_and_the_combinations_they_name(computed):
    for truss, effects in computed:
        names, rows = [c["name"] for c in strength(truss)], factors(truss, strength(truss))
        scale = max(float(np.abs(v).max()) for v in effects.reactions.values())
        for row in truss["reactions"]:
            sideways, up = (rows @ effects.reactions[row["node"]]).T
            assert agrees(row["down"], row["down_combination"], np.maximum(up, 0), names, scale)
            assert agrees(row["uplift"], row["uplift_combination"], np.maximum(-up, 0), names, scale)
            turned = sideways * (1 if row["horizontal"] >= 0 else -1)
            values = np.maximum(turned, 0)
            assert agrees(abs(row["horizontal"]), row["horizontal_combination"], values, names, scale)
            assert close(abs(row["horizontal"]), np.abs(sideways).max(), scale)


def sagged(truss: dict, effects: Effects, member: str) -> np.ndarray:
    """Movement of a member's middle (case, 2): the mean of its ends, and its bending across.

    Left out, as in the program, is what load along a sloping member stretches between its end and its middle.
    """
    own = next(m for m in truss["members"] if m["name"] == member)
    ends = [next(n for n in truss["nodes"] if n["name"] == own[end]) for end in ("start", "end")]
    across = np.array([ends[0]["y"] - ends[1]["y"], ends[1]["x"] - ends[0]["x"]]) / own["length"]
    mean = (effects.moved[own["start"]] + effects.moved[own["end"]]) / 2
    out = mean + np.outer((effects.middle[member] - mean) @ across, across)
    assert np.abs(out - effects.middle[member]).max() < 0.01 * np.abs(effects.middle[member]).max()
    return out


def test_every_deflection_and_the_combination_it_names(result, computed):
    """No combination gives more of the same kind of deflection; what lasts has grown by creep."""
    for truss, effects in computed:
        scale = max(float(np.abs(v).max()) for v in effects.moved.values())
        assert len(truss["deflections"]) > len(truss["nodes"])
        for row in (*truss["deflections"], *truss["deflections_without_limit"]):
            direction = row.get("direction", "vertical")
            unit = effects.moved[row["node"]] if "node" in row else sagged(truss, effects, row["member"])
            names, rows = grown(result, truss, row["kind"])
            values = (rows @ unit)[:, 0 if direction == "horizontal" else 1]
            own = names.index(row["combination"])
            assert close(row[direction], values[own], scale), row
            assert np.abs(values).max() <= abs(values[own]) * (1 + NEAR) + TINY * scale, row
            told = [row["factors"].get(case["name"], 0.0) for case in truss["cases"]]
            assert told == pytest.approx(rows[own]), row
            if "limit" in row:
                assert row["ok"] == (abs(row[direction]) <= row["limit"] * (1 + 1e-9))


def grown(result: dict, truss: dict, kind: str) -> tuple[list[str], np.ndarray]:
    """Names and factors (k, case) of all that make a kind of deflection: NDS eq. 3.5-1; EN 1995-1-1, 2.2.3."""
    under = {"instantaneous": "characteristic", "variable": "characteristic", "final": "characteristic"}.get(kind, kind)
    service = [c for c in truss["combinations"] if c["limit_state"] == "service" and c["kind"] == under]
    rows, actions = factors(truss, service), [case["action"] for case in truss["cases"]]
    dead = np.array([action == "D" for action in actions])
    k_def = K_DEF.get(result["job"]["number"], 0.8) if "en1990" in result["scheme"] else 0.0
    psi_2 = PSI_2 | {"S": LONG_SNOW.get(result["scheme"], 0.0)}
    lasting = np.where(dead, 1.0, [psi_2.get(action, 0.0) for action in actions])
    made = {
        "total": rows * np.where(dead, CREEP, 1.0),
        "variable": np.where(dead, 0.0, rows),
        "final": rows + k_def * lasting * (rows > 0),
        "quasi-permanent": rows * (1 + k_def),
    }
    return [c["name"] for c in service], made.get(kind, rows)


def test_a_wrong_number_in_the_file_would_be_noticed(result):
    """One load of one case, one modulus, one moment-free end: each changed by itself."""
    for change in (_heavier, _softer, _stiff_peak):
        truss = copy.deepcopy(result["trusses"][0])
        change(truss)
        assert wrong_effects(truss, recompute(truss)), change.__name__


def _heavier(truss: dict) -> None:
    truss["cases"][0]["member_loads"][0]["qy"] *= 1.01


def _softer(truss: dict) -> None:
    truss["members"][0]["modulus"] *= 0.9


def _stiff_peak(truss: dict) -> None:
    peak = max(truss["nodes"], key=lambda n: n["y"])["name"]
    for member in truss["members"]:
        if member["role"] == "top chord":
            member["moment_free_start"] &= member["start"] != peak
            member["moment_free_end"] &= member["end"] != peak


def beam(loads: list, points: list) -> dict:
    """A beam 4 m long on two supports, EI = 1e6 N m2."""
    section = {"area": 0.01, "inertia": 1e-4}
    member = {"name": "b", "start": "A", "end": "B", "section": section, "modulus": 1e10}
    ends = {"moment_free_start": True, "moment_free_end": True}
    return {
        "nodes": [{"name": "A", "x": 0.0, "y": 0.0}, {"name": "B", "x": 4.0, "y": 0.0}],
        "members": [member | ends],
        "supports": [
            {"node": "A", "horizontal": True, "vertical": True},
            {"node": "B", "horizontal": False, "vertical": True},
        ],
        "cases": [{"name": "c", "member_loads": loads, "point_loads": points, "node_loads": []}],
    }


def test_the_solver_of_these_tests_by_formulas_of_beams():
    """Uniform load: w L^2/8 and 5 w L^4/(384 EI); point load P at a: P a b/L, R = P b/L (any table of beams)."""
    w, span, stiffness = 1000.0, 4.0, 1e6
    uniform = recompute(beam([{"member": "b", "from": 0.0, "to": 4.0, "qx": 0.0, "qy": -w}], []))
    assert uniform.moment["b"].max() == pytest.approx(w * span**2 / 8)
    assert uniform.middle["b"][0, 1] == pytest.approx(-5 * w * span**4 / (384 * stiffness))
    point = recompute(beam([], [{"member": "b", "at": 1.0, "fx": 0.0, "fy": -w}]))
    assert point.moment["b"].max() == pytest.approx(w * 1.0 * 3.0 / span)
    assert point.reactions["A"][0] == pytest.approx([0.0, w * 3.0 / span])
    half = recompute(beam([{"member": "b", "from": 0.0, "to": 2.0, "qx": 0.0, "qy": -w}], []))
    assert half.moment["b"].max() == pytest.approx(9 * w * span**2 / 128, rel=1e-3)  # at 3/8 of the span
