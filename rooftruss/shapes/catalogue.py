"""From a shape, its parameters and a stock length to a Topology and a Truss."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from typing import cast

import numpy as np

from rooftruss.basis.tables import read_table
from rooftruss.errors import JobError, nearest
from rooftruss.shapes.outline import Outline
from rooftruss.shapes.truss import Member, Support, Topology, Truss
from rooftruss.shapes.webbing import SHAPES, Point, Shape

LETTERS = "ABCDEFGHIJKLMNOPQRSTUVWXYZ"


def find_shape(name: str) -> Shape:
    """Entry of the catalogue. Raises JobError with the nearest known name."""
    if name not in SHAPES:
        raise JobError(f"shape {name!r} is not in the catalogue; {nearest(name, SHAPES)}")
    return SHAPES[name]


def panel_count(shape: Shape, slope_length: float, asked: int | None) -> int:
    """Number of top-chord panels: as asked, else the fewest whose panels are short enough.

    slope_length is one top chord from heel to peak [m]. Raises JobError for a count the shape does not offer.
    """
    if asked is not None:
        if asked not in shape.panel_counts:
            offered = ", ".join(map(str, shape.panel_counts))
            raise JobError(f"panels: {asked} top-chord panels; {shape.name} trusses are built with {offered}")
        return asked
    longest = longest_panel()
    enough = [n for n in shape.panel_counts if slope_length / (n / 2) <= longest]
    return enough[0] if enough else shape.panel_counts[-1]


@cache
def longest_panel() -> float:
    """Longest top-chord panel that the default panel count may give [m]."""
    rule = read_table("shapes/panel_length").where(quantity="top chord panel")
    return cast(float, rule["longest"]) * (1 + cast(float, rule["tolerance"]))


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """What fixes a topology: shape, panel count, whether there are tails and raised heels, and the chord splices."""

    shape: str
    panels: int
    tails: bool
    raised_heel: bool
    top_splices: tuple[int, ...] = ()  # panel points of the top chord that are splices
    bottom_splices: tuple[int, ...] = ()


@cache
def topology(layout: Layout) -> Topology:
    """Names and connectivity of a layout. Chord pieces are continuous; webs, heels, peak and splices are pinned."""
    return _Builder(layout).topology()


class _Builder:
    """Collects nodes and members of one layout from the left to the right."""

    def __init__(self, layout: Layout) -> None:
        self.layout = layout
        self.shape = SHAPES[layout.shape]
        self.webbing = self.shape.webbing(layout.panels)
        self.top_last = len(self.webbing.top) - 1
        self.bottom_last = len(self.webbing.bottom) - 1
        self.nodes = self._number_nodes()

    def _number_nodes(self) -> dict[Point, int]:
        bottom: list[Point] = [("bottom", k) for k in range(self.bottom_last + 1)]
        first = 0 if self.layout.raised_heel else 1
        top: list[Point] = [("top", k) for k in range(first, self.top_last + 1 - first)]
        tails: list[Point] = [("tail", 0), ("tail", 1)] if self.layout.tails else []
        numbers = {point: k for k, point in enumerate(bottom + top + tails)}
        if not self.layout.raised_heel:
            numbers["top", 0] = numbers["bottom", 0]
            numbers["top", self.top_last] = numbers["bottom", self.bottom_last]
        return numbers

    def topology(self) -> Topology:
        members = tuple(self._free_lone_ends(self._chords() + self._webs()))
        count = len(set(self.nodes.values()))
        left, right = self.nodes["bottom", 0], self.nodes["bottom", self.bottom_last]
        return Topology(
            shape=self.layout.shape,
            nodes=tuple(LETTERS[:count]),
            members=members,
            supports=(
                Support(node=left, horizontal=True, vertical=True),
                Support(node=right, horizontal=False, vertical=True),
            ),
            mirror_members=self._mirror_members(members),
            mirror_nodes=self._mirror_nodes(count),
        )

    def _chords(self) -> list[Member]:
        peak = self.top_last // 2
        tops = [self._panel("top", k, "left slope" if k < peak else "right slope") for k in range(self.top_last)]
        bottoms = [self._panel("bottom", k, "ceiling") for k in range(self.bottom_last)]
        return tops + self._tails() + bottoms

    def _panel(self, chord: str, k: int, surface: str) -> Member:
        return Member(
            name=f"{chord} {k + 1}",
            role=f"{chord} chord",
            group=f"{chord} chord",
            surface=surface,
            start=self.nodes[chord, k],
            end=self.nodes[chord, k + 1],
            pinned_start=self._joint(chord, k),
            pinned_end=self._joint(chord, k + 1),
        )

    def _joint(self, chord: str, point: int) -> bool:
        """Whether the chord passes no moment at this panel point."""
        if chord == "bottom":
            centre = self.shape.sloping_bottom and 2 * point == self.bottom_last
            return point in (0, self.bottom_last) or centre or point in self.layout.bottom_splices
        heel = point in (0, self.top_last) and not self.layout.tails
        return heel or 2 * point == self.top_last or point in self.layout.top_splices

    def _tails(self) -> list[Member]:
        if not self.layout.tails:
            return []
        ends = [
            (self.nodes["tail", 0], self.nodes["top", 0]),
            (self.nodes["top", self.top_last], self.nodes["tail", 1]),
        ]
        return [
            Member(
                name=f"tail {k + 1}",
                role="tail",
                group="top chord",
                surface=f"{side} tail",
                start=start,
                end=end,
                pinned_start=k == 0,
                pinned_end=k == 1,
            )
            for k, ((start, end), side) in enumerate(zip(ends, ("left", "right"), strict=True))
        ]

    def _webs(self) -> list[Member]:
        webs = list(self.webbing.webs)
        if self.layout.raised_heel:
            post: tuple[Point, Point] = (("top", 0), ("bottom", 0))
            tie: tuple[Point, Point] = (("top", 0), ("bottom", 1))
            image = [(("top", self.top_last), ("bottom", self.bottom_last - b)) for (_, _), (_, b) in (tie, post)]
            webs = [post, tie, *webs, *image]
        return [self._web(k, top, bottom) for k, (top, bottom) in enumerate(webs)]

    def _web(self, k: int, top: Point, bottom: Point) -> Member:
        rising = self._fraction(bottom) <= self._fraction(top)
        start, end = (bottom, top) if rising else (top, bottom)
        return Member(
            name=f"web {k + 1}",
            role="web",
            group="web",
            surface="",
            start=self.nodes[start],
            end=self.nodes[end],
            pinned_start=True,
            pinned_end=True,
        )

    def _fraction(self, point: Point) -> float:
        return float((self.webbing.top if point[0] == "top" else self.webbing.bottom)[point[1]])

    @staticmethod
    def _free_lone_ends(members: list[Member]) -> list[Member]:
        """An end at a joint where no other member takes moment is moment-free; say so, it saves a rotation."""
        ends: dict[int, int] = {}
        for m in members:
            for node, pinned in ((m.start, m.pinned_start), (m.end, m.pinned_end)):
                ends[node] = ends.get(node, 0) + (not pinned)
        from dataclasses import replace

        return [
            replace(m, pinned_start=m.pinned_start or ends[m.start] < 2, pinned_end=m.pinned_end or ends[m.end] < 2)
            for m in members
        ]

    def _mirror_nodes(self, count: int) -> tuple[int, ...]:
        last = {"top": self.top_last, "bottom": self.bottom_last, "tail": 1}
        image = {number: self.nodes[chord, last[chord] - k] for (chord, k), number in self.nodes.items()}
        return tuple(image[n] for n in range(count))

    def _mirror_members(self, members: Sequence[Member]) -> tuple[int, ...]:
        image = self._mirror_nodes(len(set(self.nodes.values())))
        ends = {frozenset((m.start, m.end)): k for k, m in enumerate(members)}
        return tuple(ends[frozenset((image[m.start], image[m.end]))] for m in members)


def place(layout: Layout, outline: Outline, bearing: float | np.ndarray) -> Truss:
    """The layout at the coordinates of an outline; batch axes of the outline lead."""
    builder = _Builder(layout)
    shape = np.broadcast_shapes(
        *(np.shape(getattr(outline, f)) for f in ("span", "pitch", "bottom_pitch", "heel", "overhang"))
    )
    made = topology(layout)
    xy = np.empty((*shape, len(made.nodes), 2))
    for (chord, k), number in builder.nodes.items():
        if chord == "tail":
            point = outline.tail(left=k == 0)
        else:
            fractions = builder.webbing.top if chord == "top" else builder.webbing.bottom
            point = getattr(outline, chord)(float(fractions[k]))
        xy[..., number, 0], xy[..., number, 1] = point
    return Truss(topology=made, xy=xy, bearing=np.broadcast_to(np.asarray(bearing, float), shape))
