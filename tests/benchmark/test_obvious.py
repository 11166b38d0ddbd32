"""The obvious program and the package find the same utilisations; only then may their times be compared."""

from dataclasses import replace

import numpy as np
import pytest

from rooftruss.basis.job import Restraint, TrussSpec
from rooftruss.design.family import family_of, unbatched
from rooftruss.design.stages import run
from tests.benchmark.obvious import utilisations
from tests.benchmark.trusses import choice, finks, house


def loosely_held(truss: TrussSpec) -> TrussSpec:
    """Chords that can buckle and twist: nothing sheathed, the bottom chord held at its ends only."""
    held = {"top chord": Restraint(kind="spacing", spacing=1.2), "bottom chord": Restraint(kind="none")}
    groups = {g: replace(t, restraint=held.get(g, t.restraint)) for g, t in truss.timber.groups.items()}
    return replace(truss, timber=replace(truss.timber, groups=groups))


TRUSSES = {"as the house": finks(1)[0], "loosely held": loosely_held(finks(8)[7])}


@pytest.mark.parametrize("truss", TRUSSES.values(), ids=TRUSSES)
def test_every_member_under_every_combination(truss):
    done = run(unbatched(family_of(house(), [truss])), choice())
    found = np.array(utilisations(done))
    assert found.shape == done.checks.utilisation.shape
    np.testing.assert_allclose(found, done.checks.utilisation, rtol=1e-6, atol=1e-9)
