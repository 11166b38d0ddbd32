"""The result file: everything about a job's trusses in SI, for other programs to read and to compute again.

Its form is public: keys keep their names and meaning. Signs: tension positive; moments positive when the fibre on the
right hand of someone walking from a member's start to its end is in tension; x right, y up.
"""

import json
import math
import sys
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np

from rooftruss import __version__
from rooftruss.analysis.envelope import Peak
from rooftruss.basis.job import Job
from rooftruss.design.design import LIMIT, Design
from rooftruss.design.idealisations import idealisations
from rooftruss.design.idle import idle_summary
from rooftruss.design.places import Place
from rooftruss.design.serviceability import unlimited
from rooftruss.design.stages import durations_of
from rooftruss.errors import OutputError
from rooftruss.output.cautions import CAUTIONS
from rooftruss.output.saving import replace_file
from rooftruss.timber.terms import DeflectionLimit

Record = dict[str, Any]


def write_result(job: Job, designs: Sequence[Design], path: str | Path) -> None:
    """Write the result file; "-" is stdout. An existing file stays unless the new one is whole. Raises OutputError."""
    text = json.dumps(result_dict(job, designs), indent=1, allow_nan=False, ensure_ascii=False) + "\n"
    if str(path) == "-":
        sys.stdout.write(text)
        return
    replace_file(Path(path), lambda part: part.write_text(text, "utf-8"))


def result_dict(job: Job, designs: Sequence[Design]) -> Record:
    """The content of the result file: plain dicts, lists, text, finite numbers and booleans."""
    return {
        "program": {"name": "rooftruss", "version": __version__},
        "job": {
            "title": job.title,
            "client": job.client,
            "number": job.number,
            "units": job.units,
            "site": {key: _plain(value) for key, value in job.site.items()},
            "scheme_options": {key: _plain(value) for key, value in job.scheme_options.items()},
            "assumptions": [{"place": a.place, "text": a.text} for a in job.assumptions],
        },
        "scheme": job.scheme,
        "cautions": list(CAUTIONS),
        "trusses": [truss_record(d) for d in designs],
    }


def truss_record(design: Design) -> Record:
    """Everything about one truss."""
    spec, simplified = design.spec, design.run.family.timber.simplified
    return {
        "mark": spec.mark,
        "shape": spec.shape,
        "analysis": "frame" if simplified is None else f"simplified, {simplified.clause}",
        "quantity": spec.quantity,
        "span": _number(spec.span),
        "pitch": _number(spec.pitch),
        "spacing": _number(spec.spacing),
        "passes": design.passes,
        "nodes": _nodes(design),
        "members": _members(design),
        "supports": _supports(design),
        "cases": [_case(design, c) for c in range(len(design.run.cases.heads))],
        "combinations": _combinations(design),
        "effects": _effects(design),
        "envelope": _envelope(design),
        "reactions": _reactions(design),
        "checks": [_check(design, k) for k in range(len(design.run.members.names))],
        "bearing_checks": _bearing_checks(design),
        "deflections": _deflections(design),
        "deflections_without_limit": _without_limit(design),
        "zero_force": _zero_force(design),
        "pin_jointed": _pin_jointed(design),
        "pieces": [],
        "price": {},
    }


def _number(value: Any) -> float:
    """A finite float. Raises OutputError for anything else: a file must not hold what its readers cannot read."""
    number = float(value)
    if not math.isfinite(number):
        raise OutputError("a result is not a finite number, so the result file would be wrong; please report this job")
    return number + 0.0  # -0.0 becomes 0.0


def _numbers(values: Any) -> list[float]:
    return [_number(v) for v in values]


def _plain(value: object) -> object:
    if isinstance(value, bool | int | str) or value is None:
        return value
    if isinstance(value, Mapping):
        return {str(k): _plain(v) for k, v in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(v) for v in value]
    return _number(value) if isinstance(value, float | np.floating) else str(value)


def _nodes(design: Design) -> list[Record]:
    names, xy = design.run.family.topology.nodes, design.run.truss.xy
    return [{"name": n, "x": _number(x), "y": _number(y)} for n, (x, y) in zip(names, xy, strict=True)]


