"""Physics of the whole pipeline, job file to checks, in both editions and both methods."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.cli import main
from rooftruss.design.stages import durations_of
from tests.custom_jobs import CALM, LENGTH, TEXT, design

SCHEMES = ["asce7-16-asd", "asce7-16-lrfd", "asce7-22-asd", "asce7-22-lrfd"]
DEAD_ONLY = {"roof_live": "0 psf", "ceiling_live": "0 psf"}


def at(scheme: str, site=None, **changes):
    """The truss of tests.custom_jobs under a scheme; the key that only 7-22 knows is left out of 7-16."""
    from rooftruss.basis.jobform import job_from_mapping
    from rooftruss.run import run_job
    from tests.custom_jobs import mapping

    data = mapping(standard={"scheme": scheme}, site=site or {}, **changes)
    if "7-16" in scheme:
        del data["site"]["winter_wind_parameter"]
    return run_job(job_from_mapping(data, "demo.toml", Path())).designs[0]


def tension_ratio(made, member: str, combination: str) -> float:
    """f_t over F_t' of a member under a combination."""
    run = made.run
    row = run.strength.index(run.combinations.names.index(combination))
    number = run.members.names.index(member)
    steps = run.family.timber.explain(run.members, run.demand, durations_of(run.combinations), number, row)
    return next(step.value for step in steps if step.symbol == "f_t/F_t'")


@pytest.mark.parametrize("edition", ["7-16", "7-22"])
def test_methods_differ_by_their_calibration_under_dead_load_alone(edition):
    """ASD: D with C_D = 0.9 (NDS Table 2.3.2). LRFD: 1.4D with lambda = 0.6, K_F phi = 2.70 x 0.80 in tension and
    1.67 x 0.90 across the grain (NDS Tables N1, N2, N3), where neither C_D nor lambda acts."""
    asd, lrfd = (at(f"asce{edition}-{m}", site=CALM, loads=DEAD_ONLY) for m in ("asd", "lrfd"))
    tension = [tension_ratio(made, "bottom 1", name) for made, name in ((asd, "D"), (lrfd, "1.4D"))]
    assert tension[1] / tension[0] == pytest.approx(1.4 * 0.9 / (2.70 * 0.80 * 0.6), rel=1e-9)
    bearing = [float(made.run.bearing.max()) for made in (asd, lrfd)]
    assert bearing[1] / bearing[0] == pytest.approx(1.4 / (1.67 * 0.90), rel=1e-9)


@pytest.mark.parametrize("scheme", SCHEMES)
def test_reactions_of_every_case_and_combination_balance_the_loads(scheme):
    made = at(scheme)
    cases, run = made.run.cases, made.run
    length = cases.x1 - cases.x0
    down = -(cases.q[..., 1] * length).sum(axis=-1) - cases.nodal[..., 1].sum(axis=-1)
    up = run.solution.reactions[..., 1].sum(axis=-1)
    assert up == pytest.approx(down, rel=1e-9, abs=1e-6)
    factors = run.combinations.factors[run.combinations.strength]
    assert run.reactions[..., 1].sum(axis=-1) == pytest.approx(factors @ down, rel=1e-9, abs=1e-6)


@settings(max_examples=12, deadline=None)
@given(st.sampled_from(SCHEMES), st.floats(1.0, 60.0), st.floats(0.0, 9.0), st.floats(0.5, 9.0))
def test_a_load_on_the_left_does_on_the_left_what_its_image_does_on_the_right(scheme, size, start, length):
    """Vertical loads: sideways ones all go to the left bearing, which alone is held."""
    span = 24.0
    left = {
        "surface": "roof",
        "kind": "plan",
        "pressure": f"{size} psf",
        "from": f"{start} ft",
        "to": f"{start + length} ft",
    }
    right = {**left, "from": f"{span - start - length} ft", "to": f"{span - start} ft"}
    cases = [{"name": "one", "action": "S", "loads": [left]}, {"name": "other", "action": "S", "loads": [right]}]
    made = at(scheme, site=CALM, loads={"case": cases, "roof_live": "0 psf"})
    one, other = (made.run.cases.names.index(n) for n in ("one", "other"))
    mirror = list(made.run.family.topology.mirror_members)
    assert np.any(made.run.effects.values[..., one])
    axial = made.run.solution.end_forces[..., 3] - made.run.solution.end_forces[..., 0]  # twice the mean tension
    scale = float(np.abs(axial).max())
    assert axial[one][mirror] == pytest.approx(axial[other], abs=1e-7 * scale)
    up = made.run.solution.reactions[..., 1]
    assert up[one][::-1] == pytest.approx(up[other], abs=1e-7 * scale)


