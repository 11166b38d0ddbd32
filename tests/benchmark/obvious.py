"""The obvious program: each combination of each truss is assembled, solved and checked on its own, in plain loops.

It starts from what the package has made of the job (coordinates, load cases, factors, sizes and lengths), and uses its
formula functions for one number at a time. Nothing is shared between combinations, as in a program that follows a hand
calculation. The benchmark times it, and a test holds that it finds the same utilisations.
"""

from dataclasses import dataclass
from math import inf

import numpy as np

from rooftruss.design.stages import Run, durations_of
from rooftruss.timber import nds_formulas as nds
from rooftruss.timber.nds import Nds
from rooftruss.timber.nds_tables import effective_bending_length, limit

Rows = list[list[float]]
NOTHING = 1e-6  # [N, N m] less is round-off


@dataclass
class Forces:
    """Extremes of one member under one combination."""

    tension: float = 0.0
    compression: float = 0.0
    tension_least: float = inf
    positive: float = 0.0
    negative: float = 0.0
    shear: float = 0.0

    def see(self, axial: float, shear: float, moment: float) -> None:
        """Take in the forces of one section."""
        self.tension, self.compression = max(self.tension, axial), max(self.compression, -axial)
        self.tension_least = max(min(self.tension_least, axial), 0.0)
        self.positive, self.negative = max(self.positive, moment), max(self.negative, -moment)
        self.shear = max(self.shear, abs(shear))


def utilisations(run: Run) -> list[list[float]]:
    """Utilisation of every member under every strength combination of an unbatched run by the NDS."""
    code = run.family.timber
    assert isinstance(code, Nds)
    durations = [float(factor) for factor in code.duration_factors(durations_of(run.combinations))]
    out = []
    for row, number in enumerate(run.strength):
        factors = [float(f) for f in run.combinations.factors[number]]
        forces = analyse(run, factors)
        out.append([check(run, k, forces[k], durations[row]) for k in range(len(forces))])
    return out


def analyse(run: Run, factors: list[float]) -> list[Forces]:
    """Forces in every member under one combination, from a stiffness matrix of its own."""
    members, nodes = run.truss.topology.members, run.truss.topology.nodes
    matrix, load = np.zeros((3 * len(nodes), 3 * len(nodes))), np.zeros(3 * len(nodes))
    own = [_element(run, k, factors) for k in range(len(members))]
    for k, member in enumerate(members):
        stiffness, force, _ = own[k]
        at = [3 * node + d for node in (member.start, member.end) for d in range(3)]
        turned = _turned(run, k, stiffness)
        for i in range(6):
            load[at[i]] += _back(run, k, force)[i]
            for j in range(6):
                matrix[at[i], at[j]] += turned[i][j]
    for c, factor in enumerate(factors):
        for node in range(len(nodes)):
            for d in range(2):
                load[3 * node + d] += factor * float(run.cases.nodal[c, node, d])
    held = [3 * s.node + d for s in run.truss.topology.supports for d, on in ((0, s.horizontal), (1, s.vertical)) if on]
    held += [k for k in range(2, len(load), 3) if abs(matrix[k, k]) < 1e-6]  # nothing turns there
    free = [k for k in range(len(load)) if k not in held]
    moved = np.zeros(len(load))
    moved[free] = np.linalg.solve(matrix[np.ix_(free, free)], load[free])
    return [_along(run, k, own[k], moved) for k in range(len(members))]


