"""The account of the zero-force inspection: joint by joint for each case, then what it says of the whole truss."""

from collections.abc import Iterator

from rooftruss.analysis.inspection import Inspection, Summary
from rooftruss.design.design import Design
from rooftruss.output.schedule import Column, Grid

STEPS = (Column("step", "count"), Column("joint"), Column("carries nothing"), Column("rule"), Column("reason"))
SAYINGS = (Column("members"), Column("what it means"))


def inspection_grids(design: Design, found: Summary) -> Iterator[tuple[str, Grid]]:
    """(heading, grid) for each account; cases that read the same, step by step, share one."""
    shared: dict[tuple[str, ...], list[int]] = {}
    for c, seen in enumerate(found.by_case):
        shared.setdefault(tuple(step.reason for step in seen.steps), []).append(c)
    names = design.run.cases.names
    yield "Members and the joints they run between:", _members(design)
    for cases in shared.values():
        seen = found.by_case[cases[0]]
        heading = "Under " + "\n  and ".join(names[c] for c in cases) + ":"
        yield heading, _steps(seen)
    yield "Over all cases:", _summary(design, found)


def _members(design: Design) -> Grid:
    made = design.run.family.topology
    roles = list(dict.fromkeys(made.roles))
    rows = tuple(
        (role, ", ".join(f"{m.name} {made.nodes[m.start]}-{made.nodes[m.end]}" for m in made.members if m.role == role))
        for role in roles
    )
    return Grid("", (Column("role"), Column("members")), rows)


def _steps(seen: Inspection) -> Grid:
    if not seen.steps:
        words = "no member can be settled by looking at one joint at a time"
        return Grid("", (Column("finding"),), ((words,),))
    rows = tuple((k, s.joint, s.member or "(a reaction)", s.rule, s.reason) for k, s in enumerate(seen.steps, 1))
    passing = tuple((None, "", f"{a}, {b}", "in line", "They pass one force on unchanged.") for a, b in seen.collinear)
    return Grid("", STEPS, (*rows, *passing))


def _summary(design: Design, found: Summary) -> Grid:
    rows: list[tuple[str, str]] = []
    if found.idle:
        rows.append(
            (
                ", ".join(found.idle),
                "idle in every combination but for self-weight: they brace the truss and may be the smallest size, "
                "but they stay",
            )
        )
    rows += [
        (w.member, f"idle under gravity, works under {w.case} ({_sense(w.force)}; largest there)") for w in found.waking
    ]
    rows += [
        (", ".join(members), f"unloaded under {case} by the solver; looking at one joint at a time cannot settle it")
        for case, members in found.beyond_inspection
    ]
    if not rows:
        rows.append(("all members", "each one works under gravity"))
    return Grid("", SAYINGS, tuple(rows))


def _sense(force: float) -> str:
    return "tension" if force > 0 else "compression"
