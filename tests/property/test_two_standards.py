"""One truss by the American and by the European standards: the same stages, other tables and clauses."""

import ast
import re
from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest

import rooftruss
from rooftruss.basis.grades import Grade, user_grade
from rooftruss.basis.job import Job, TrussSpec
from rooftruss.basis.sections import find_section
from rooftruss.design.family import GROUPS, Choice, Option, family_of, unbatched
from rooftruss.design.stages import Run, run
from rooftruss.shapes.webbing import SHAPES
from tests.en_jobs import barn
from tests.jobs import house, spec

MODULUS = 11e9
LOADS = {"roof_live": 800.0}  # EN 1991-1-1, Table 6.10 ends at 1 kN/m2
SIZES = {"top chord": "45x145", "bottom chord": "45x120", "web": "45x95"}
NDS = {
    "product": "sawn visual",
    "Fb": 8e6,
    "Ft": 5e6,
    "Fv": 1e6,
    "Fc_perp": 3e6,
    "Fc": 9e6,
    "E": MODULUS,
    "Emin": 4e9,
    "density": 420.0,
}
EN = {
    "product": "solid timber",
    "f_m_k": 24e6,
    "f_t_0_k": 14.5e6,
    "f_c_0_k": 21e6,
    "f_c_90_k": 2.5e6,
    "f_v_k": 4e6,
    "E_0_mean": MODULUS,
    "E_0_05": 7.4e9,
    "rho_mean": 420.0,
}


def walked(job: Job, truss: TrussSpec, own: Grade) -> Run:
    """All stages for one truss of fixed sizes and one grade."""
    options = {g: (Option(find_section(SIZES[g]), own),) for g in GROUPS}
    return run(unbatched(family_of(job, [truss])), Choice(options=options, index={g: np.array(0) for g in GROUPS}))


@pytest.fixture(scope="module", params=sorted(SHAPES))
def pair(request) -> tuple[Run, Run]:
    """The same truss under the demo house and under the demo barn, of timber of the same stiffness and weight."""
    bottom = 0.2 if SHAPES[request.param].sloping_bottom else None
    american = spec(
        shape=request.param, span=7.0, pitch=0.5, bottom_pitch=bottom, panels=None, longest_stock=30.0, loads=LOADS
    )
    european = replace(american, timber=replace(american.timber, options=barn().trusses[0].timber.options))
    nds, en = (
        user_grade({"name": f"{family} test", "family": family, **values})
        for family, values in (("NDS", NDS), ("EN", EN))
    )
    return walked(house(), american, nds), walked(barn(), european, en)


def test_one_topology_and_one_geometry(pair):
    us, en = pair
    assert us.truss.topology == en.truss.topology
    for name in ("xy", "length"):
        np.testing.assert_array_equal(getattr(us.truss, name), getattr(en.truss, name))
    for name in ("breadth", "depth", "plies", "le_weak", "lu_positive", "lu_negative"):
        np.testing.assert_array_equal(getattr(us.members, name), getattr(en.members, name))
    tails = [role == "tail" for role in us.members.roles]
    # a cantilever: 2.1 by NDS Appendix G, Euler's 2.0 under EN 1995-1-1; all else from panel point to panel point
    np.testing.assert_allclose(us.members.le_strong, us.truss.length * np.where(tails, 2.1, 1.0))
    np.testing.assert_allclose(en.members.le_strong, en.truss.length * np.where(tails, 2.0, 1.0))
    for name in ("stiffness_axial", "stiffness_bending"):
        np.testing.assert_allclose(getattr(us, name), getattr(en, name), rtol=1e-12)


def test_the_same_unit_load_has_the_same_unit_effects(pair):
    """Permanent loads are the same in both; variable ones are those of each standard."""
    us, en = pair
    shared = [name for name in us.cases.names if name in en.cases.names]
    assert {"dead, top chord", "least dead, top chord", "dead, bottom chord", "self-weight"} <= set(shared)
    for name in shared:
        a, b = us.cases.names.index(name), en.cases.names.index(name)
        for part in ("end_forces", "reactions", "displacements"):
            one, other = (getattr(r.solution, part)[c] for r, c in ((us, a), (en, b)))
            np.testing.assert_allclose(one, other, rtol=1e-9, atol=1e-9 * np.abs(one).max())


def test_any_one_load_on_the_roof_is_carried_alike(pair):
    """Live load over the whole roof of both standards by its size: the size is a matter of the standard, no more."""
    found = []
    for done in pair:
        whole = [c for c, h in enumerate(done.cases.heads) if h.action == "Lr" and len(h.loads) == 4]
        (load, *_) = done.cases.heads[whole[0]].loads
        assert load.kind == "plan"
        found.append(done.solution.end_forces[whole[0]] / float(load.pressure))
    np.testing.assert_allclose(found[0], found[1], rtol=1e-9, atol=1e-9 * np.abs(found[0]).max())


def test_stages_hand_on_the_same_kinds_of_things(pair):
    """Every stage returns the same class; what differs is named by the standards of the scheme."""
    us, en = pair
    for f in fields(Run):
        if f.name not in ("family", "choice"):
            assert type(getattr(us, f.name)) is type(getattr(en, f.name)), f.name
    assert us.checks.utilisation.shape[1:] == en.checks.utilisation.shape[1:]
    schemes = (us.family.scheme, en.family.scheme)
    assert [s.timber_standard for s in schemes] == [us.family.timber.name, en.family.timber.name]
    assert schemes[0].load_standard.startswith("ASCE")
    assert schemes[1].load_standard == "EN 1991"
    for one, other in (
        ({v.clause for h in us.cases.heads for v in h.values}, {v.clause for h in en.cases.heads for v in h.values}),
        ({rule.clause for rule in us.checks.rules}, {rule.clause for rule in en.checks.rules}),
        (set(us.combinations.names), set(en.combinations.names)),
    ):
        assert one
        assert other
        assert not one & other


STANDARDS = re.compile(r"ASCE|\bNDS|EN 199|\bEC5|_asce7|_en199|\bec5|\bnds_?\b")
SHARED = ("analysis", "shapes", "design/stages.py", "design/sizing.py", "design/design.py", "output/workbook/book.py")


def code_of(path: Path) -> str:
    """A module without its docstrings and comments."""
    return ast.unparse(_Bare().visit(ast.parse(path.read_text("utf-8"))))


class _Bare(ast.NodeTransformer):
    def visit_Expr(self, node: ast.Expr) -> ast.Expr | None:
        text = isinstance(node.value, ast.Constant) and isinstance(node.value.value, str)
        return None if text else node


@pytest.mark.parametrize("part", SHARED)
def test_no_shared_stage_asks_which_standard_is_in_force(part):
    root = Path(rooftruss.__file__).parent / part
    for path in [root] if root.is_file() else sorted(root.rglob("*.py")):
        found = STANDARDS.search(code_of(path))
        assert found is None, f"{path.name}: {found and found.group()}"