def _members(design: Design) -> list[Record]:
    run, made = design.run, design.run.family.topology
    out = []
    for k, member in enumerate(made.members):
        option, plies = design.sizes[member.group], int(run.members.plies[k])
        breadth, depth = float(run.members.breadth[k]), float(run.members.depth[k])
        area = breadth * depth * plies
        out.append(
            {
                "name": member.name,
                "role": member.role,
                "group": member.group,
                "start": made.nodes[member.start],
                "end": made.nodes[member.end],
                "length": _number(run.truss.length[k]),
                "moment_free_start": member.pinned_start,
                "moment_free_end": member.pinned_end,
                "section": {
                    "name": option.section.name,
                    "breadth": breadth,
                    "depth": depth,
                    "plies": plies,
                    "area": _number(area),
                    "inertia": _number(area * depth**2 / 12),
                },
                "grade": option.grade.name,
                "modulus": _number(run.members.properties["E"][k]),
            }
        )
    return out


def _supports(design: Design) -> list[Record]:
    made = design.run.family.topology
    return [
        {
            "node": made.nodes[s.node],
            "horizontal": s.horizontal,
            "vertical": s.vertical,
            "bearing_length": _number(length),
        }
        for s, length in zip(made.supports, design.run.bearing_lengths, strict=True)
    ]


def _case(design: Design, c: int) -> Record:
    cases, made = design.run.cases, design.run.family.topology
    nodal = zip(made.nodes, cases.nodal[c], strict=True)
    return {
        "name": cases.heads[c].name,
        "action": cases.heads[c].action,
        "member_loads": _member_loads(design, c),
        "point_loads": [
            {"member": made.names[p.member], "at": _number(p.at), "fx": _number(p.fx), "fy": _number(p.fy)}
            for p in cases.points
            if p.case == c
        ],
        "node_loads": [{"node": n, "fx": _number(x), "fy": _number(y)} for n, (x, y) in nodal if x or y],
    }


def _member_loads(design: Design, c: int) -> list[Record]:
    """Uniform loads of a case; neighbouring stretches with the same load are one, those without load are left out."""
    cases, names = design.run.cases, design.run.family.topology.names
    out: list[Record] = []
    for s, k in enumerate(cases.member_of):
        (qx, qy), start, end = cases.q[c, s], _number(cases.x0[s]), _number(cases.x1[s])
        if end <= start or not (qx or qy):
            continue
        load = {"member": names[k], "from": start, "to": end, "qx": _number(qx), "qy": _number(qy)}
        last = out[-1] if out else None
        if last and all(last[key] == load[key] for key in ("member", "qx", "qy")) and last["to"] == start:
            last["to"] = end
        else:
            out.append(load)
    return out


def _combinations(design: Design) -> list[Record]:
    made, names = design.run.combinations, design.run.cases.names
    return [
        {
            "name": name,
            "clause": made.clauses[k],
            "limit_state": "strength" if made.strength[k] else "service",
            "kind": made.kinds[k],
            "duration": made.durations[k],
            "time_effect": None if math.isnan(made.time_effects[k]) else _number(made.time_effects[k]),
            "factors": {names[c]: _number(f) for c, f in enumerate(made.factors[k]) if f},
        }
        for k, name in enumerate(made.names)
    ]


def _effects(design: Design) -> Record:
    """Effects of every case before any factor, at the ends of the members and at the nodes."""
    run, made = design.run, design.run.family.topology
    held = [made.nodes[s.node] for s in made.supports]
    out: Record = {}
    for c, name in enumerate(run.cases.names):
        ends = run.forces.end_forces[c]
        out[name] = {
            "members": {
                member: {
                    "axial": _numbers((-e[0], e[3])),
                    "shear": _numbers((e[1], -e[4])),
                    "moment": _numbers((-e[2], e[5])),
                }
                for member, e in zip(made.names, ends, strict=True)
            },
            "reactions": {n: _numbers(r) for n, r in zip(held, run.forces.reactions[c], strict=True)},
            "displacements": {n: _numbers(u) for n, u in zip(made.nodes, run.solution.displacements[c], strict=True)},
        }
    return out


def _peak(design: Design, found: Peak, k: int, name: str) -> Record:
    """A governing value and its combination; none where nothing acts."""
    number = int(found.combination[k])
    return {
        name: _number(found.value[k]),
        f"{name}_combination": design.run.combinations.names[number] if number >= 0 else None,
    }


def _envelope(design: Design) -> list[Record]:
    names = ("tension", "compression", "moment", "shear")
    return [
        {"member": member}
        | {key: v for n in names for key, v in _peak(design, getattr(design.outcome.envelope, n), k, n).items()}
        for k, member in enumerate(design.run.members.names)
    ]


def _reactions(design: Design) -> list[Record]:
    names, made = ("down", "uplift", "horizontal"), design.run.family.topology
    return [
        {"node": made.nodes[s.node]}
        | {key: v for n in names for key, v in _peak(design, getattr(design.outcome.reactions, n), k, n).items()}
        for k, s in enumerate(made.supports)
    ]


