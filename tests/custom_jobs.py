"""Jobs for the tests of trusses given joint by joint, and of loads and grades that a job gives itself."""

import copy
import tomllib
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from rooftruss.basis.job import Job
from rooftruss.basis.jobform import job_from_mapping
from rooftruss.design.design import Design
from rooftruss.run import run_job
from rooftruss.shapes.truss import Truss
from tests.jobs import BASIS

FOOT = 0.3048
PLACE = BASIS.replace("40 psf", "30 psf").replace("115 mph", "110 mph")
TEXT = f"""\
[job]
title = "Given joint by joint"
units = "US"
{PLACE}[timber]
top_chord = {{ grades = ["DF-L SS"], sizes = ["2x6"], restraint = "sheathed" }}
bottom_chord = {{ grades = ["DF-L SS"], sizes = ["2x6"], restraint = "4 ft" }}
web = {{ grades = ["DF-L No.2"], sizes = ["2x4"], restraint = "midpoint" }}
longest_stock = "40 ft"
[[truss]]
mark = "T1"
shape = "fink"
quantity = 10
span = "24 ft"
pitch = "6/12"
spacing = "24 in"
overhang = "12 in"
bearing = "3.5 in"
"""
CALM = {"ground_snow": "0 psf", "wind_speed": "0 mph"}


def mapping(**changes: Any) -> dict[str, Any]:
    """The job as a file gives it, with keys of its tables changed: mapping(loads={...}, truss={...})."""
    data = tomllib.loads(TEXT)
    for table, keys in changes.items():
        if table == "truss":
            data["truss"] = [data["truss"][0] | keys]
        elif isinstance(keys, Mapping):
            data[table] = data.get(table, {}) | keys
        else:
            data[table] = keys
    return copy.deepcopy(data)


def job(**changes: Any) -> Job:
    return job_from_mapping(mapping(**changes), "demo.toml", Path())


def design(**changes: Any) -> Design:
    """The one truss of the job, sized (one choice of size) and checked."""
    return run_job(job(**changes)).designs[0]


def rows(
    nodes: Mapping[str, tuple[float, float]],
    members: Iterable[tuple[str, str, str, str]],
    supports: Mapping[str, str],
    **keys: Any,
) -> dict[str, Any]:
    """Keys of [[truss]] of a custom truss: joints in feet; (role, start, end, pinned ends as "se") of the members;
    supports "hv", "v" with a bearing length after a blank."""
    return {
        "shape": "custom",
        "node": [{"name": name, "x": f"{x!r} ft", "y": f"{y!r} ft"} for name, (x, y) in nodes.items()],
        "member": [
            {"role": role, "start": start, "end": end, "pinned": _ends(pins)} for role, start, end, pins in members
        ],
        "support": [_support(name, words) for name, words in supports.items()],
        **keys,
    }


def _ends(pins: str) -> list[str]:
    return [word for word in ("start", "end") if word[0] in pins]


def _support(name: str, words: str) -> dict[str, Any]:
    held, _, bearing = words.partition(" ")
    row: dict[str, Any] = {"node": name, "horizontal": "h" in held, "vertical": "v" in held}
    return row | ({"bearing": bearing} if bearing else {})


def as_rows(truss: Truss) -> dict[str, Any]:
    """Keys of [[truss]] that give an unbatched truss joint by joint."""
    made = truss.topology
    places: Sequence[Sequence[float]] = truss.xy.tolist()
    return {
        "shape": "custom",
        "node": [{"name": n, "x": f"{x!r} m", "y": f"{y!r} m"} for n, (x, y) in zip(made.nodes, places, strict=True)],
        "member": [
            {
                "name": m.name,
                "role": m.role,
                "start": made.nodes[m.start],
                "end": made.nodes[m.end],
                "pinned": [word for word, pin in (("start", m.pinned_start), ("end", m.pinned_end)) if pin],
            }
            for m in made.members
        ],
        "support": [
            {"node": made.nodes[s.node], "horizontal": s.horizontal, "vertical": s.vertical} for s in made.supports
        ],
    }


# Between bearing centres 23.70833 ft apart: 24 ft less 3.5 in.
LENGTH = 24 - 3.5 / 12
SHED = rows(  # one slope of 3/12, rising to the right
    {"A": (0, 0), "B": (LENGTH / 2, 0), "C": (LENGTH, 0), "D": (LENGTH / 2, LENGTH / 8), "E": (LENGTH, LENGTH / 4)},
    [
        ("top chord", "A", "D", "s"),
        ("top chord", "D", "E", "e"),
        ("bottom chord", "A", "B", "s"),
        ("bottom chord", "B", "C", "e"),
        ("web", "B", "D", "se"),
        ("web", "B", "E", "se"),
        ("web", "C", "E", "se"),
    ],
    {"A": "hv", "C": "v"},
    pitch="3/12",
    overhang="0 in",
)
QUARTER = LENGTH / 4
KING = {  # a king post of 6/12 with a strut on each side
    "A": (0, 0),
    "B": (2 * QUARTER, 0),
    "C": (4 * QUARTER, 0),
    "D": (QUARTER, QUARTER / 2),
    "E": (2 * QUARTER, QUARTER),
    "F": (3 * QUARTER, QUARTER / 2),
}
KING_MEMBERS = [
    ("top chord", "A", "D", "s"),
    ("top chord", "D", "E", "e"),
    ("top chord", "E", "F", "s"),
    ("top chord", "F", "C", "e"),
    ("bottom chord", "A", "B", "s"),
    ("bottom chord", "B", "C", "e"),
    ("web", "B", "D", "se"),
    ("web", "B", "E", "se"),
    ("web", "B", "F", "se"),
]
THREE = rows(KING, KING_MEMBERS, {"A": "hv", "B": "v 5.5in", "C": "v"}, overhang="0 in")
