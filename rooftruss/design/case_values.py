"""One load case of a design: how the standard came to it, and what it puts on every member and joint."""

from dataclasses import dataclass

from rooftruss.design.design import Design
from rooftruss.errors import JobError, nearest
from rooftruss.loads.roof import ActionCase

Stretch = tuple[str, float, float, float, float]  # member, from, to [m from its start], right, up [N per m of member]
Point = tuple[str, float, float, float]  # member, place [m from its start], right, up [N]
Joint = tuple[str, float, float]  # joint, right, up [N]


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseValues:
    """A case as it is laid on one truss, unfactored. head holds the loads on surfaces and the values behind them."""

    number: int  # among the cases of the truss
    head: ActionCase
    stretches: tuple[Stretch, ...]
    points: tuple[Point, ...]
    joints: tuple[Joint, ...]
    resultant: tuple[float, float]  # of all of it, right and up [N]


def case_values(design: Design, name: str) -> CaseValues:
    """Loads and intermediate values of the case called `name`, capitals or not. Raises JobError for an unknown one."""
    cases, truss = design.run.cases, design.run.truss
    known = [n.casefold() for n in cases.names]
    if name.casefold() not in known:
        raise JobError(f"truss {design.spec.mark} has no load case {name!r}; {nearest(name, cases.names)}")
    c, names = known.index(name.casefold()), truss.topology.names
    stretches = [
        (names[k], float(cases.x0[s]), float(cases.x1[s]), float(cases.q[c, s, 0]), float(cases.q[c, s, 1]))
        for s, k in enumerate(cases.member_of)
        if cases.q[c, s].any() and cases.x1[s] > cases.x0[s]
    ]
    points = [(names[p.member], float(p.at), float(p.fx), float(p.fy)) for p in cases.points if p.case == c]
    joints = [
        (node, float(x), float(y)) for node, (x, y) in zip(truss.topology.nodes, cases.nodal[c], strict=True) if x or y
    ]
    forces = [((b - a) * qx, (b - a) * qy) for _, a, b, qx, qy in stretches]
    forces += [(fx, fy) for *_, fx, fy in points] + [(fx, fy) for _, fx, fy in joints]
    return CaseValues(
        number=c,
        head=cases.heads[c],
        stretches=_joined(stretches),
        points=tuple(points),
        joints=tuple(joints),
        resultant=(sum(x for x, _ in forces), sum(y for _, y in forces)),
    )


def _joined(stretches: list[Stretch]) -> tuple[Stretch, ...]:
    """Neighbouring stretches of a member with the same load as one."""
    out: list[Stretch] = []
    for one in stretches:
        if out and (out[-1][0], out[-1][2], *out[-1][3:]) == (one[0], one[1], *one[3:]):
            out[-1] = (*out[-1][:2], *one[2:])
        else:
            out.append(one)
    return tuple(out)
