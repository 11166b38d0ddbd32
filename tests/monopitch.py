"""Monopitch roofs, trusses and jobs for tests: one slope from eave to eave, the low eave left or right."""

import math
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from rooftruss.basis.job import CustomSpec, TrussSpec
from rooftruss.loads.roof import MONOPITCH, Roof
from tests.en_jobs import BARN, en_spec

BOTH = ("low", "high")
MIRROR = {"left": "right", "right": "left"}
SUPPORTS = (("A", True, True, None), ("C", False, True, None))  # pin under the low eave
WEBS = ("AD", "AE", "BE", "BF", "BG", "CG", "CH")


def monopitch_roof(
    pitch_deg: float,
    *,
    low: str = "left",
    span: float = 6.0,
    overhang: float = 0.4,
    bearing: float = 0.1,
    spacing: float = 0.6,
    bare: str = "",
) -> Roof:
    """Roof [m]; overhang from the outside of the bearing."""
    pitch = math.tan(math.radians(pitch_deg))
    return Roof(
        pitch=np.asarray(pitch),
        span=np.asarray(span),
        bearing_span=np.asarray(span - bearing),
        overhang=np.asarray(overhang + bearing / 2),
        rise=np.asarray(pitch * (span - bearing)),
        spacing=np.asarray(spacing),
        form=MONOPITCH,
        low=low,
        bare=bare,
    )


def custom_monopitch(
    *,
    pitch_deg: float = 15.0,
    low: str = "left",
    span: float = 6.0,
    bearing: float = 0.1,
    overhang: float = 0.45,
    tails: Sequence[str] = BOTH,
    heel: float = 0.3,
    spacing: float = 0.6,
) -> TrussSpec:
    """A truss on two end posts: joints A, B, C of the bottom chord and D to H of the top chord from the low eave, tails
    to S (low) and T (high). Lengths [m]."""
    run, pitch = span - bearing, math.tan(math.radians(pitch_deg))
    reach = overhang + bearing / 2
    ends = {"low": ("S", -reach, "D"), "high": ("T", run + reach, "H")}
    top = {"D": 0.0, "E": run / 4, "F": run / 2, "G": 3 * run / 4, "H": run}
    top |= {joint: x for end, (joint, x, _) in ends.items() if end in tails}
    nodes = {"A": (0.0, 0.0), "B": (run / 2, 0.0), "C": (run, 0.0)}
    nodes |= {n: (x, heel + pitch * x) for n, x in top.items()}
    members = [("tail", *ends[end][::2], "top chord", False) for end in tails]
    members += [("top chord", a, b, "top chord", False) for a, b in ("DE", "EF", "FG", "GH")]
    members += [("bottom chord", a, b, "bottom chord", False) for a, b in ("AB", "BC")]
    members += [("web", a, b, "web", True) for a, b in WEBS]
    side = 1.0 if low == "left" else -1.0
    return en_spec(
        mark="C1",
        shape="custom",
        span=span,
        bearing=bearing,
        pitch=pitch,
        overhang=overhang if tails else 0.0,
        spacing=spacing,
        custom=CustomSpec(
            nodes=tuple((name, side * x, y) for name, (x, y) in nodes.items()),
            members=tuple((None, role, a, b, group, pin, pin) for role, a, b, group, pin in members),
            supports=SUPPORTS,
        ),
    )


def with_joint(spec: TrussSpec, name: str, dx: float, dy: float) -> TrussSpec:
    """The truss with one joint moved [m]."""
    moved = tuple((n, x + dx * (n == name), y + dy * (n == name)) for n, x, y in spec.custom.nodes)
    return replace(spec, custom=replace(spec.custom, nodes=moved))


def monopitch_job(path: Path, spec: TrussSpec, *changes: tuple[str, str]) -> Path:
    """A job file at `path`: the barn with this truss in the place of its own, every text replaced."""
    text = BARN.read_text("utf-8").split("[[truss]]")[0].replace('"5.4 m"', '"9 m"')
    given = spec.custom
    rows = {
        "node": [f'{{ name = "{n}", x = "{x!r} m", y = "{y!r} m" }}' for n, x, y in given.nodes],
        "member": [f'{{ role = "{m[1]}", start = "{m[2]}", end = "{m[3]}" }}' for m in given.members],
        "support": [
            f'{{ node = "{n}", horizontal = {str(h).lower()}, vertical = {str(v).lower()} }}'
            for n, h, v, _ in given.supports
        ],
    }
    keys = {"span": spec.span, "spacing": spec.spacing, "overhang": spec.overhang, "bearing": spec.bearing}
    text += f'[[truss]]\nmark = "{spec.mark}"\nshape = "custom"\npitch = "{100 * spec.pitch!r} %"\n'
    text += "".join(f'{key} = "{value!r} m"\n' for key, value in keys.items())
    for key, row in rows.items():
        text += f"{key} = [\n" + "".join(f"    {one},\n" for one in row) + "]\n"
    for old, new in changes:
        assert old in text, f"{old!r} is no part of the job"
        text = text.replace(old, new)
    path.write_text(text, "utf-8")
    return path
