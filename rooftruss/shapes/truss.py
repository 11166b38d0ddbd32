"""Topology (names and connectivity, no numbers) and Truss (a topology with coordinates, batched)."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Member:
    """One member of a topology, drawn from left to right (a vertical web from the bottom up)."""

    name: str  # "top 1", "bottom 2", "web 3", "tail 1"
    role: str  # "top chord", "bottom chord", "web", "tail"
    group: str  # "top chord", "bottom chord", "web"
    surface: str  # "left slope", "right slope", "left tail", "right tail", "ceiling", "" (no area load)
    start: int  # node numbers
    end: int
    pinned_start: bool  # moment-free end
    pinned_end: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Support:
    """A bearing: which movements of a node are held."""

    node: int
    horizontal: bool
    vertical: bool


@dataclass(frozen=True, kw_only=True)
class Topology:
    """Shape and panel count as names and connectivity. Hashable, so that what follows from it is found once.

    mirror_members and mirror_nodes give the number of each one's mirror image; empty for an unsymmetric truss.
    """

    shape: str
    nodes: tuple[str, ...]
    members: tuple[Member, ...]
    supports: tuple[Support, ...]
    mirror_members: tuple[int, ...] = ()
    mirror_nodes: tuple[int, ...] = ()

    @cached_property
    def start(self) -> NDArray[np.intp]:
        """Start node of each member (m,)."""
        return np.array([m.start for m in self.members])

    @cached_property
    def end(self) -> NDArray[np.intp]:
        """End node of each member (m,)."""
        return np.array([m.end for m in self.members])

    @cached_property
    def names(self) -> tuple[str, ...]:
        """Member names."""
        return tuple(m.name for m in self.members)

    @cached_property
    def roles(self) -> tuple[str, ...]:
        """Member roles."""
        return tuple(m.role for m in self.members)

    @cached_property
    def groups(self) -> tuple[str, ...]:
        """Section group of each member."""
        return tuple(m.group for m in self.members)

    def on(self, *surfaces: str) -> list[int]:
        """Numbers of the members that carry the load of these surfaces, from the left."""
        return [k for k, m in enumerate(self.members) if m.surface in surfaces]


@dataclass(frozen=True, kw_only=True)
class Truss:
    """A topology at coordinates `xy` (..., node, 2) [m]: x to the right from the left bearing centre, y up."""

    topology: Topology
    xy: Array
    bearing: Array  # bearing length along the span (...,) [m]

    @cached_property
    def start_xy(self) -> Array:
        """Start point of each member (..., m, 2)."""
        return self.xy[..., self.topology.start, :]

    @cached_property
    def end_xy(self) -> Array:
        """End point of each member (..., m, 2)."""
        return self.xy[..., self.topology.end, :]

    @cached_property
    def length(self) -> Array:
        """Centre-line length of each member (..., m) [m]."""
        run = self.end_xy - self.start_xy
        return np.hypot(run[..., 0], run[..., 1])

    @cached_property
    def direction(self) -> Array:
        """Unit vector along each member (..., m, 2)."""
        return (self.end_xy - self.start_xy) / self.length[..., None]

    def one(self, index: int) -> "Truss":
        """The truss number `index` of a batch with one leading axis."""
        return Truss(
            topology=self.topology, xy=self.xy[index], bearing=np.broadcast_to(self.bearing, self.xy.shape[:-2])[index]
        )
