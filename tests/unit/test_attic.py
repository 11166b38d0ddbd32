"""Live load of the attic: where the webs leave room to store, and what it stands beside."""

import numpy as np
import pytest

from rooftruss.design.batch import check_many
from rooftruss.errors import JobError
from rooftruss.loads.attic import storage_portions
from tests.custom_jobs import FOOT, KING, KING_MEMBERS, LENGTH, design, job, rows

STORAGE = {"attic": "limited storage"}
HIGH, WIDE = 3.5, 2.0  # the room: 42 in by 24 in


def portions(made) -> list[list[float]]:
    """Stretches with room [ft] from the left bearing centre."""
    return [[float(x) / FOOT for x in pair] for pair in storage_portions(made.run.truss)]


def live(made, name="ceiling live, storage") -> float:
    """Vertical reaction under the ceiling live load [lbf]."""
    return float(made.run.solution.reactions[made.run.cases.names.index(name), :, 1].sum()) / 4.4482216152605


def test_the_middle_bay_of_a_fink_truss_has_room_where_its_webs_stand_apart():
    """Bay of a third of the span under the peak, a triangle: at 42 in it is narrower by 42 in over the height."""
    made = design(loads=STORAGE)
    height = LENGTH / 4
    width = LENGTH / 3 * (1 - HIGH / height)
    assert width > WIDE
    assert portions(made) == [pytest.approx([LENGTH / 2 - width / 2, LENGTH / 2 + width / 2])]
    assert live(made) == pytest.approx(10 * 2 * LENGTH + (20 - 10) * 2 * width)


def test_a_low_or_closely_webbed_truss_has_none():
    """16 ft of 6/12 rise 47 in: at 42 in the bay is 7 in wide. Struts that end under 42 in close what they cross."""
    low = design(truss={"span": "16 ft"}, loads=STORAGE)
    struts = design(truss=rows(KING, KING_MEMBERS, {"A": "hv", "C": "v"}, overhang="0 in"), loads=STORAGE)
    assert portions(low) == portions(struts) == []
    assert live(low) == pytest.approx(10 * 2 * (16 - 3.5 / 12))


def room(side=0.3, tie=0.24):
    """Posts at a share of the span and a tie between them, under a roof of 9.6/12; no web but these."""
    nodes = {
        "A": (0, 0),
        "B": (side * LENGTH, 0),
        "C": ((1 - side) * LENGTH, 0),
        "D": (LENGTH, 0),
        "E": (side * LENGTH, 0.8 * side * LENGTH),
        "F": (LENGTH / 2, 0.4 * LENGTH),
        "G": ((1 - side) * LENGTH, 0.8 * side * LENGTH),
        "H": (side * LENGTH, tie * LENGTH),
        "I": ((1 - side) * LENGTH, tie * LENGTH),
    }
    split = abs(tie - 0.8 * side) > 1e-9
    ends = ("H", "I") if split else ("E", "G")
    posts = [("B", "H", "s"), ("H", "E", "e"), ("C", "I", "s"), ("I", "G", "e")] if split else []
    posts = posts or [("B", "E", "se"), ("C", "G", "se")]
    kept = nodes if split else {n: p for n, p in nodes.items() if n not in "HI"}
    members = [
        ("top chord", "A", "E", "s"),
        ("top chord", "E", "F", "e"),
        ("top chord", "F", "G", "s"),
        ("top chord", "G", "D", "e"),
        ("bottom chord", "A", "B", "s"),
        ("bottom chord", "B", "C", ""),
        ("bottom chord", "C", "D", "e"),
        *(("web", *post) for post in posts),
        ("web", *ends, "se"),
    ]
    return rows(kept, members, {"A": "hv", "D": "v"}, pitch="9.6/12", overhang="0 in")


def test_a_room_between_posts_and_the_corners_beside_it():
    """The roof is 42 in high 4.375 ft from the bearing; from there to the post at 7.11 ft are 2.74 ft, over 24 in."""
    eave, post = HIGH / 0.8, 0.3 * LENGTH
    made = design(truss=room(), loads=STORAGE)
    assert portions(made) == [
        pytest.approx([eave, post]),
        pytest.approx([post, LENGTH - post]),
        pytest.approx([LENGTH - post, LENGTH - eave]),
    ]
    assert live(made) == pytest.approx(10 * 2 * LENGTH + 10 * 2 * (LENGTH - 2 * eave))


