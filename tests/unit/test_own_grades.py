"""Grades that a job gives itself, and the net section of its joints."""

import numpy as np
import pytest

from rooftruss.basis.grades import grades
from rooftruss.design.stages import durations_of
from rooftruss.errors import JobError
from rooftruss.timber.terms import Demand
from tests.custom_jobs import design, job

PSI = 6894.757293168361
OWN = {
    "name": "Own LVL",
    "product": "structural composite",
    "Fb": "2600 psi",
    "Ft": "1600 psi",
    "Fv": "285 psi",
    "Fc_perp": "750 psi",
    "Fc": "2500 psi",
    "E": "2000000 psi",
    "Emin": "1016000 psi",
    "density": "42 lb/ft^3",
}
TOP = {"top_chord": {"grades": ["Own LVL"]}}


def own(**changes):
    return [{k: v for k, v in {**OWN, **changes}.items() if v is not None}]


def test_a_grade_of_the_job_is_used_with_its_values():
    made = design(grade=own(species="Veneers"), truss=TOP)
    grade = made.sizes["top chord"].grade
    assert (grade.name, grade.family, grade.species, grade.table) == ("Own LVL", "NDS", "Veneers", "job file")
    top = made.run.members.names.index("top 1")
    p = made.run.members.properties
    # no factor but 1.0: no size factor, dry, cool; c = 0.9 and C_r = 1.04 of structural composite lumber
    assert [float(p[x][top]) / PSI for x in ("Fb", "Ft", "Fv", "Fc_perp", "Fc", "E", "Emin")] == pytest.approx(
        [2600, 1600, 285, 750, 2500, 2e6, 1.016e6]
    )
    assert (float(p["column_c"][top]), float(p["C_r"][top])) == (0.9, 1.04)
    assert float(p["density"][top]) == pytest.approx(42 * 0.45359237 / 0.3048**3)
    assert any("no size factor on a grade of the job's own" in a.text for a in made.run.family.job.assumptions)


def test_it_is_known_to_its_own_job_only():
    assert [g.name for g in job(grade=own()).grades] == ["Own LVL"]
    assert "Own LVL" not in {g.name for g in grades()}
    with pytest.raises(JobError, match="grade 'Own LVL' is not in tables/grades; `rooftruss grades` lists"):
        job(truss=TOP)


@pytest.mark.parametrize(
    ("grade", "text"),
    [
        (own(Ft=None), "[[grade]] 1 Ft: is missing (reference value in tension along the grain)"),
        (own(Fb="2600"), "[[grade]] 1 Fb: '2600' has no unit"),
        (own(Fb="2600 lbf"), "[[grade]] 1 Fb: '2600 lbf' is not in a unit that fits"),
        (own(Fb="2600 ksi"), "[[grade]] 1 Fb: '2600 ksi' is not plausible"),
        (own(product="plywood"), "[[grade]] 1 product: 'plywood' is not a choice here"),
        (own(name="DF-L SS"), "[[grade]] 1 name: 'DF-L SS' is the name of another grade"),
        (own() + own(name="own lvl"), "[[grade]] 2 name: 'own lvl' is the name of another grade"),
        (own(f_m_k="20 MPa"), "[[grade]] 1: there is no key 'f_m_k'"),
        (own(density=None), "[[grade]] 1 density: is missing (density in service, for the self-weight; or give G"),
        (OWN, "[[grade]]: is not a list of tables; write [[grade]], in two brackets, over each one"),
    ],
)
def test_a_wrong_grade_is_told(grade, text):
    with pytest.raises(JobError) as error:
        job(grade=grade)
    assert text in str(error.value)


def test_a_misspelt_grade_of_the_job_is_told_with_its_name():
    with pytest.raises(JobError, match=r"nor among the \[\[grade\]\] of the job; did you mean 'Own LVL'"):
        job(grade=own(), truss={"top_chord": {"grades": ["Own LVV"]}})


# --- net section ----------------------------------------------------------------------------------------------------


def checked(made, **effects):
    """Utilisation of every member under some of its demands alone."""
    run = made.run
    nothing = np.zeros_like(run.demand.tension)
    names = ("tension", "compression", "moment_positive", "moment_negative", "shear")
    demand = Demand(**{name: effects.get(name, nothing) for name in names})
    return run.family.timber.check(run.members, demand, durations_of(run.combinations)).utilisation


@pytest.mark.parametrize("scheme", ["asce7-22-asd", "asce7-22-lrfd"])
def test_the_net_section_counts_in_tension_alone(scheme):
    """f_t = T/A_n (NDS 3.1.2): at 0.8 of the section the tension ratio is 1.25 times that of the gross section."""
    gross, net = (design(standard={"scheme": scheme}, timber={"net_section": x}) for x in (1.0, 0.8))
    demand, members = gross.run.demand, gross.run.members
    factor = gross.run.family.timber.duration_factors(durations_of(gross.run.combinations))[:, None]
    by_hand = demand.tension / (members.breadth * members.depth * members.properties["Ft"] * factor)
    assert by_hand.max() > 0.1
    one, two = (checked(made, tension=demand.tension) for made in (gross, net))
    assert one == pytest.approx(by_hand, rel=1e-6, abs=1e-9)
    assert two == pytest.approx(one / 0.8, rel=1e-9)
    rest = {name: getattr(demand, name) for name in ("compression", "moment_positive", "moment_negative", "shear")}
    assert checked(net, **rest) == pytest.approx(checked(gross, **rest), rel=1e-12)


@pytest.mark.parametrize("share", [1.0, 0.8])
def test_the_explained_check_has_the_net_section_and_the_same_utilisation(share):
    made = design(timber={"net_section": share})
    run = made.run
    bottom = run.members.names.index("bottom 2")
    row = int(run.checks.utilisation[:, bottom].argmax())
    steps = run.family.timber.explain(run.members, run.demand, durations_of(run.combinations), bottom, row)
    found = {step.symbol: step for step in steps}
    assert ("A_n" in found) == (share < 1)
    assert found["f_t"].value == pytest.approx(float(run.demand.tension[row, bottom]) / (share * found["A"].value))
    assert found["f_t/F_t'"].value == pytest.approx(found["f_t"].value / found["F_t'"].value)
    assert steps[-1].value == pytest.approx(float(run.checks.utilisation[row, bottom]), rel=1e-9)


def test_the_net_section_is_printed():
    assert any("0.9 of the section" in note for note in design(timber={"net_section": 0.9}).run.family.timber.notes)
    assert any("tension on the gross section" in a.text for a in job().assumptions)
    with pytest.raises(JobError, match=r"net_section: 0 is not plausible; allowed: 0\.3 to 1"):
        job(timber={"net_section": 0})
