"""The result file. A second, independent solver built from the file alone must find what the file says."""

import json
import math
from itertools import pairwise

import numpy as np
import pytest

from rooftruss.errors import OutputError
from rooftruss.output.result import result_dict, write_result
from tests.unit.output_jobs import job_and_designs

GAUSS = np.polynomial.legendre.leggauss(4)


@pytest.fixture(scope="module")
def content():
    job, designs = job_and_designs()
    return json.loads(json.dumps(result_dict(job, designs), allow_nan=False))


def test_every_key_of_the_contract_is_there(content):
    assert set(content) == {"program", "job", "scheme", "cautions", "trusses"}
    assert content["program"]["name"] == "rooftruss"
    truss = content["trusses"][0]
    keys = "mark shape quantity span pitch spacing nodes members supports cases combinations effects envelope reactions"
    assert set(keys.split()) | {"checks", "deflections", "zero_force", "pieces", "price"} <= set(truss)
    member = truss["members"][0]
    keys = "name role group start end length moment_free_start moment_free_end section grade modulus"
    assert set(keys.split()) == set(member)
    assert set(member["section"]) == {"name", "breadth", "depth", "plies", "area", "inertia"}
    assert set(truss["cases"][0]) == {"name", "action", "member_loads", "point_loads", "node_loads"}
    check = truss["checks"][0]
    keys = "member utilisation combination rule ok factors demand resistance"
    assert set(keys.split()) == set(check)
    assert check["factors"]["C_D"] == pytest.approx(1.15, abs=0.5)
    assert set(truss["zero_force"]["by_case"]) == {c["name"] for c in truss["cases"]}


def test_values_are_si(content):
    truss = content["trusses"][0]
    assert truss["span"] == pytest.approx(28 * 0.3048)
    bottom = next(m for m in truss["members"] if m["group"] == "bottom chord")
    assert bottom["section"]["inertia"] == pytest.approx(0.0381 * 0.1397**3 / 12)


def test_neighbouring_stretches_with_the_same_load_are_one(content):
    for truss in content["trusses"]:
        for case in truss["cases"]:
            loads = case["member_loads"]
            for a, b in pairwise(loads):
                same = all(a[k] == b[k] for k in ("member", "qx", "qy"))
                assert not (same and a["to"] == b["from"])
            assert all(load["qx"] or load["qy"] for load in loads)
            assert all(load["to"] > load["from"] for load in loads)


def _shapes(t, free_start, free_end):
    """Deflection of a beam of length 1 for unit [v1, r1, v2, r2] at t: cubic, each free end's rotation condensed."""
    matrix = {
        (False, False): [[1, 0, -3, 2], [0, 1, -2, 1], [0, 0, 3, -2], [0, 0, -1, 1]],
        (True, False): [[1, -1.5, 0, 0.5], [0] * 4, [0, 1.5, 0, -0.5], [0, -0.5, 0, 0.5]],
        (False, True): [[1, 0, -1.5, 0.5], [0, 1, -1.5, 0.5], [0, 0, 1.5, -0.5], [0] * 4],
        (True, True): [[1, -1, 0, 0], [0] * 4, [0, 1, 0, 0], [0] * 4],
    }[free_start, free_end]
    return np.array(matrix, float) @ np.array([1, t, t * t, t**3])


