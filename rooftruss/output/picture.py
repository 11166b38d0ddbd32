"""Elevation of a truss as lines and labels [m], for the chart of the workbook or any other drawing."""

from dataclasses import dataclass

import numpy as np

from rooftruss.design.design import Design
from rooftruss.shapes.truss import Truss

Point = tuple[float, float]
MARK = 0.022  # size of a support mark, as a share of the width of the picture
EDGE = 0.1  # marks between the outermost points and the box; a chart hides a label on the edge
LIFT = 0.4  # marks between a sloping line and its name
LEVEL = 0.05  # slope up to which a name stands straight below its line
SUPPORT_DEPTH = 1.5  # marks below the panel point, with the line of a roller


@dataclass(frozen=True, slots=True, kw_only=True)
class Path:
    """A set of strokes drawn alike; each stroke is a polyline."""

    name: str  # "top chord", "bottom chord", "web", "support"
    strokes: tuple[tuple[Point, ...], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Label:
    """A word at a point; position says on which side of it: "above", "below", "left", "right", "on"; "" hides it."""

    text: str
    at: Point
    position: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """Everything that is drawn, and the box (left, bottom, right, top) that holds the lines."""

    paths: tuple[Path, ...]
    member_names: tuple[Label, ...]
    panel_points: tuple[Label, ...]  # at their true places; the letters of bearings are hidden
    bearings: tuple[Label, ...]  # letters of the bearings, below the marks
    box: tuple[float, float, float, float]  # a little wider than the lines


def picture_of(truss: Truss) -> Picture:
    """Elevation of an unbatched truss."""
    nodes, bearings = range(len(truss.topology.nodes)), range(len(truss.topology.supports))
    groups = dict.fromkeys(m.group for m in truss.topology.members)
    paths = (
        *(Path(name=g, strokes=_strokes(truss, g)) for g in groups),
        Path(name="support", strokes=tuple(stroke for k in bearings for stroke in _support(truss, k))),
    )
    letters = tuple(_bearing(truss, k) for k in bearings)
    points = [p for path in paths for stroke in path.strokes for p in stroke] + [label.at for label in letters]
    edge = EDGE * _mark(truss)
    return Picture(
        paths=paths,
        member_names=tuple(_member_name(truss, k) for k in range(len(truss.topology.members))),
        panel_points=tuple(_panel_point(truss, k) for k in nodes),
        bearings=letters,
        box=(
            min(x for x, _ in points) - edge,
            min(y for _, y in points) - edge,
            max(x for x, _ in points) + edge,
            max(y for _, y in points) + edge,
        ),
    )


def _mark(truss: Truss) -> float:
    return MARK * float(np.ptp(truss.xy[:, 0]))


def picture(design: Design) -> Picture:
    """Elevation of a design."""
    return picture_of(design.run.truss)


def _point(truss: Truss, node: int) -> Point:
    return (float(truss.xy[node, 0]), float(truss.xy[node, 1]))


def _strokes(truss: Truss, group: str) -> tuple[tuple[Point, ...], ...]:
    """Members of a group as polylines; one that starts where the last one ended carries on its stroke."""
    strokes: list[list[int]] = []
    members = sorted((m for m in truss.topology.members if m.group == group), key=lambda m: truss.xy[m.start, 0])
    for m in members:
        if strokes and strokes[-1][-1] == m.start:
            strokes[-1].append(m.end)
        else:
            strokes.append([m.start, m.end])
    return tuple(tuple(_point(truss, n) for n in stroke) for stroke in strokes)


def _support(truss: Truss, number: int) -> list[tuple[Point, ...]]:
    """Triangle under a bearing; a roller has a line below it."""
    support = truss.topology.supports[number]
    x, y = _point(truss, support.node)
    mark = _mark(truss)
    half = 0.6 * mark
    triangle = ((x, y), (x - half, y - mark), (x + half, y - mark), (x, y))
    if support.horizontal:
        return [triangle]
    return [triangle, ((x - half, y - 1.4 * mark), (x + half, y - 1.4 * mark))]


def _member_name(truss: Truss, k: int) -> Label:
    member = truss.topology.members[k]
    (x0, y0), (x1, y1) = _point(truss, member.start), _point(truss, member.end)
    middle = ((x0 + x1) / 2, (y0 + y1) / 2)
    level = abs(y1 - y0) < LEVEL * abs(x1 - x0)
    if member.role == "web" or (member.role == "bottom chord" and level):
        return Label(text=member.name, at=middle, position="on" if member.role == "web" else "below")
    # Off a sloping line, above the roof and below the ceiling, to the side on which the line goes away from the name.
    above = member.role != "bottom chord"
    lift = LIFT * _mark(truss) * (1 if above else -1)
    cos, sin = truss.direction[k]
    at = (middle[0] - lift * float(sin), middle[1] + lift * float(cos))
    return Label(text=member.name, at=at, position="left" if (y1 >= y0) == above else "right")


def _panel_point(truss: Truss, node: int) -> Label:
    """Letter above a point of the roof, below one of the bottom chord or a tail end."""
    roles = {m.role for m in truss.topology.members if node in (m.start, m.end)}
    low = roles <= {"tail"} or "bottom chord" in roles
    resting = node in {s.node for s in truss.topology.supports}
    position = "" if resting else "below" if low else "above"
    return Label(text=truss.topology.nodes[node], at=_point(truss, node), position=position)


def _bearing(truss: Truss, number: int) -> Label:
    """Letter of a bearing, below its mark."""
    node = truss.topology.supports[number].node
    x, y = _point(truss, node)
    return Label(text=truss.topology.nodes[node], at=(x, y - SUPPORT_DEPTH * _mark(truss)), position="below")