def test_a_tie_under_42_inches_closes_the_room():
    under = design(truss=room(tie=(HIGH - 0.01) / LENGTH), loads=STORAGE)
    above = design(truss=room(tie=(HIGH + 0.01) / LENGTH), loads=STORAGE)
    assert len(portions(under)) == 2
    assert len(portions(above)) == 3


@pytest.mark.parametrize(("bottom", "count"), [("2/12", 1), ("2.1/12", 0)])
def test_a_bottom_chord_over_2_on_12_stores_nothing(bottom, count):
    made = design(truss={"shape": "scissor", "pitch": "12/12", "bottom_pitch": bottom, "span": "30 ft"}, loads=STORAGE)
    assert (len(portions(made)) > 0) == bool(count)


def test_a_batch_has_the_room_of_each_truss():
    """Spans with and without room in one batch give what each gives by itself."""
    specs = [job(loads=STORAGE, truss={"span": s}).trusses[0] for s in ("16 ft", "24 ft", "20 ft")]
    sizes = [{"top chord": ("2x6", "DF-L SS"), "bottom chord": ("2x6", "DF-L SS"), "web": ("2x4", "DF-L No.2")}]
    together = check_many(job(loads=STORAGE), specs, sizes)
    apart = [check_many(job(loads=STORAGE), [spec], sizes) for spec in specs]
    assert together.utilisation == pytest.approx([float(one.utilisation[0]) for one in apart], rel=1e-9)
    assert together.down == pytest.approx([float(one.down[0]) for one in apart], rel=1e-9)


# --- words and options ----------------------------------------------------------------------------------------------


def live_together(made) -> bool:
    """Whether ceiling and roof live load act in one combination."""
    actions = [h.action for h in made.run.cases.heads]
    acting = made.run.combinations.factors[made.run.combinations.strength] > 0
    L, Lr = (acting[:, [a == x for a in actions]].any(axis=1) for x in ("L", "Lr"))
    return bool(np.any(L & Lr))


def texts(made) -> list[str]:
    return [a.text for a in made.assumptions]


def test_an_attic_without_storage_is_not_loaded_together_with_the_roof():
    assert live_together(design())
    assert not live_together(design(loads={"attic": "without storage"}))
    assert live_together(design(loads={"attic": "without storage"}, standard={"ceiling_live": "with roof live"}))
    assert live_together(design(loads=STORAGE))
    words = texts(job(loads={"attic": "without storage"}))
    assert "live load of the ceiling acts apart from roof live, as for an attic without storage" in words
    assert any(t.startswith("ceiling_live taken as the job gives it") for t in texts(job()))


def test_a_truss_with_another_attic_than_the_job_says_so():
    made = job(loads={"attic": "without storage"}, truss=STORAGE)
    assert made.scheme_options["ceiling_live"] == "apart from roof live"
    assert made.trusses[0].loads.scheme_options == (("ceiling_live", "with roof live"),)
    assert any("option of the scheme for this truss: 'with roof live', by its attic" in t for t in texts(made))
    assert live_together(design(loads={"attic": "without storage"}, truss=STORAGE))


def test_stored_things_take_the_time_effect_of_storage():
    """NDS Table N3: 1.2D + 1.6L + ... has lambda 0.7 where L is from storage, 0.8 where it is from people."""
    lrfd = {"scheme": "asce7-22-lrfd"}
    for attic, effect in (("limited storage", 0.7), ("without storage", 0.8)):
        made = design(standard=lrfd, loads={"attic": attic}).run.combinations
        (found,) = {float(e) for n, e in zip(made.names, made.time_effects, strict=True) if n == "1.2D + 1.6L"}
        assert found == effect


@pytest.mark.parametrize(
    ("loads", "text"),
    [
        ({"attic": "none"}, '[[truss]] T1 attic: is "none", so ceiling_live must be "0 psf"'),
        ({"attic": "storage"}, "[loads] attic: 'storage' is not a choice here; did you mean"),
        ({**STORAGE, "ceiling_live": "5 psf"}, "[[truss]] T1 ceiling_live: is under 10 psf, the least beside stored"),
        ({**STORAGE, "attic_storage_live": "8 psf"}, "[[truss]] T1 attic_storage_live: is less than ceiling_live"),
    ],
)
def test_what_does_not_fit_the_attic_is_told(loads, text):
    with pytest.raises(JobError) as error:
        job(loads=loads)
    assert text in str(error.value)


def test_no_attic_needs_no_load():
    made = design(loads={"attic": "none", "ceiling_live": "0 psf"})
    assert "L" not in {h.action for h in made.run.cases.heads}