def _element(run: Run, k: int, factors: list[float]) -> tuple[Rows, list[float], Rows]:
    """Stiffness and load of a member in its own axes, and its loads [from, to, along, across, point along, across]."""
    ea, ei, span = float(run.stiffness_axial[k]), float(run.stiffness_bending[k]), float(run.truss.length[k])
    a, b, c, d = 12 * ei / span**3, 6 * ei / span**2, 4 * ei / span, 2 * ei / span
    e = ea / span
    stiffness = [
        [e, 0.0, 0.0, -e, 0.0, 0.0],
        [0.0, a, b, 0.0, -a, b],
        [0.0, b, c, 0.0, -b, d],
        [-e, 0.0, 0.0, e, 0.0, 0.0],
        [0.0, -a, -b, 0.0, a, -b],
        [0.0, b, d, 0.0, -b, c],
    ]
    pieces = _pieces(run, k, factors)
    force = [0.0] * 6
    for low, high, along, across, pushed, pressed in pieces:
        for i, share in enumerate(_shares(low, high, span)):
            force[i] += share * (along if i in (0, 3) else across)
        for i, share in enumerate(_shares_at(low, span)):
            force[i] += share * (pushed if i in (0, 3) else pressed)
    member = run.truss.topology.members[k]
    for end, pinned in ((2, member.pinned_start), (5, member.pinned_end)):
        if pinned:
            _release(stiffness, force, end)
    return stiffness, force, pieces


def _pieces(run: Run, k: int, factors: list[float]) -> Rows:
    """Loads on the pieces of a member; a point load stands at the start of its piece."""
    cos, sin = (float(x) for x in run.truss.direction[k])
    out = []
    for s, member in enumerate(run.cases.member_of):
        if member != k:
            continue
        low, high = float(run.cases.x0[s]), float(run.cases.x1[s])
        across_x = across_y = 0.0
        for c, factor in enumerate(factors):
            if factor:
                across_x += factor * float(run.cases.q[c, s, 0])
                across_y += factor * float(run.cases.q[c, s, 1])
        out.append([low, high, across_x * cos + across_y * sin, across_y * cos - across_x * sin, 0.0, 0.0])
    for point in run.cases.points:
        if point.member == k and factors[point.case]:
            fx, fy = factors[point.case] * float(point.fx), factors[point.case] * float(point.fy)
            piece = min(out, key=lambda p: abs(p[0] - float(point.at)))
            piece[4] += fx * cos + fy * sin
            piece[5] += fy * cos - fx * sin
    return out


def _shares_at(x: float, span: float) -> list[float]:
    """Forces on the fixed ends of a beam from a unit load at x."""
    t = x / span
    bending = [1 - 3 * t**2 + 2 * t**3, span * (t - 2 * t**2 + t**3), 3 * t**2 - 2 * t**3, span * (t**3 - t**2)]
    return [1 - t, bending[0], bending[1], t, bending[2], bending[3]]


def _shares(low: float, high: float, span: float) -> list[float]:
    """The same from a unit load per length over low..high: Gauss' rule of two points is exact for cubics."""
    middle, half = (low + high) / 2, (high - low) / 2
    pairs = zip(*(_shares_at(middle + sign * half / 3**0.5, span) for sign in (-1, 1)), strict=True)
    return [half * (one + other) for one, other in pairs]


def _release(stiffness: Rows, force: list[float], end: int) -> None:
    """Take the moment off one end."""
    row, pivot, moment = list(stiffness[end]), stiffness[end][end], force[end]
    column = [stiffness[i][end] for i in range(6)]
    for i in range(6):
        force[i] -= column[i] * moment / pivot
        for j in range(6):
            stiffness[i][j] -= column[i] * row[j] / pivot


def _turn(run: Run, k: int) -> Rows:
    cos, sin = (float(x) for x in run.truss.direction[k])
    turn = [[0.0] * 6 for _ in range(6)]
    for first in (0, 3):
        turn[first][first], turn[first][first + 1] = cos, sin
        turn[first + 1][first], turn[first + 1][first + 1] = -sin, cos
        turn[first + 2][first + 2] = 1.0
    return turn


def _turned(run: Run, k: int, stiffness: Rows) -> Rows:
    turn = _turn(run, k)
    half = [[sum(stiffness[i][m] * turn[m][j] for m in range(6)) for j in range(6)] for i in range(6)]
    return [[sum(turn[m][i] * half[m][j] for m in range(6)) for j in range(6)] for i in range(6)]


def _back(run: Run, k: int, force: list[float]) -> list[float]:
    turn = _turn(run, k)
    return [sum(turn[m][i] * force[m] for m in range(6)) for i in range(6)]


