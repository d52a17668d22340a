"""The drawing of one path as SVG, from the same figures as the page's: the roof left, the mast right.

The Earth's curve lifts the ground under the straight line from antenna to aerial; of the first Fresnel zone only
the part that the ground enters is filled. Everything is ink and grey, so that paper needs no colour; classes let
the page's stylesheet give it the colours of its theme.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from html import escape
from itertools import groupby
from math import ceil, floor, log10
from typing import Any

from app.roof import Obstacle

WIDTH, HEIGHT = 696.0, 202.0  # units of the drawing: a quarter of a millimetre on A4
LEFT, RIGHT, TOP, BOTTOM = 44.0, 688.0, 44.0, 178.0  # box of the ground
HEADROOM = 0.35  # of the zone's radius above the line, so that the line does not touch the upper edge
LONGEST_NAME = 60
LEGEND = (
    "The roof stands left, the mast right. Grey is the ground with the Earth's curve, the broken line goes straight "
    "from aerial to antenna, and dark is the part of the first Fresnel zone that the ground enters. Dotted: the ground "
    "without houses and trees. A double wave: sea."
)
LOOKS = {
    "grid": 'fill="none" stroke="#bbbbbb" stroke-width="0.75"',
    "ground": 'fill="#dddddd" stroke="none"',
    "taken": 'fill="#858585" stroke="#444444" stroke-width="0.75"',
    "surface": 'fill="none" stroke="#000000" stroke-width="1.25"',
    "bare": 'fill="none" stroke="#000000" stroke-width="1" stroke-dasharray="1.5 3"',
    "water": 'fill="none" stroke="#555555" stroke-width="1"',
    "line": 'fill="none" stroke="#000000" stroke-width="1" stroke-dasharray="9 4"',
    "end": 'fill="none" stroke="#000000" stroke-width="3"',
    "obstacle": 'fill="none" stroke="#000000" stroke-width="5"',
    "leader": 'fill="none" stroke="#000000" stroke-width="0.75"',
    "axis": 'fill="#333333" font-size="11"',
    "said": 'fill="#000000" font-size="12" font-weight="bold"',
}


@dataclass(frozen=True, slots=True)
class _Point:
    km: float  # from the mast
    top: float  # ground with the Earth's curve [m]
    bare: float
    line: float
    radius: float
    water: bool


@dataclass(frozen=True, slots=True)
class _Scale:
    length_km: float
    low_m: float
    high_m: float

    def x(self, km: float) -> float:
        return LEFT + (RIGHT - LEFT) * (self.length_km - km) / self.length_km

    def y(self, metres: float) -> float:
        return BOTTOM - (BOTTOM - TOP) * (metres - self.low_m) / (self.high_m - self.low_m or 1)

    def along(self, points: Sequence[_Point], height: Callable[[_Point], float]) -> str:
        return "L".join(f"{self.x(one.km):.1f} {self.y(height(one)):.1f}" for one in points)


def path_svg(path: Mapping[str, Any], mast: str, obstacles: Sequence[Obstacle], said: str) -> str:
    """Draw the document of a path (`app.path_query`); the words `said` are its text alternative.

    The obstacles are those that stand across this path.
    """
    points = _points(path["drawing"])
    length_km = points[-1].km
    scale = _Scale(
        length_km,
        min(0.0, *(one.top for one in points)),
        max(max(one.top, one.line + HEADROOM * one.radius) for one in points),
    )
    shapes = [*_axes(scale), *_ground(points, scale), *_ends(points, scale)]
    foot_m = points[-1].top
    for one in obstacles:
        across = scale.x(length_km - one.distance_m / 1000)
        shapes.append(
            _path("obstacle", f"M{across:.1f} {scale.y(foot_m):.1f}V{scale.y(foot_m + one.height_agl_m):.1f}")
        )
    name = mast if len(mast) <= LONGEST_NAME else mast[: LONGEST_NAME - 1] + "…"
    shapes += [_text("said", LEFT, 14, "start", "roof"), _text("said", RIGHT, 14, "end", name)]
    shapes += _tightest(points, path["terms"], scale)
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" class="section" viewBox="0 0 {WIDTH:g} {HEIGHT:g}" '
        f'font-family="Libertinus Serif" role="img" aria-label="{escape(said, quote=True)}">{"".join(shapes)}</svg>'
    )


def round_steps(low: float, high: float, count: int) -> list[float]:
    """Return about so many round values between two."""
    if high <= low:
        return [low]
    rough = (high - low) / count
    unit = 10.0 ** floor(log10(rough))
    step = unit * next((times for times in (1, 2, 5) if times * unit >= rough * 0.999), 10)
    return [place * step for place in range(ceil(low / step - 1e-9), floor(high / step + 1e-9) + 1)]


def _points(outline: Mapping[str, Any]) -> list[_Point]:
    return [
        _Point(km, ground + bulge, bare + bulge, line, radius, water)
        for km, ground, bare, bulge, line, radius, water in zip(
            outline["distance_km"],
            outline["ground_amsl_m"],
            outline["bare_amsl_m"],
            outline["bulge_m"],
            outline["line_amsl_m"],
            outline["first_fresnel_m"],
            outline["water"],
            strict=True,
        )
    ]


def _axes(scale: _Scale) -> Iterator[str]:
    for height in round_steps(scale.low_m, scale.high_m, 4):
        yield _path("grid", f"M{LEFT} {scale.y(height):.1f}H{RIGHT}")
        yield _text("axis", LEFT - 6, scale.y(height) + 4, "end", f"{height:g}")
    for km in round_steps(0, scale.length_km, 7):
        yield _text("axis", scale.x(scale.length_km - km), BOTTOM + 20, "middle", f"{km:g}")
    yield _text("axis", LEFT - 6, 14, "end", "m")
    yield _text("axis", LEFT - 6, BOTTOM + 20, "end", "km")


def _ground(points: Sequence[_Point], scale: _Scale) -> Iterator[str]:
    surface = f"M{scale.along(points, lambda one: one.top)}"
    yield _path("ground", f"{surface}V{BOTTOM}H{scale.x(0):.1f}Z")
    for run in _runs(points, lambda one: one.radius > 0 and one.top > one.line - one.radius):
        upper = scale.along(run, lambda one: min(one.top, one.line + one.radius))
        lower = scale.along(run[::-1], lambda one: max(scale.low_m, one.line - one.radius))
        yield _path("taken", f"M{upper}L{lower}Z")
    yield _path("surface", surface)
    if any(one.top - one.bare > 1 for one in points):
        yield _path("bare", f"M{scale.along(points, lambda one: one.bare)}")
    for run in _runs(points, lambda one: one.water):
        wave = _path("water", f"M{scale.along(run, lambda one: one.top)}")
        yield from (f'<g transform="translate(0 {depth})">{wave}</g>' for depth in (4, 8))


def _ends(points: Sequence[_Point], scale: _Scale) -> Iterator[str]:
    yield _path("line", f"M{scale.along([points[0], points[-1]], lambda one: one.line)}")
    for one in (points[0], points[-1]):
        yield _path("end", f"M{scale.x(one.km):.1f} {scale.y(one.top):.1f}V{scale.y(one.line):.1f}")


def _tightest(points: Sequence[_Point], terms: Mapping[str, Any], scale: _Scale) -> Iterator[str]:
    """Name the point that decides, seen from the roof."""
    km, into_m = terms["worst_point_km"], terms["obstacle_into_line_m"]
    nearest = min(points, key=lambda one: abs(one.km - km))
    away_km = scale.length_km - km
    away = f"{away_km:.3g} km" if away_km >= 1 else f"{1000 * away_km:.0f} m"
    words = f"{away}: {abs(into_m):.0f} m {'into' if into_m > 0 else 'under'} the line"
    half = 3.2 * len(words)  # about half the width of the words
    centre = min(RIGHT - half, max(LEFT + half, scale.x(km)))
    yield _path("leader", f"M{scale.x(km):.1f} 36V{min(scale.y(nearest.top), scale.y(nearest.line)) - 3:.1f}")
    yield _text("said", centre, 31, "middle", words)


def _runs(points: Sequence[_Point], belongs: Callable[[_Point], bool]) -> Iterator[list[_Point]]:
    """Yield the stretches of at least two points that belong."""
    for inside, run in groupby(points, key=belongs):
        stretch = list(run)
        if inside and len(stretch) > 1:
            yield stretch


def _path(kind: str, line: str) -> str:
    return f'<path class="{kind}" {LOOKS[kind]} d="{line}"/>'


def _text(kind: str, x: float, y: float, anchor: str, words: str) -> str:
    return f'<text class="{kind}" {LOOKS[kind]} x="{x:.1f}" y="{y:.1f}" text-anchor="{anchor}">{escape(words)}</text>'