@settings(max_examples=8, deadline=None)
@given(st.sampled_from(SCHEMES), st.floats(5.0, 40.0), st.floats(1.0, 2.0))
def test_more_of_every_gravity_load_never_makes_the_worst_ratio_smaller(scheme, dead, more):
    """No wind, so nothing relieves: every utilisation of one truss grows with its loads."""

    def loaded(factor):
        loads = {"roof_dead": f"{dead * factor} psf", "roof_dead_least": "0 psf", "roof_live": f"{21 * factor} psf"}
        return at(scheme, site=CALM, loads=loads).outcome

    small, large = loaded(1.0), loaded(more)
    assert np.all(large.utilisation.value >= small.utilisation.value - 1e-9)
    assert float(large.reactions.down.value.max()) >= float(small.reactions.down.value.max()) - 1e-6


@pytest.mark.parametrize("scheme", SCHEMES)
def test_a_case_of_zero_load_changes_nothing_but_the_count_of_combinations(scheme):
    nothing = {"name": "nothing", "action": "L", "loads": [{"surface": "ceiling", "kind": "plan", "pressure": "0 psf"}]}
    bare, with_it = at(scheme), at(scheme, loads={"case": [nothing]})
    assert with_it.outcome.utilisation.value == pytest.approx(bare.outcome.utilisation.value, rel=1e-12)
    assert len(with_it.run.combinations.names) >= len(bare.run.combinations.names)


# --- a scheme file of the user's own, end to end --------------------------------------------------------------------

COUNTY = """
title = "County rules"
load_standard = "ASCE 7-22"
timber_standard = "NDS 2018 ASD"
source = "county ordinance"
durations = [
    { name = "permanent", actions = ["D"] },
    { name = "ten years", actions = ["L"] },
    { name = "two months", actions = ["S"] },
    { name = "seven days", actions = ["Lr"] },
    { name = "ten minutes", actions = ["W"] },
]
[[strength]]
clause = "1"
expression = "D + L + (Lr or S)"
[[strength]]
clause = "2"
expression = "0.6D + W"
dead = "least"
[[deflection]]
kind = "total"
clause = "3"
expression = "D + L + S"
"""


def county_job(folder: Path, scheme: str) -> Path:
    (folder / "county.toml").write_text(scheme, "utf-8")
    path = folder / "job.toml"
    path.write_text(TEXT.replace('"asce7-22-asd"', '"./county.toml"'), "utf-8")
    return path


def test_a_job_under_a_scheme_of_the_users_own(tmp_path, capsys):
    path = county_job(tmp_path, COUNTY)
    assert main(["quote", str(path), "-o", str(tmp_path / "book.xlsx")]) in (0, 1)
    assert (tmp_path / "book.xlsx").stat().st_size > 5000
    assert main(["envelope", str(path), "--json", "-"]) in (0, 1)
    out = capsys.readouterr().out
    assert '"D + L + S(balanced)"' in out
    assert '"0.6D(least) + W(left 1, +i)"' in out


def test_a_bad_scheme_file_is_one_clear_error(tmp_path, capsys):
    path = county_job(tmp_path, COUNTY.replace("0.6D + W", "0.6D + Q"))
    assert main(["quote", str(path), "-o", str(tmp_path / "book.xlsx")]) == 2
    told = capsys.readouterr().err.strip().splitlines()
    assert len(told) == 1
    assert told[0].startswith(
        "job.toml [standard] scheme: county.toml [[strength]] 2 expression '0.6D + Q': 'Q' is not an"
    )
    assert not (tmp_path / "book.xlsx").exists()


def test_the_truss_of_these_tests_is_as_long_as_they_say():
    assert float(design().run.truss.xy[:, 0].max()) > LENGTH * 0.3048
