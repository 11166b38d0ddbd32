"""From a truss of the job to its layout and coordinates."""

from itertools import combinations, pairwise
from math import hypot

import numpy as np
import pytest

from rooftruss.errors import JobError
from rooftruss.shapes.catalogue import panel_count, topology
from rooftruss.shapes.forming import LEAST_HEEL, bottom_pitch_of, dimensions, form, layout_of
from rooftruss.shapes.webbing import SHAPES
from tests.jobs import spec

FOOT, INCH = 0.3048, 0.0254


def test_the_span_of_the_analysis_runs_between_the_middles_of_the_bearings():
    size = dimensions([spec(), spec("T3")])
    assert size.bearing_span == pytest.approx([(28 * 12 - 3.5) * INCH, (14 * 12 - 3.5) * INCH])
    assert size.tail == pytest.approx([(16 + 1.75) * INCH, (12 + 1.75) * INCH])
    assert np.all(np.isnan(size.heel_height))


def test_a_scissor_truss_takes_half_the_roof_pitch_when_no_bottom_pitch_is_given():
    assert bottom_pitch_of(spec("T2", bottom_pitch=None)) == pytest.approx(7 / 24)
    assert bottom_pitch_of(spec("T2")) == pytest.approx(0.25)
    assert bottom_pitch_of(spec("T1")) == 0.0


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"mark": "T1", "bottom_pitch": 0.1}, "bottom_pitch: a fink truss has a level bottom chord"),
        ({"mark": "T2", "bottom_pitch": 0.55}, "bottom_pitch: 6.60/12 under a roof of 7.00/12"),
        ({"mark": "T2", "bottom_pitch": -0.1}, "it must rise"),
        ({"mark": "T1", "panels": 5}, "panels: 5 top-chord panels; fink trusses are built with 4, 6, 8"),
        ({"mark": "T1", "shape": "finck"}, "shape 'finck' is not in the catalogue; did you mean 'fink'?"),
        (
            {"mark": "T3", "longest_stock": 7 * FOOT},
            "longest_stock: 7 ft (2.13 m), but a chord piece between panel points is ",
        ),
        ({"mark": "T2", "longest_stock": 3 * FOOT}, "longest_stock: 3 ft (0.914 m), but a chord piece"),
    ],
)
def test_what_does_not_fit_is_said_with_its_key(changes, message):
    with pytest.raises(JobError) as error:
        layout_of(spec(**changes))
    assert message in str(error.value)


def test_panels_are_as_few_as_the_longest_panel_allows():
    """The house's fink: 4 panels up to twice the longest panel; never more than the shape has."""
    counts = [layout_of(spec(span=feet * FOOT, longest_stock=99.0)).panels for feet in (12, 28, 40, 56, 90)]
    assert counts[0] == 4
    assert counts == sorted(counts)
    assert counts[-1] == 8
    assert layout_of(spec(panels=8)).panels == 8


def pieces(cuts: tuple[int, ...], places: list[float]) -> list[float]:
    stops = [0, *cuts, len(places) - 1]
    return [places[b] - places[a] for a, b in pairwise(stops)]


