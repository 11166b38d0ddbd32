"""Restraint lengths and deflection limits."""

import numpy as np
import pytest

from rooftruss.basis.job import Restraint
from rooftruss.errors import JobError
from rooftruss.timber.deflection import ceilings, horizontal_limit, limit_ratio
from rooftruss.timber.restraint import restraint_lengths
from rooftruss.units import INCH

ROLES = ("tail", "top chord", "top chord", "bottom chord", "bottom chord", "web")
LENGTH = np.array([0.5, 2.0, 3.0, 2.5, 1.5, 1.8])


def lengths(*kinds):
    return restraint_lengths(LENGTH, ROLES, [k if isinstance(k, Restraint) else Restraint(kind=k) for k in kinds])


def test_sheathing_holds_the_outer_edge_of_each_chord():
    found = lengths(*["sheathed"] * 5, "none")
    assert found.le_weak.tolist() == [0, 0, 0, 0, 0, 1.8]
    assert found.lu_positive.tolist() == [0, 0, 0, 2.5, 1.5, 1.8]  # sagging compresses the upper edge
    assert found.lu_negative.tolist() == [0.5, 2.0, 3.0, 0, 0, 1.8]


def test_panel_points_do_not_hold_a_chord_across_the_plane():
    found = lengths("none", "none", "none", "midpoint", "third points", "third points")
    assert found.le_weak == pytest.approx([0.5, 5.0, 5.0, 2.0, 4 / 3, 0.6])
    assert found.lu_positive == pytest.approx(found.le_weak)
    assert found.lu_negative == pytest.approx(found.le_weak)


def test_a_spacing_may_span_panels_but_not_the_chord():
    found = lengths(*[Restraint(kind="spacing", spacing=3.05)] * 6)
    assert found.le_weak == pytest.approx([0.5, 3.05, 3.05, 3.05, 3.05, 1.8])


def test_batches():
    one = lengths(*["sheathed"] * 5, "midpoint")
    batch = restraint_lengths(
        np.stack([LENGTH, 2 * LENGTH])[None], ROLES, [*[Restraint(kind="sheathed")] * 5, Restraint(kind="midpoint")]
    )
    for alone, together in zip(one, batch, strict=True):
        assert together[0] == pytest.approx(np.stack([alone, 2 * alone]))


@pytest.mark.parametrize(
    ("restraint", "message"),
    [
        (Restraint(kind="sheathed"), "restraint 'sheathed' is for chords, not for a web"),
        (Restraint(kind="mid point"), "did you mean 'midpoint'"),
        (Restraint(kind="spacing"), "needs the distance between restraints"),
    ],
)
def test_wrong_restraint(restraint, message):
    with pytest.raises(JobError, match=message):
        restraint_lengths(np.array([1.0]), ("web",), [restraint])


def test_deflection_limits():
    # IBC 2021 Table 1604.3, roof members: L or Lr, S or W, D + L
    found = {c: tuple(limit_ratio(c, k) for k in ("live", "wind_snow", "total")) for c in ceilings()}
    assert found == {"plaster": (360, 360, 240), "non-plaster": (240, 240, 180), "none": (180, 180, 120)}
    assert horizontal_limit() == pytest.approx(1.25 * INCH)
    with pytest.raises(JobError, match=r"\[deflection\] ceiling: 'gypsum' is not known"):
        limit_ratio("gypsum", "live")
    with pytest.raises(JobError, match="did you mean 'total'"):
        limit_ratio("none", "totel")
