"""Panel points and webs of each shape, in fractions of the span. No lengths here."""

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from functools import cache

Point = tuple[str, int]  # ("top", 2): panel point 2 of the top chord from the left; the heels are bottom 0 and the last


@dataclass(frozen=True, slots=True, kw_only=True)
class Webbing:
    """Panel points of both chords as fractions of the span (heels included) and the webs between them."""

    top: tuple[Fraction, ...]
    bottom: tuple[Fraction, ...]
    webs: tuple[tuple[Point, Point], ...]


def _equal(parts: int) -> tuple[Fraction, ...]:
    return tuple(Fraction(k, parts) for k in range(parts + 1))


def _mirrored(left: list[tuple[int, int]], top_last: int, bottom_last: int) -> tuple[tuple[Point, Point], ...]:
    """Webs (top point, bottom point) of the left half and on the centre line, with their mirror images."""
    pairs = list(left)
    for top, bottom in reversed(left):
        image = (top_last - top, bottom_last - bottom)
        if image not in pairs:
            pairs.append(image)
    return tuple((("top", top), ("bottom", bottom)) for top, bottom in pairs)


def king_post(panels: int) -> Webbing:
    """One post from the peak to the middle of the bottom chord."""
    return Webbing(top=_equal(2), bottom=_equal(2), webs=_mirrored([(1, 1)], 2, 2))


def queen_post(panels: int) -> Webbing:
    """A centre post, and from its foot a strut to the middle of each top chord."""
    return Webbing(top=_equal(4), bottom=_equal(2), webs=_mirrored([(1, 1), (2, 1)], 4, 2))


def fink(panels: int) -> Webbing:
    """Webs in zigzag from the first top panel point to the peak; the bottom chord has panels - 1 equal panels."""
    half = panels // 2
    left = [web for k in range(1, half) for web in ((k, k), (k + 1, k))]
    return Webbing(top=_equal(panels), bottom=_equal(panels - 1), webs=_mirrored(left, panels, panels - 1))


def howe(panels: int) -> Webbing:
    """A vertical at every panel point; diagonals fall towards the middle (in compression under gravity)."""
    half = panels // 2
    left = [web for k in range(1, half) for web in ((k, k), (k, k + 1))] + [(half, half)]
    return Webbing(top=_equal(panels), bottom=_equal(panels), webs=_mirrored(left, panels, panels))


def pratt(panels: int) -> Webbing:
    """A vertical at every panel point; diagonals rise towards the middle (in tension under gravity)."""
    half = panels // 2
    left = [web for k in range(1, half) for web in ((k, k), (k + 1, k))] + [(half, half)]
    return Webbing(top=_equal(panels), bottom=_equal(panels), webs=_mirrored(left, panels, panels))


@dataclass(frozen=True, slots=True, kw_only=True)
class Shape:
    """One entry of the catalogue."""

    name: str
    title: str
    panel_counts: tuple[int, ...]  # numbers of top-chord panels it can have, fewest first
    webbing: Callable[[int], Webbing]
    sloping_bottom: bool = False

    def panel_points(self, panels: int) -> tuple[tuple[float, ...], tuple[float, ...]]:
        """Places of the panel points of the top and the bottom chord, in shares of the span."""
        return _floats(self.webbing, panels)


@cache
def _floats(webbing: Callable[[int], Webbing], panels: int) -> tuple[tuple[float, ...], tuple[float, ...]]:
    made = webbing(panels)
    return tuple(map(float, made.top)), tuple(map(float, made.bottom))


SHAPES = {
    shape.name: shape
    for shape in (
        Shape(name="king post", title="one centre post; short spans", panel_counts=(2,), webbing=king_post),
        Shape(
            name="queen post", title="centre post and two struts; short spans", panel_counts=(4,), webbing=queen_post
        ),
        Shape(name="fink", title="W-shaped webs; few, short compression webs", panel_counts=(4, 6, 8), webbing=fink),
        Shape(
            name="howe", title="verticals in tension, diagonals in compression", panel_counts=(4, 6, 8), webbing=howe
        ),
        Shape(
            name="pratt", title="verticals in compression, diagonals in tension", panel_counts=(4, 6, 8), webbing=pratt
        ),
        Shape(
            name="scissor",
            title="sloping bottom chords for a raised ceiling, Howe webs",
            panel_counts=(4, 6, 8),
            webbing=howe,
            sloping_bottom=True,
        ),
    )
}
