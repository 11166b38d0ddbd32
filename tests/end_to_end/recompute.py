"""Computes a truss of a result file again: from nodes, members, supports, cases and combinations, and nothing else.

A plane frame of plain beam elements with six freedoms. A moment-free end is a rotation of its own, not a condensed
element; a member is cut wherever a load begins or ends and at its middle, so that every element is loaded over its
whole length or not at all; extremes are found by sampling. Nothing of the package is used.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import hypot
from typing import Any

import numpy as np

Record = Mapping[str, Any]
SAMPLES = np.linspace(0.0, 1.0, 65)
CLOSE = 1e-7  # [m] cuts nearer than this are one


@dataclass(frozen=True)
class Element:
    """A piece of a member: its freedoms (6,), start along the member, length, direction, stiffness in its own axes."""

    member: str
    freedoms: list[int]
    begin: float
    length: float
    cos: float
    sin: float
    stiffness: np.ndarray

    @property
    def turn(self) -> np.ndarray:
        """From global to own axes (6, 6)."""
        one = np.array([[self.cos, self.sin, 0], [-self.sin, self.cos, 0], [0, 0, 1]])
        return np.block([[one, np.zeros((3, 3))], [np.zeros((3, 3)), one]])


@dataclass(frozen=True)
class Frame:
    elements: list[Element]
    count: int  # of freedoms
    at_node: dict[str, tuple[int, int]]
    at_middle: dict[str, tuple[int, int]]  # freedoms in the middle of each member
    held: list[int]


@dataclass(frozen=True)
class Effects:
    """Results of every case: along each member (case, sample), at supports and nodes (case, 2)."""

    axial: dict[str, np.ndarray]
    shear: dict[str, np.ndarray]
    moment: dict[str, np.ndarray]
    reactions: dict[str, np.ndarray]
    moved: dict[str, np.ndarray]
    middle: dict[str, np.ndarray]


def recompute(truss: Record) -> Effects:
    """Effects of every case of one truss of a result file, sampled from start to end of each member."""
    frame = _frame(truss)
    loads = [_element_loads(frame, case) for case in truss["cases"]]
    force = np.stack([_force(frame, case, on) for case, on in zip(truss["cases"], loads, strict=True)], axis=1)
    matrix = np.zeros((frame.count, frame.count))
    for e in frame.elements:
        matrix[np.ix_(e.freedoms, e.freedoms)] += e.turn.T @ e.stiffness @ e.turn
    free = [k for k in range(frame.count) if k not in frame.held]
    moved = np.zeros((frame.count, len(loads)))
    moved[free] = np.linalg.solve(matrix[np.ix_(free, free)], force[free])
    pushed = matrix @ moved - force  # zero but at the supports
    along = {m["name"]: _along(frame, m["name"], moved, loads) for m in truss["members"]}
    return Effects(
        axial={name: a for name, (a, _, _) in along.items()},
        shear={name: s for name, (_, s, _) in along.items()},
        moment={name: m for name, (_, _, m) in along.items()},
        reactions={s["node"]: pushed[list(frame.at_node[s["node"]])].T for s in truss["supports"]},
        moved={name: moved[list(at)].T for name, at in frame.at_node.items()},
        middle={name: moved[list(at)].T for name, at in frame.at_middle.items()},
    )


def factors(truss: Record, combinations: Sequence[Record]) -> np.ndarray:
    """Factor matrix (combination, case)."""
    names = [case["name"] for case in truss["cases"]]
    return np.array([[c["factors"].get(name, 0.0) for name in names] for c in combinations])


def _frame(truss: Record) -> Frame:
    place = {n["name"]: (n["x"], n["y"]) for n in truss["nodes"]}
    count = 0

    def new(number: int) -> list[int]:
        nonlocal count
        count += number
        return list(range(count - number, count))

    at_node = {name: new(2) for name in place}
    stiff = {m[end] for m in truss["members"] for end in ("start", "end") if not m[f"moment_free_{end}"]}
    turning = {name: new(1) for name in place if name in stiff}
    elements: list[Element] = []
    at_middle = {}
    for member in truss["members"]:
        (x0, y0), (x1, y1) = place[member["start"]], place[member["end"]]
        length = hypot(x1 - x0, y1 - y0)
        cuts = _cuts(truss, member["name"], length)
        first, last = (
            at_node[member[end]] + (new(1) if member[f"moment_free_{end}"] else turning[member[end]])
            for end in ("start", "end")
        )
        stops = [first, *(new(3) for _ in cuts[1:-1]), last]
        at_middle[member["name"]] = tuple(stops[int(np.argmin(np.abs(np.array(cuts) - length / 2)))][:2])
        for (a, b), (s, e) in zip(pairwise(cuts), pairwise(stops), strict=True):
            own = _stiffness(member["modulus"], member["section"], b - a)
            elements.append(Element(member["name"], [*s, *e], a, b - a, (x1 - x0) / length, (y1 - y0) / length, own))
    held = [at_node[s["node"]][k] for s in truss["supports"] for k, d in enumerate(("horizontal", "vertical")) if s[d]]
    nodes = {name: (u, v) for name, (u, v) in at_node.items()}
    return Frame(elements, count, nodes, at_middle, held)


def _cuts(truss: Record, member: str, length: float) -> list[float]:
    """Where a member is cut: its ends, its middle, and every end of a load on it."""
    wanted = [0.0, length / 2, length]
    for case in truss["cases"]:
        wanted += [load[end] for load in case["member_loads"] if load["member"] == member for end in ("from", "to")]
        wanted += [load["at"] for load in case["point_loads"] if load["member"] == member]
    kept: list[float] = [0.0]
    for x in sorted(wanted):
        if x - kept[-1] > CLOSE and (length - x > CLOSE or x == length):
            kept.append(x)
    kept[-1] = length
    return kept


def _stiffness(modulus: float, section: Record, length: float) -> np.ndarray:
    """Beam element of Euler and Bernoulli, [u, v, rotation] at the start and the end, in its own axes."""
    axial, bending = modulus * section["area"] / length, modulus * section["inertia"] / length**3
    out = np.zeros((6, 6))
    out[np.ix_([0, 3], [0, 3])] = axial * np.array([[1, -1], [-1, 1]])
    s = length
    out[np.ix_([1, 2, 4, 5], [1, 2, 4, 5])] = bending * np.array([
        [12, 6 * s, -12, 6 * s],
        [6 * s, 4 * s * s, -6 * s, 2 * s * s],
        [-12, -6 * s, 12, -6 * s],
        [6 * s, 2 * s * s, -6 * s, 4 * s * s],
    ])  # fmt: skip
    return out


def _element_loads(frame: Frame, case: Record) -> np.ndarray:
    """Uniform loads of a case on the elements in their own axes (element, 2) [N/m]."""
    out = np.zeros((len(frame.elements), 2))
    for k, e in enumerate(frame.elements):
        middle = e.begin + e.length / 2
        for load in case["member_loads"]:
            if load["member"] == e.member and load["from"] < middle < load["to"]:
                out[k, 0] += load["qx"] * e.cos + load["qy"] * e.sin
                out[k, 1] += load["qy"] * e.cos - load["qx"] * e.sin
    return out


def _fixed_ends(e: Element, load: np.ndarray) -> np.ndarray:
    """What a uniform load puts on the two ends of an element (6,), in its own axes."""
    along, across = load * e.length / 2
    turning = across * e.length / 6
    return np.array([along, across, turning, along, across, -turning])


def _force(frame: Frame, case: Record, loads: np.ndarray) -> np.ndarray:
    """Loads of a case on the freedoms."""
    out = np.zeros(frame.count)
    for e, load in zip(frame.elements, loads, strict=True):
        out[e.freedoms] += e.turn.T @ _fixed_ends(e, load)
    for load in case["node_loads"]:
        out[list(frame.at_node[load["node"]])] += (load["fx"], load["fy"])
    for load in case["point_loads"]:
        ends = list(_ends(frame, load["member"]))
        _, freedoms = min(ends, key=lambda end: abs(end[0] - load["at"]))
        out[freedoms] += (load["fx"], load["fy"])
    return out


def _ends(frame: Frame, member: str) -> Iterator[tuple[float, list[int]]]:
    """Place along the member and freedoms of the ends of its elements."""
    for e in frame.elements:
        if e.member == member:
            yield e.begin, e.freedoms[:2]
            yield e.begin + e.length, e.freedoms[3:5]


def _along(
    frame: Frame, member: str, moved: np.ndarray, loads: Sequence[np.ndarray]
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Axial force, shear and moment (case, sample) of a member, by equilibrium of each element from its start."""
    parts: list[list[np.ndarray]] = [[], [], []]
    for k, e in enumerate(frame.elements):
        if e.member != member:
            continue
        s = SAMPLES * e.length
        load = np.stack([on[k] for on in loads])
        end = (e.stiffness @ e.turn @ moved[e.freedoms]).T - np.stack([_fixed_ends(e, q) for q in load])
        along, across = load[:, :1], load[:, 1:]
        parts[0].append(-end[:, :1] - along * s)
        parts[1].append(end[:, 1:2] + across * s)
        parts[2].append(-end[:, 2:3] + end[:, 1:2] * s + across * s**2 / 2)
    axial, shear, moment = (np.concatenate(part, axis=1) for part in parts)
    return axial, shear, moment
