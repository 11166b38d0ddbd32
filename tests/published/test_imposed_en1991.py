"""Imposed loads of EN 1991-1-1:2002: category H and its walking person, the loft."""

import numpy as np
import pytest

from rooftruss.errors import OutOfScopeError
from rooftruss.loads.imposed_en1991 import CLAUSE, category_h, loft_cases, roof_live_cases
from rooftruss.loads.roof import Roof
from rooftruss.loads.walked import TOP, stops
from rooftruss.shapes.catalogue import Layout, place
from rooftruss.shapes.outline import Outline
from tests.en_jobs import barn

ROOF = Roof(
    pitch=np.asarray(0.5),
    span=np.asarray(8.0),
    bearing_span=np.asarray(7.9),
    overhang=np.asarray(0.5),
    rise=np.asarray(1.975),
    spacing=np.asarray(0.6),
)


def test_category_h():
    # EN 1991-1-1, Table 6.10: q_k 0.4 kN/m2 within 0.0 to 1.0, Q_k 1.0 kN within 0.9 to 1.5
    assert category_h("q") == pytest.approx((400.0, 0.0, 1000.0))
    assert category_h("Q") == pytest.approx((1000.0, 900.0, 1500.0))


def test_roof_is_loaded_in_full_and_by_halves():
    cases = roof_live_cases(ROOF, np.asarray(400.0))
    assert [(c.short, [load.surface for load in c.loads]) for c in cases] == [
        ("full", ["left tail", "left slope", "right slope", "right tail"]),
        ("left", ["left tail", "left slope"]),
        ("right", ["right slope", "right tail"]),
    ]
    assert {c.action for c in cases} == {"Lr"}
    assert {(load.kind, float(load.pressure)) for c in cases for load in c.loads} == {("plan", 400.0)}


def test_no_imposed_load_no_case():
    assert roof_live_cases(ROOF, np.asarray(0.0)) == []
    assert loft_cases(np.asarray(0.0)) == []


def test_a_roof_in_use_is_refused():
    with pytest.raises(OutOfScopeError, match=r"roof_live 1\.5 kN/m2: EN 1991-1-1, Table 6\.10 gives up to 1 kN/m2"):
        roof_live_cases(ROOF, np.asarray(1500.0))


def test_loft_loads_the_bottom_chord():
    (case,) = loft_cases(np.asarray(250.0))
    assert case.action == "L"
    assert [(load.surface, load.kind, float(load.pressure)) for load in case.loads] == [("ceiling", "plan", 250.0)]


def fink(tails: bool = True):
    layout = Layout(shape="fink", panels=4, tails=tails, raised_heel=False)
    zero = np.asarray(0.0)
    outline = Outline(
        span=np.asarray(8.0),
        pitch=np.asarray(0.5),
        bottom_pitch=zero,
        heel=zero,
        overhang=np.asarray(0.5 if tails else 0.0),
    )
    return place(layout, outline, 0.1)


def walk(truss):
    """Stops of the person of the recommended Q_k on the top chord."""
    return stops(truss, TOP, np.asarray(1000.0), action="Lr", what="person on roof", symbol="Q_k", clause=CLAUSE)


def test_person_walks_over_every_panel():
    truss = fink()
    points = walk(truss)
    x = [float(p.x) for p in points]
    # tail ends, tail middles, quarter points, ridge, and the middle of each of the four panels; the wall below a heel
    # takes the person there by itself
    assert sorted(x) == pytest.approx([-0.5, -0.25, 1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.25, 8.5])
    assert {float(p.force) for p in points} == {1000.0}
    assert {p.case.action for p in points} == {"Lr"}
    assert len({p.case.name for p in points}) == len(points)


def test_the_person_of_a_job():
    # EN 1991-1-1, Table 6.10: Q_k = 1.0 kN where the job says nothing, and the assumptions say so
    assert barn().trusses[0].loads.maintenance_load == pytest.approx(category_h("Q")[0])
    places = {a.place: a.text for a in barn().assumptions}
    assert places["[loads] maintenance_load"].startswith("a person on the roof, 1 kN at every panel point")
    assert not any("no point load is walked along the top chord" in text for text in places.values())


def test_walk_without_tails_or_without_a_person():
    assert len(walk(fink(tails=False))) == 7
    assert stops(fink(), TOP, np.asarray(0.0), action="Lr", what="", symbol="", clause="") == []
