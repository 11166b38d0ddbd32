"""From the trusses of a job to layouts and coordinates: panel counts, splices, raised heels."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import hypot

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import TrussSpec
from rooftruss.errors import JobError
from rooftruss.shapes.catalogue import Layout, find_shape, panel_count, place
from rooftruss.shapes.catalogue import topology as topology_in_catalogue
from rooftruss.shapes.custom_layout import CUSTOM, CustomLayout, custom_layout, made_of
from rooftruss.shapes.outline import Outline
from rooftruss.shapes.truss import Topology, Truss
from rooftruss.units import both

Array = NDArray[np.float64]
LEAST_HEEL = 0.05  # a raised heel lower than this leaves no room for its post [m]; below, the chords meet directly
SCISSOR_SHARE = 0.5  # bottom pitch of a scissor truss when none is given, as a share of the roof pitch


@dataclass(frozen=True, slots=True, kw_only=True)
class Dimensions:
    """Dimensions of a batch of trusses, each an array (...,); lengths [m], pitches rise over run."""

    span: Array  # out to out
    pitch: Array
    spacing: Array
    overhang: Array  # beyond the outside of the bearing
    bearing: Array
    bottom_pitch: Array
    heel_height: Array  # NaN where the chords meet at the heel
    plies: Array

    @property
    def bearing_span(self) -> Array:
        """Distance between bearing centres."""
        return self.span - self.bearing

    @property
    def tail(self) -> Array:
        """Plan length of roof beyond the bearing centre; half the bearing where there is no overhang."""
        return self.overhang + self.bearing / 2


AnyLayout = Layout | CustomLayout


def topology_of(layout: AnyLayout) -> Topology:
    """Names and connectivity of a layout."""
    return made_of(layout).topology if isinstance(layout, CustomLayout) else topology_in_catalogue(layout)


def bearing_lengths(layout: AnyLayout, truss: Truss) -> Array:
    """Length of every bearing (..., support) [m]; inner bearings of a custom truss may have their own."""
    made = truss.topology
    shape = (*truss.bearing.shape, len(made.supports))
    if not isinstance(layout, CustomLayout):
        return np.broadcast_to(truss.bearing[..., None], shape)
    given = {name: length for name, _, _, length in layout.supports}
    return np.broadcast_to(np.array([given[made.nodes[s.node]] for s in made.supports]), shape)


def bottom_pitch_of(spec: TrussSpec) -> float:
    """Bottom chord pitch; a scissor truss without one takes half the roof pitch, a custom truss has none of its own.

    Raises JobError when the chords would meet or when a flat-bottomed shape is given a bottom pitch.
    """
    if spec.shape == CUSTOM:
        return 0.0
    if not find_shape(spec.shape).sloping_bottom:
        if spec.bottom_pitch:
            raise JobError(
                f"bottom_pitch: a {spec.shape} truss has a level bottom chord; leave it out or use 'scissor'"
            )
        return 0.0
    pitch = SCISSOR_SHARE * spec.pitch if spec.bottom_pitch is None else spec.bottom_pitch
    if not 0 < pitch < 0.9 * spec.pitch:
        raise JobError(
            f"bottom_pitch: {12 * pitch:.2f}/12 under a roof of {12 * spec.pitch:.2f}/12; it must rise, and stay below "
            "nine tenths of the roof pitch for the webs to have any depth"
        )
    return pitch


def dimensions(specs: Sequence[TrussSpec]) -> Dimensions:
    """Dimensions of a list of trusses as arrays (truss,)."""
    column = {
        name: np.array([getattr(s, name) for s in specs], dtype=float)
        for name in ("span", "pitch", "spacing", "overhang", "bearing", "plies")
    }
    heel = np.array([np.nan if s.heel_height is None else s.heel_height for s in specs])
    return Dimensions(**column, bottom_pitch=np.array([bottom_pitch_of(s) for s in specs]), heel_height=heel)


def layout_of(spec: TrussSpec) -> AnyLayout:
    """Panel count, tails, heel and splices of one truss, or its joints and members where the shape is custom.

    Raises JobError naming the key that does not fit.
    """
    if spec.shape == CUSTOM:
        return custom_layout(spec)
    shape = find_shape(spec.shape)
    run = (spec.span - spec.bearing) / 2
    slope = hypot(1.0, spec.pitch)
    panels = panel_count(shape, run * slope, spec.panels)
    top, bottom = shape.panel_points(panels)
    tail = spec.overhang + spec.bearing / 2 if spec.overhang > 0 else 0.0
    stock = spec.timber.longest_stock
    bottom_slope = hypot(1.0, bottom_pitch_of(spec))
    return Layout(
        shape=shape.name,
        panels=panels,
        tails=spec.overhang > 0,
        raised_heel=spec.heel_height is not None,
        top_splices=_top_splices(top, 2 * run, slope, tail, stock, units=spec.units),
        bottom_splices=_bottom_splices(
            bottom, 2 * run, bottom_slope, stock, split=shape.sloping_bottom, units=spec.units
        ),
    )


def _too_long(piece: float, stock: float, units: str) -> JobError:
    longest, needed = (both(length, "length", units) for length in (stock, piece))
    return JobError(
        f"longest_stock: {longest}, but a chord piece between panel points is {needed} long; "
        "allow longer stock or more panels"
    )


def _greedy(places: Sequence[float], stock: float, units: str) -> list[int]:
    """Fewest cuts at `places` (ascending, first and last are the ends) so that no piece exceeds the stock."""
    cuts: list[int] = []
    start = 0
    for k in range(1, len(places)):
        if places[k] - places[k - 1] > stock + 1e-9:
            raise _too_long(places[k] - places[k - 1], stock, units)
        if places[k] - places[start] > stock + 1e-9:
            start = k - 1
            cuts.append(start)
    return cuts


def _top_splices(
    points: Sequence[float], span: float, slope: float, tail: float, stock: float, *, units: str
) -> tuple[int, ...]:
    """Panel points of the top chord that are splices, the same on both slopes; counted from the peak down."""
    peak = (len(points) - 1) // 2
    if (span / 2 + tail) * slope <= stock:
        return ()
    places = [(0.5 - f) * span * slope for f in reversed(points[: peak + 1])]
    places[-1] += tail * slope
    left = [peak - cut for cut in _greedy(places, stock, units)]
    return tuple(sorted(left + [2 * peak - k for k in left]))


def _bottom_splices(
    points: Sequence[float], span: float, slope: float, stock: float, *, split: bool, units: str
) -> tuple[int, ...]:
    """Panel points of the bottom chord that are splices, symmetric; the fewest that the stock allows."""
    last = len(points) - 1
    places = [f * span * slope for f in points]
    if not split and places[-1] <= stock + 1e-9:
        return ()
    found: list[tuple[int, ...]] = []
    for middle in range(last // 2, 0, -1):  # the last splice left of, or at, the centre
        if places[last - middle] - places[middle] > stock + 1e-9 or (split and 2 * middle != last):
            continue
        left = [*_greedy(places[: middle + 1], stock, units), middle]
        found.append(tuple(sorted({*left, *(last - k for k in left)})))
    if not found:
        raise _too_long(max(b - a for a, b in pairwise(places)), stock, units)
    best = min(found, key=len)
    return tuple(k for k in best if not (split and 2 * k == last))


def heel_offset(size: Dimensions, top_depth: Array | float, bottom_depth: Array | float) -> Array:
    """Height of the top-chord over the bottom-chord centre line above a bearing with a raised heel (...,)."""
    above_centre = size.heel_height + size.pitch * size.bearing / 2  # the job gives it at the outside of the bearing
    return np.asarray(above_centre - top_depth / 2 * np.hypot(1.0, size.pitch) - np.asarray(bottom_depth) / 2)


def form(layout: AnyLayout, size: Dimensions, top_depth: Array | float, bottom_depth: Array | float) -> Truss:
    """The layout at the dimensions of a batch.

    A custom truss has its own coordinates, the same in the whole batch. A raised heel is measured from the bearing to
    the upper edge of the top chord at the outside of the bearing, so the chord depths [m] (...,) enter.
    Raises JobError when it leaves no room for a post.
    """
    if isinstance(layout, CustomLayout):
        made, batch = made_of(layout), np.shape(size.span)
        xy = np.broadcast_to(made.xy, (*batch, *made.xy.shape))
        return Truss(topology=made.topology, xy=xy, bearing=np.broadcast_to(np.asarray(size.bearing, float), batch))
    heel = np.zeros(())
    if layout.raised_heel:
        heel = heel_offset(size, top_depth, bottom_depth)
        if np.min(heel) < LEAST_HEEL:
            least = float(np.max(size.heel_height - heel)) + LEAST_HEEL
            raise JobError(
                f"heel_height: {both(float(np.min(size.heel_height)), 'size')} leaves no room for a heel post with "
                f"these chord depths; give at least {both(least, 'size')}, or leave it out for chords that meet at the "
                "heel"
            )
    outline = Outline(
        span=size.bearing_span,
        pitch=size.pitch,
        bottom_pitch=size.bottom_pitch,
        heel=heel,
        overhang=size.tail if layout.tails else np.zeros(()),
    )
    return place(layout, outline, size.bearing)