@pytest.mark.parametrize("shape", sorted(SHAPES))
@pytest.mark.parametrize("overhang", [0.0, 0.4])
@pytest.mark.parametrize("feet", [18, 24, 30, 40, 52])
def test_splices_are_symmetric_short_enough_and_as_few_as_possible(shape, overhang, feet):
    """Against every symmetric choice of panel points."""
    truss = spec("T2" if shape == "scissor" else "T1", shape=shape, span=feet * FOOT, overhang=overhang)
    stock, slope = truss.timber.longest_stock, hypot(1.0, truss.pitch)
    span = truss.span - truss.bearing
    tail = (overhang + truss.bearing / 2) * slope if overhang else 0.0
    top, bottom = SHAPES[shape].panel_points(panel_count(SHAPES[shape], span * slope / 2, None))
    places = [f * span * slope + (tail if k else 0.0) for k, f in enumerate(top)]
    places[-1] += tail
    along = [f * span * hypot(1.0, bottom_pitch_of(truss)) for f in bottom]
    if max(b - a for line in (places, along) for a, b in pairwise(line)) > stock:
        with pytest.raises(JobError, match="longest_stock"):
            layout_of(truss)
        return
    layout = layout_of(truss)
    _require_best(layout.top_splices, places, stock, joint=len(top) // 2)
    _require_best(layout.bottom_splices, along, stock, joint=len(bottom) // 2 if SHAPES[shape].sloping_bottom else None)


def _require_best(cuts: tuple[int, ...], places: list[float], stock: float, joint: int | None) -> None:
    """`joint` is a panel point at which the chord is parted anyway."""
    last = len(places) - 1
    parted = () if joint is None else (joint,)
    assert set(cuts) == {last - k for k in cuts}
    assert not set(cuts) & set(parted)
    assert max(pieces(tuple(sorted({*cuts, *parted})), places)) <= stock + 1e-9
    for count in range(len(cuts)):
        for fewer in combinations(range(1, last), count):
            if set(fewer) == {last - k for k in fewer}:
                assert max(pieces(tuple(sorted({*fewer, *parted})), places)) > stock, (cuts, fewer)


def test_a_splice_passes_no_moment():
    layout = layout_of(spec(shape="howe", panels=8, span=40 * FOOT))
    made = topology(layout)
    assert layout.bottom_splices
    for cut in layout.bottom_splices:
        left, right = (made.members[made.names.index(f"bottom {k}")] for k in (cut, cut + 1))
        assert left.pinned_end
        assert right.pinned_start


def test_coordinates_of_a_fink_truss():
    """Span 8 m between bearing centres, pitch 1:2, overhang 0.5 m from there: by hand."""
    truss = spec(span=8.0889, bearing=0.0889, overhang=0.5 - 0.0889 / 2, pitch=0.5, panels=4)
    made = form(layout_of(truss), dimensions([truss]), 0.14, 0.14).one(0)
    place = dict(zip(made.topology.nodes, made.xy.tolist(), strict=True))
    expected = [(0, 0), (8 / 3, 0), (16 / 3, 0), (8, 0), (2, 1), (4, 2), (6, 1), (-0.5, -0.25), (8.5, -0.25)]
    assert list(place.values()) == [pytest.approx(point, abs=1e-12) for point in expected]


@pytest.mark.parametrize(("top", "bottom"), [(0.0889, 0.0889), (0.184, 0.14)])
def test_a_raised_heel_is_measured_from_the_bearing_to_the_upper_edge_of_the_roof(top, bottom):
    truss = spec(heel_height=0.6)
    layout = layout_of(truss)
    assert layout.raised_heel
    made = form(layout, dimensions([truss]), top, bottom).one(0)
    heel = made.start_xy[made.topology.names.index("top 1")]
    assert heel[0] == 0.0
    upper_edge = heel[1] + top / 2 / np.cos(np.arctan(truss.pitch))
    at_outside = upper_edge - truss.pitch * truss.bearing / 2  # the heel height is that of the outside of the bearing
    assert at_outside - (-bottom / 2) == pytest.approx(0.6)


def test_a_heel_that_is_too_low_is_refused_and_the_height_named_is_enough():
    truss = spec(heel_height=0.2)
    with pytest.raises(JobError, match=r"heel_height: 7\.874 in \(200 mm\) leaves no room") as error:
        form(layout_of(truss), dimensions([truss]), 0.184, 0.14)
    least = float(str(error.value).split("at least ")[1].split(" in")[0]) * 0.0254
    made = form(layout_of(truss), dimensions([spec(heel_height=least + 0.001)]), 0.184, 0.14)
    assert made.xy[..., :, 1].max() > LEAST_HEEL


def test_a_batch_is_formed_as_its_trusses_one_by_one():
    trusses = [spec(span=span, pitch=pitch, panels=4) for span, pitch in ((7.0, 0.3), (8.0, 0.5), (9.5, 0.4))]
    depths = np.array([0.089, 0.14, 0.184])
    batch = form(layout_of(trusses[0]), dimensions(trusses), depths, depths)
    for k, truss in enumerate(trusses):
        alone = form(layout_of(truss), dimensions([truss]), depths[k], depths[k])
        assert np.array_equal(batch.xy[k], alone.xy[0])
        assert batch.one(k).bearing == truss.bearing
