"""From the trusses of a job to layouts and coordinates: panel counts, splices, raised heels."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import hypot

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import TrussSpec
from rooftruss.errors import JobError
from rooftruss.shapes.catalogue import Layout, find_shape, panel_count, place
from rooftruss.shapes.catalogue import topology as topology_in_catalogue
from rooftruss.shapes.custom import MemberRow, NodeRow, SupportRow, custom_truss
from rooftruss.shapes.outline import Outline
from rooftruss.shapes.truss import Topology, Truss

Array = NDArray[np.float64]
LEAST_HEEL = 0.05  # a raised heel lower than this leaves no room for its post [m]; below, the chords meet directly
CUSTOM = "custom"
FIT = 5e-3  # [m] what the joints of a custom truss may differ from the dimensions of its roof
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


@dataclass(frozen=True, slots=True, kw_only=True)
class CustomLayout:
    """What fixes a truss that is given joint by joint; it stands beside Layout. Rows as shapes.custom takes them."""

    nodes: tuple[NodeRow, ...]
    members: tuple[MemberRow, ...]
    supports: tuple[SupportRow, ...]  # every bearing length filled in
    panels: int  # of the top chord
    tails: bool
    shape: str = CUSTOM
    raised_heel: bool = False  # the joints say where the chords are, whatever their depth


AnyLayout = Layout | CustomLayout


def topology_of(layout: AnyLayout) -> Topology:
    """Names and connectivity of a layout."""
    return _made(layout).topology if isinstance(layout, CustomLayout) else topology_in_catalogue(layout)


@lru_cache(maxsize=64)
def _made(layout: CustomLayout) -> Truss:
    return custom_truss(layout.nodes, layout.members, layout.supports)


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
        return _custom_layout(spec)
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
        top_splices=_top_splices(top, 2 * run, slope, tail, stock),
        bottom_splices=_bottom_splices(bottom, 2 * run, bottom_slope, stock, split=shape.sloping_bottom),
    )


def _custom_layout(spec: TrussSpec) -> CustomLayout:
    """Joints and members of a custom truss, held against the dimensions of the roof that the job gives."""
    given = spec.custom
    if given is None:
        raise JobError(f"shape {CUSTOM!r}: the joints, members and supports are missing")
    roles = [row[1] for row in given.members]
    layout = CustomLayout(
        nodes=given.nodes,
        members=given.members,
        supports=tuple((*row[:3], spec.bearing if row[3] is None else row[3]) for row in given.supports),
        panels=roles.count("top chord"),
        tails="tail" in roles,
    )
    made = _made(layout)
    for role in ("top chord", "bottom chord"):
        if role not in roles:
            raise JobError(f"member: no member has the role {role!r}; a roof truss has a top chord and a bottom chord")
    _check_bearings(layout, made, spec)
    _check_tails(made, spec)
    _check_pieces(made, spec.timber.longest_stock)
    return layout


def _check_bearings(layout: CustomLayout, made: Truss, spec: TrussSpec) -> None:
    """The outer bearings are where the span and the bearing length of the job put them."""
    carrying = [s for s in made.topology.supports if s.vertical]
    if len(carrying) < 2:
        raise JobError("support: one bearing carries the truss; at least two have to, at the ends of the span")
    left, right = (carrying[k].node for k in (0, -1))
    first, last = float(made.xy[left, 0]), float(made.xy[right, 0])
    if abs(first) > FIT or abs(last - first - (spec.span - spec.bearing)) > FIT:
        raise JobError(
            f"span: {spec.span:.3f} m less a bearing of {spec.bearing:.3f} m is {spec.span - spec.bearing:.3f} m, but the "
            f"outer bearings {made.topology.nodes[left]!r} and {made.topology.nodes[right]!r} are "
            f"{last - first:.3f} m apart; joints are at the middle of the bearings"
        )
    for name, _, _, length in layout.supports:
        outer = name in (made.topology.nodes[left], made.topology.nodes[right])
        if outer and abs(length - spec.bearing) > FIT:
            raise JobError(f"support at {name!r}: an outer bearing has the length that the truss gives as bearing")


def _check_tails(made: Truss, spec: TrussSpec) -> None:
    """Tails reach as far as the overhang of the job."""
    end = spec.span - spec.bearing
    tail = spec.overhang + spec.bearing / 2
    tips = {
        m.name: (-float(made.xy[m.start, 0]) if m.surface == "left tail" else float(made.xy[m.end, 0]) - end)
        for m in made.topology.members
        if m.role == "tail"
    }
    if bool(tips) != (spec.overhang > 0):
        raise JobError(f"overhang: {spec.overhang:.3f} m, but the truss has {len(tips)} tails; make the two agree")
    for name, reach in tips.items():
        if abs(reach - tail) > FIT:
            raise JobError(
                f"overhang: {spec.overhang:.3f} m and half a bearing are {tail:.3f} m, but member {name!r} reaches "
                f"{reach:.3f} m beyond the middle of the bearing"
            )


def _check_pieces(made: Truss, stock: float) -> None:
    """No chord piece is longer than the stock; a piece runs on straight through joints where moment passes."""
    chords = [k for k, m in enumerate(made.topology.members) if m.role != "web"]
    before = {made.topology.members[k].end: k for k in chords if not made.topology.members[k].pinned_end}
    length: dict[int, float] = {}
    for k in sorted(chords, key=lambda k: float(made.start_xy[k, 0])):
        member, piece = made.topology.members[k], float(made.length[k])
        last = before.get(member.start)
        if last is not None and not member.pinned_start and _straight(made, last, k):
            piece += length[last]
        length[k] = piece
        if piece > stock + FIT:
            raise JobError(
                f"longest_stock: {stock:.2f} m, but the chord piece that ends with {member.name!r} is {piece:.2f} m "
                "long; allow longer stock, or pin the chord at a joint where it is spliced"
            )


def _straight(made: Truss, one: int, other: int) -> bool:
    a, b = made.direction[one], made.direction[other]
    return bool(abs(a[0] * b[1] - a[1] * b[0]) < 1e-3)


def _too_long(piece: float, stock: float) -> JobError:
    return JobError(
        f"longest_stock: {stock:.2f} m, but a chord piece between panel points is {piece:.2f} m long; "
        "allow longer stock or more panels"
    )


def _greedy(places: Sequence[float], stock: float) -> list[int]:
    """Fewest cuts at `places` (ascending, first and last are the ends) so that no piece exceeds the stock."""
    cuts: list[int] = []
    start = 0
    for k in range(1, len(places)):
        if places[k] - places[k - 1] > stock + 1e-9:
            raise _too_long(places[k] - places[k - 1], stock)
        if places[k] - places[start] > stock + 1e-9:
            start = k - 1
            cuts.append(start)
    return cuts


def _top_splices(points: Sequence[float], span: float, slope: float, tail: float, stock: float) -> tuple[int, ...]:
    """Panel points of the top chord that are splices, the same on both slopes; counted from the peak down."""
    peak = (len(points) - 1) // 2
    if (span / 2 + tail) * slope <= stock:
        return ()
    places = [(0.5 - f) * span * slope for f in reversed(points[: peak + 1])]
    places[-1] += tail * slope
    left = [peak - cut for cut in _greedy(places, stock)]
    return tuple(sorted(left + [2 * peak - k for k in left]))


def _bottom_splices(
    points: Sequence[float], span: float, slope: float, stock: float, *, split: bool
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
        left = [*_greedy(places[: middle + 1], stock), middle]
        found.append(tuple(sorted({*left, *(last - k for k in left)})))
    if not found:
        raise _too_long(max(b - a for a, b in zip(places[:-1], places[1:], strict=True)), stock)
    best = min(found, key=len)
    return tuple(k for k in best if not (split and 2 * k == last))


def heel_offset(size: Dimensions, top_depth: Array | float, bottom_depth: Array | float) -> Array:
    """Height of the top-chord over the bottom-chord centre line above a bearing with a raised heel (...,)."""
    return np.asarray(size.heel_height - top_depth / 2 * np.hypot(1.0, size.pitch) - np.asarray(bottom_depth) / 2)


def form(layout: AnyLayout, size: Dimensions, top_depth: Array | float, bottom_depth: Array | float) -> Truss:
    """The layout at the dimensions of a batch.

    A custom truss has its own coordinates, the same in the whole batch. A raised heel is measured from the bearing to the upper edge of the top chord above the bearing centre, so the
    chord depths [m] (...,) enter. Raises JobError when it leaves no room for a post.
    """
    if isinstance(layout, CustomLayout):
        made, batch = _made(layout), np.shape(size.span)
        xy = np.broadcast_to(made.xy, (*batch, *made.xy.shape))
        return Truss(topology=made.topology, xy=xy, bearing=np.broadcast_to(np.asarray(size.bearing, float), batch))
    heel = np.zeros(())
    if layout.raised_heel:
        heel = heel_offset(size, top_depth, bottom_depth)
        if np.min(heel) < LEAST_HEEL:
            least = float(np.max(size.heel_height - heel)) + LEAST_HEEL
            raise JobError(
                f"heel_height: {float(np.min(size.heel_height)):.3f} m leaves no room for a heel post with these chord "
                f"depths; give at least {least:.3f} m, or leave it out for chords that meet at the heel"
            )
    outline = Outline(
        span=size.bearing_span,
        pitch=size.pitch,
        bottom_pitch=size.bottom_pitch,
        heel=heel,
        overhang=size.tail if layout.tails else np.zeros(()),
    )
    return place(layout, outline, size.bearing)