class Solver:
    """Plane frame from the text of a result file: rotations of moment-free ends are movements of their own."""

    def __init__(self, truss):
        self.truss = truss
        self.place = {n["name"]: (n["x"], n["y"]) for n in truss["nodes"]}
        self.number = {}
        for m in truss["members"]:
            for end, free in (("start", m["moment_free_start"]), ("end", m["moment_free_end"])):
                node = m[end]
                for key in ((node, "x"), (node, "y"), (m["name"], end) if free else (node, "turn")):
                    self.number.setdefault(key, len(self.number))
        size = len(self.number)
        self.stiffness = np.zeros((size, size))
        for m in truss["members"]:
            dofs, turn, length = self.frame(m)
            ea, ei = m["modulus"] * m["section"]["area"], m["modulus"] * m["section"]["inertia"]
            k = np.zeros((6, 6))
            k[np.ix_([0, 3], [0, 3])] = ea / length * np.array([[1, -1], [-1, 1]])
            b = np.array([[12, 6, -12, 6], [6, 4, -6, 2], [-12, -6, 12, -6], [6, 2, -6, 4]], float)
            scale = np.array([1, length, 1, length])
            k[np.ix_([1, 2, 4, 5], [1, 2, 4, 5])] = ei / length**3 * b * np.outer(scale, scale)
            self.stiffness[np.ix_(dofs, dofs)] += turn.T @ k @ turn
        held = {
            self.number[s["node"], d]
            for s in truss["supports"]
            for d, on in (("x", s["horizontal"]), ("y", s["vertical"]))
            if on
        }
        self.free = [k for k in range(size) if k not in held]

    def frame(self, m):
        (x0, y0), (x1, y1) = self.place[m["start"]], self.place[m["end"]]
        length = math.hypot(x1 - x0, y1 - y0)
        c, s = (x1 - x0) / length, (y1 - y0) / length
        one = np.array([[c, s, 0], [-s, c, 0], [0, 0, 1]])
        ends = []
        for end, free in (("start", m["moment_free_start"]), ("end", m["moment_free_end"])):
            ends += [(m[end], "x"), (m[end], "y"), (m["name"], end) if free else (m[end], "turn")]
        turn = np.block([[one, np.zeros((3, 3))], [np.zeros((3, 3)), one]])
        return [self.number[e] for e in ends], turn, length

    def load(self, case):
        """Work of the loads in unit movements; beams are taken as fixed at both ends."""
        out = np.zeros(len(self.number))
        members = {m["name"]: m for m in self.truss["members"]}
        for one in [*case["member_loads"], *case["point_loads"]]:
            m = members[one["member"]]
            dofs, turn, length = self.frame(m)
            if "at" in one:
                places, weights, q = [one["at"]], [1.0], (one["fx"], one["fy"])
            else:
                half = (one["to"] - one["from"]) / 2
                places, weights, q = one["from"] + half * (1 + GAUSS[0]), half * GAUSS[1], (one["qx"], one["qy"])
            along, across = turn[:2, :2] @ q
            local = np.zeros(6)
            for x, w in zip(places, weights, strict=True):
                t = x / length
                local[[0, 3]] += w * along * np.array([1 - t, t])
                local[[1, 2, 4, 5]] += w * across * _shapes(t, False, False) * [1, length, 1, length]
            out[dofs] += turn.T @ local
        for one in case["node_loads"]:
            out[self.number[one["node"], "x"]] += one["fx"]
            out[self.number[one["node"], "y"]] += one["fy"]
        return out

    def solve(self, case):
        load, moved = self.load(case), np.zeros(len(self.number))
        moved[self.free] = np.linalg.solve(self.stiffness[np.ix_(self.free, self.free)], load[self.free])
        return moved, self.stiffness @ moved - load


@pytest.mark.parametrize("number", [0, 1, 2])
def test_another_solver_finds_the_same_from_the_file_alone(content, number):
    truss = content["trusses"][number]
    solver = Solver(truss)
    for case in truss["cases"]:
        moved, reactions = solver.solve(case)
        said = truss["effects"][case["name"]]
        scale = max(max(map(abs, u)) for u in said["displacements"].values())
        for node, u in said["displacements"].items():
            mine = [moved[solver.number[node, d]] for d in "xy"]
            assert mine == pytest.approx(u, abs=1e-8 * scale)
        largest = max(max(map(abs, r)) for r in said["reactions"].values())
        for support in truss["supports"]:
            mine = [reactions[solver.number[support["node"], d]] for d in "xy"]
            held = [support["horizontal"], support["vertical"]]
            expected = [r if on else 0.0 for r, on in zip(said["reactions"][support["node"]], held, strict=True)]
            assert [m if on else 0.0 for m, on in zip(mine, held, strict=True)] == pytest.approx(
                expected, abs=1e-7 * largest
            )