def _along(run: Run, k: int, own: tuple[Rows, list[float], Rows], moved: np.ndarray) -> Forces:
    """Walk along a member from its start, piece by piece."""
    stiffness, force, pieces = own
    member, turn = run.truss.topology.members[k], _turn(run, k)
    there = [float(moved[3 * node + d]) for node in (member.start, member.end) for d in range(3)]
    local = [sum(turn[i][j] * there[j] for j in range(6)) for i in range(6)]
    end = [sum(stiffness[i][j] * local[j] for j in range(6)) - force[i] for i in range(3)]
    axial, shear, moment, out = -end[0], end[1], -end[2], Forces()
    for low, high, along, across, pushed, pressed in pieces:
        axial, shear = axial - pushed, shear + pressed
        out.see(axial, shear, moment)
        length = high - low
        if across and 0 < -shear / across < length:  # the moment turns where the shear is zero
            out.see(axial, 0.0, moment - shear**2 / across / 2)
        axial, shear, moment = (
            axial - along * length,
            shear + across * length,
            moment + shear * length + across * length**2 / 2,
        )
        out.see(axial, shear, moment)
    return out


def check(run: Run, k: int, f: Forces, duration: float) -> float:
    """Worst utilisation of one member by NDS chapter 3 under one combination."""
    code, m = run.family.timber, run.members
    assert isinstance(code, Nds)
    breadth, depth, plies = float(m.breadth[k]), float(m.depth[k]), float(m.plies[k])
    p = {name: float(values[k]) for name, values in m.properties.items()}
    area, modulus = breadth * plies * depth, breadth * plies * depth**2 / 6
    tension, compression = (x if x > NOTHING else 0.0 for x in (f.tension, f.compression))
    positive, negative = (x if x > NOTHING else 0.0 for x in (f.positive, f.negative))
    f_t, f_c, f_t_least = tension / area, compression / area, f.tension_least / area
    F_b_star = p["Fb"] * duration * (p["C_r"] if bool(m.load_sharing[k]) else 1.0)
    strong, weak = float(m.le_strong[k]) / depth, float(m.le_weak[k]) / breadth
    F_c_star, F_t, F_cE1 = p["Fc"] * duration, p["Ft"] * duration, float(nds.euler_column_stress(p["Emin"], strong))
    F_cE = float(nds.euler_column_stress(p["Emin"], max(strong, weak)))
    F_c = F_c_star * float(nds.column_stability_factor(F_c_star, F_cE, c=p["column_c"]))
    F_cE2 = float(nds.euler_column_stress(p["Emin"], weak))
    found = [
        f_t / F_t,
        f_c / F_c,
        float(nds.shear_stress(f.shear, area)) / (p["Fv"] * duration),
        float(nds.tension_and_bending(f_t, F_t, max(positive, negative) / modulus, F_b_star)),
    ]
    if compression:
        found.append(max(strong, weak) / limit("column slenderness", edition=code.edition))
    for moment, held in ((positive, m.lu_positive[k]), (negative, m.lu_negative[k])):
        f_b, R_B = moment / modulus, _slenderness(float(held), depth, breadth, code.edition)
        F_bE = float(nds.euler_bending_stress(p["Emin"], R_B))
        F_b = F_b_star * float(nds.beam_stability_factor(F_b_star, F_bE))
        found.append(float(nds.bending_less_tension(f_b, f_t_least, F_b)))
        if moment:
            found.append(R_B / limit("bending slenderness", edition=code.edition))
        if moment and compression:
            found.append(float(nds.compression_and_bending(f_c, F_c, F_cE1, f_b, F_b)))
            found.append(float(nds.compression_and_bending_stability(f_c, F_cE2, f_b, F_bE)))
    return max(found)


def _slenderness(l_u: float, depth: float, breadth: float, edition: str) -> float:
    if l_u == 0 or depth <= breadth:
        return 0.0
    l_e = effective_bending_length(l_u, depth, loading="unlisted", edition=edition)
    return float(nds.bending_slenderness(l_e, depth, breadth))