def _check(design: Design, k: int) -> Record:
    """The governing check of a member, with the factors and resistances that the standard's explanation lists."""
    run, found = design.run, design.outcome.utilisation
    value, number = float(found.value[k]), int(found.combination[k])
    record: Record = {"member": run.members.names[k], "utilisation": _number(value), "ok": value <= LIMIT}
    if number < 0:
        return record | {"combination": None, "rule": None, "factors": {}, "demand": {}, "resistance": {}}
    row, rule = run.strength.index(number), run.checks.rules[int(design.outcome.rule[k])]
    steps = run.family.timber.explain(run.members, run.demand, durations_of(run.combinations), k, row)
    demand = run.demand
    return record | {
        "combination": run.combinations.names[number],
        "rule": f"{rule.name} ({rule.clause})",
        "factors": {s.symbol: _number(s.value) for s in steps if s.kind == "factor" and s.symbol != "utilisation"},
        "demand": {
            name: _number(getattr(demand, name)[row, k])
            for name in ("tension", "compression", "moment_positive", "moment_negative", "shear")
        },
        "resistance": {s.symbol: _number(s.value) for s in steps if s.kind == "stress"},
    }


def _bearing_checks(design: Design) -> list[Record]:
    made = design.run.family.topology
    return [
        {
            "node": made.nodes[s.node],
            **_peak(design, design.outcome.bearing, k, "utilisation"),
            "ok": bool(design.outcome.bearing.value[k] <= LIMIT),
        }
        for k, s in enumerate(made.supports)
    ]


def _deflections(design: Design) -> list[Record]:
    """Deflection nearest its limit at each place: the movement in its direction, the other is 0."""
    found = design.outcome.deflection
    return [
        {
            p.kind: p.name,
            "vertical": _number(found.value[k]) if p.direction == "vertical" else 0.0,
            "horizontal": _number(found.value[k]) if p.direction == "horizontal" else 0.0,
            "direction": p.direction,
            "limit": _number(found.limit[k]) if found.combination[k] >= 0 else None,
            "length_over_limit": _length_over_limit(found.rule(k), p),
            "kind": found.kinds[int(found.kind[k])].name if found.kind[k] >= 0 else None,
            "combination": design.combination(int(found.combination[k])) if found.combination[k] >= 0 else None,
            "factors": _service_factors(design, int(found.combination[k]), found.kinds[int(found.kind[k])].name)
            if found.kind[k] >= 0
            else {},
            "ok": bool(found.ratio[k] <= LIMIT),
        }
        for k, p in enumerate(found.places)
    ]


def _length_over_limit(rule: DeflectionLimit | None, place: Place) -> float | None:
    """x of a limit l/x; none for sideways movement."""
    return _number(rule.ratio) if rule and rule.limits and place.direction == "vertical" else None


def _service_factors(design: Design, combination: int, kind: str) -> Record:
    """Factors of a combination on its cases, with creep where the kind of deflection has it."""
    run = design.run
    factors = run.family.timber.service_factors(
        run.combinations.factors[[combination]],
        actions=tuple(h.action for h in run.cases.heads),
        kinds=(kind,),
        lasting=dict(run.family.scheme.lasting),
    )
    return {name: _number(f) for name, f in zip(run.cases.names, factors[0], strict=True) if f}


def _without_limit(design: Design) -> list[Record]:
    """The largest vertical deflection of each kind that nothing limits."""
    return [
        {
            f.place.kind: f.place.name,
            "vertical": _number(f.value),
            "kind": f.kind.name,
            "combination": design.combination(f.combination),
            "factors": _service_factors(design, f.combination, f.kind.name),
        }
        for f in unlimited(design.run)
    ]


def _pin_jointed(design: Design) -> Record:
    """Axial forces of the pin-jointed truss by case and member, beside the frame's in `effects`."""
    if not design.run.triangulated:
        return {}
    forces = idealisations(design).pin_jointed
    names, cases = design.run.members.names, design.run.cases.names
    return {case: dict(zip(names, _numbers(row), strict=True)) for case, row in zip(cases, forces, strict=True)}


def _zero_force(design: Design) -> Record:
    if not design.run.triangulated:  # it stands by its stiff chords; with pins there is nothing to inspect
        return {"by_case": {}, "in_every_combination": []}
    found = idle_summary(design)
    return {
        "by_case": {name: list(i.zero) for name, i in zip(design.run.cases.names, found.by_case, strict=True)},
        "in_every_combination": list(found.idle),
    }
