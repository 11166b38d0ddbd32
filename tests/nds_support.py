"""Members, demands and durations for tests of timber checks, in inches and pounds as the published examples are."""

from collections.abc import Mapping, Sequence
from dataclasses import fields

import numpy as np

from rooftruss.basis.grades import find_grade, user_grade
from rooftruss.basis.sections import Section, find_section
from rooftruss.timber.check import standard
from rooftruss.timber.nds import Nds
from rooftruss.timber.terms import Checks, Demand, Durations, Members
from rooftruss.units import INCH, POUND_FORCE, PSI

OPTIONS = {"moisture": "dry", "temperature": "normal", "incised": False, "buckling_stiffness": False}
POUND_INCH = POUND_FORCE * INCH


def nds(name: str = "NDS 2018 ASD", **options: object) -> Nds:
    made = standard(name, OPTIONS | options)
    assert isinstance(made, Nds)
    return made


def members(code: Nds, *rows: Mapping[str, object]) -> Members:
    """One row per member: grade, size, and any of role, plies, sharing, le_strong, le_weak, lu_positive ... [in]."""
    full = [{"role": "top chord", "plies": 1, "sharing": False, "length": 12.0} | dict(row) for row in rows]
    sections = [_section(row["size"]) for row in full]
    kinds = [code.properties(_grade(row["grade"]), section) for row, section in zip(full, sections, strict=True)]

    def inches(key: str) -> np.ndarray:
        return np.array([float(row.get(key, 0.0)) * INCH for row in full])

    return Members(
        names=tuple(f"member {n}" for n in range(len(full))),
        roles=tuple(str(row["role"]) for row in full),
        breadth=np.array([s.breadth for s in sections]),
        depth=np.array([s.depth for s in sections]),
        plies=np.array([float(row["plies"]) for row in full]),
        length=inches("length"),
        le_strong=inches("le_strong"),
        le_weak=inches("le_weak"),
        lu_positive=inches("lu_positive"),
        lu_negative=inches("lu_negative"),
        load_sharing=np.array([bool(row["sharing"]) for row in full]),
        properties={key: np.array([kind[key] for kind in kinds]) for key in kinds[0]},
    )


def _section(size: object) -> Section:
    if isinstance(size, str):
        return find_section(size)
    breadth, depth = size
    return Section(name=f"{breadth} x {depth} in", breadth=breadth * INCH, depth=depth * INCH, source="test")


def _grade(grade: object):
    if isinstance(grade, str):
        return find_grade(grade)
    stresses = {key: value * PSI if isinstance(value, float) and key != "G" else value for key, value in grade.items()}
    return user_grade({"name": "as given", "family": "NDS", "product": "sawn visual", "G": 0.42} | stresses)


def demand(*rows: Mapping[str, float]) -> Demand:
    """One row per combination for a single member: N (tension positive), M (sagging positive), V in lb, lb in."""

    def column(key: str, sign: int, size: float) -> np.ndarray:
        return np.array([[max(sign * row.get(key, 0.0), 0.0) * size] for row in rows])

    return Demand(
        tension=column("N", 1, POUND_FORCE),
        compression=column("N", -1, POUND_FORCE),
        moment_positive=column("M", 1, POUND_INCH),
        moment_negative=column("M", -1, POUND_INCH),
        shear=column("V", 1, POUND_FORCE),
        tension_least=column("N", 1, POUND_FORCE),
    )


def durations(*names: str, time_effect: Sequence[float] | None = None) -> Durations:
    effects = np.full(len(names), np.nan) if time_effect is None else np.array(time_effect, dtype=float)
    return Durations(names=names, time_effect=effects)


def each_combination(code, made: Members, load: Demand, lasting: Durations) -> list[Checks]:
    """The checks of each combination by itself: what governs it is then the rule of that combination."""
    out = []
    for k, name in enumerate(lasting.names):
        parts = {f.name: getattr(load, f.name) for f in fields(Demand)}
        one = Demand(**{n: None if v is None else v[..., k : k + 1, :] for n, v in parts.items()})
        out.append(code.check(made, one, Durations(names=(name,), time_effect=lasting.time_effect[k : k + 1])))
    return out