@pytest.mark.parametrize("number", [0, 1, 2])
def test_member_effects_follow_from_the_loads_by_statics(content, number):
    """From the start of each member: N, V, M there and the loads on the way give N, V, M at the end."""
    truss = content["trusses"][number]
    solver = Solver(truss)
    for case in truss["cases"]:
        said = truss["effects"][case["name"]]["members"]
        scale = max(abs(v) for e in said.values() for pair in e.values() for v in pair)
        for m in truss["members"]:
            _, turn, length = solver.frame(m)
            e = said[m["name"]]
            axial, shear, moment = (e[k][0] for k in ("axial", "shear", "moment"))
            moment += shear * length
            for one in [*case["member_loads"], *case["point_loads"]]:
                if one["member"] != m["name"]:
                    continue
                if "at" in one:
                    total, arm = np.array([one["fx"], one["fy"]]), length - one["at"]
                else:
                    total = np.array([one["qx"], one["qy"]]) * (one["to"] - one["from"])
                    arm = length - (one["to"] + one["from"]) / 2
                along, across = turn[:2, :2] @ total
                axial, shear, moment = axial - along, shear + across, moment + across * arm
            assert [axial, shear, moment] == pytest.approx(
                [e["axial"][1], e["shear"][1], e["moment"][1]], abs=1e-8 * scale
            )
            if m["moment_free_end"]:
                assert e["moment"][1] == pytest.approx(0.0, abs=1e-8 * scale)


def test_reactions_and_envelope_follow_from_effects_and_combinations(content):
    for truss in content["trusses"]:
        strength = [c for c in truss["combinations"] if c["limit_state"] == "strength"]
        for row in truss["reactions"]:
            up = {
                c["name"]: sum(f * truss["effects"][n]["reactions"][row["node"]][1] for n, f in c["factors"].items())
                for c in strength
            }
            assert row["down"] == pytest.approx(max(0.0, *up.values()))
            assert up[row["down_combination"]] == pytest.approx(row["down"])
            assert row["uplift"] == pytest.approx(max(0.0, *(-v for v in up.values())), abs=1e-6)
        for row in truss["envelope"]:
            for c in strength:
                ends = [
                    sum(f * truss["effects"][n]["members"][row["member"]]["axial"][k] for n, f in c["factors"].items())
                    for k in (0, 1)
                ]
                # the axial force is largest at an end wherever all loads along the member point the same way
                assert row["tension"] >= max(ends) - 1e-6
                assert row["compression"] >= -min(ends) - 1e-6


def test_checks_agree_with_the_design(content):
    _, designs = job_and_designs()
    for truss, design in zip(content["trusses"], designs, strict=True):
        found = [c["utilisation"] for c in truss["checks"]]
        assert found == pytest.approx(list(design.outcome.utilisation.value))
        assert [c["ok"] for c in truss["checks"]] == [u <= 1.0 + 1e-9 for u in found]
        assert truss["passes"] == design.passes


def test_file_and_stdout_hold_the_same(tmp_path, capsys):
    job, designs = job_and_designs()
    write_result(job, designs[:1], tmp_path / "result.json")
    write_result(job, designs[:1], "-")
    text = (tmp_path / "result.json").read_text("utf-8")
    assert text == capsys.readouterr().out
    assert json.loads(text)["job"]["title"] == "=1+1 & more"


def test_a_missing_folder_is_named(tmp_path):
    job, designs = job_and_designs()
    with pytest.raises(OutputError, match=r"there is no folder .*nowhere; make it first"):
        write_result(job, designs[:1], tmp_path / "nowhere" / "result.json")
