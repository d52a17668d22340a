"""Digests of many paths at once, straight from a sheet of samples: the fast form of `path_digest` and `path_terms`.

A compiled pass finds maxima, sums and places on each profile while it lies in the processor's cache (scan.py); the
formulas that follow are those of the plain form, for all paths together. Agreement with the plain form, and where
it is least, stands in the tests. Importing this imports numba.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from propagation.constants import EARTH_RADIUS_KM, FLATTENED_KM
from propagation.diffraction import SmoothEarth, bullington_edge_of_rays, smooth_earth_of_fit
from propagation.digest import PathDigest
from propagation.p1812.climate import beta0_percent, path_centre_latitude_deg
from propagation.p1812.path import BETA0_EARTH_RADIUS_KM, NO_COAST_KM, PathTerms
from propagation.refraction import effective_earth_radius_km
from propagation.refractivity import refractivity
from propagation.scan import BACK, ROOT, SCAN
from propagation.scan_lines import scan_lines
from propagation.smooth_edge import smooth_rays
from terrain.cover_kernels import cover_arrays
from terrain.kernels import SheetArrays, scratch_for, sheet_arrays
from terrain.lines import lines_over
from terrain.sheet import Sheet

FloatArray = NDArray[np.float64]
Each = Callable[
    [Callable[[int], "Digests"], Iterable[int]], Iterable["Digests"]
]  # such as `map`, or that of a pool of threads
T = TypeVar("T", PathDigest, PathTerms)

CHUNK = 4096  # most paths that one thread takes at a time


@dataclass(frozen=True, slots=True)
class Ends:
    """Paths (p,): where they begin and end, and what stands near their roofs."""

    tx_latitude_deg: FloatArray
    tx_longitude_deg: FloatArray
    antenna_agl_m: FloatArray
    rx_latitude_deg: FloatArray
    rx_longitude_deg: FloatArray
    aerial_agl_m: FloatArray
    first_edge: NDArray[np.int64]  # (p + 1,) into edge_km
    edge_km: FloatArray  # (e,) distances of what stands near a roof, from the roof

    def part(self, first: int, stop: int) -> Ends:
        """Paths from one number to before another."""
        edges = self.first_edge[first : stop + 1]
        return Ends(
            self.tx_latitude_deg[first:stop],
            self.tx_longitude_deg[first:stop],
            self.antenna_agl_m[first:stop],
            self.rx_latitude_deg[first:stop],
            self.rx_longitude_deg[first:stop],
            self.aerial_agl_m[first:stop],
            edges - edges[0],
            self.edge_km[edges[0] : edges[-1]],
        )


@dataclass(frozen=True, slots=True)
class Digests:
    """Results (p,) of many paths; nothing is to be read where `known` is false."""

    known: NDArray[np.bool_]  # false: the sheet has a gap under the path
    digest: PathDigest
    terms: PathTerms
    delta_n_per_km: FloatArray
    n0: FloatArray
    first_edge: NDArray[np.int64]  # (p + 1,) into the next two
    source_km: FloatArray  # (e,) where the ray past each edge comes from, from the roof; negative: nothing is farther
    source_slope: FloatArray  # (e,) from the horizontal at the aerial [m/km]


def digests(
    sheet: Sheet,
    ends: Ends,
    spacing_m: float | None = None,
    maps_folder: Path | None = None,
    each: Each = map,
    parts: int = 1,
) -> Digests:
    """Digest paths (p,) over a sheet.

    Spacing as for `terrain.profile.sample_profile`, `maps_folder` as for `refractivity`. With `each` the map of a
    pool of threads, at least `parts` of the paths are scanned at the same time.

    References
    ----------
    As `digest.path_digest` and `p1812.path.path_terms`.
    """
    paths = ends.tx_latitude_deg.size
    arrays = sheet_arrays(sheet)

    def digested(first: int) -> Digests:
        return _digests(sheet, arrays, ends.part(first, min(first + size, paths)), spacing_m, maps_folder)

    size = max(1, min(CHUNK, -(-paths // parts)))
    batches = list(each(digested, range(0, paths, size)))
    return batches[0] if len(batches) == 1 else _joined(batches, ends.first_edge)


def _digests(
    sheet: Sheet, arrays: SheetArrays, ends: Ends, spacing_m: float | None, maps_folder: Path | None
) -> Digests:
    """Digest one part of the paths, on one thread."""
    lines = lines_over(
        sheet, ends.tx_latitude_deg, ends.tx_longitude_deg, ends.rx_latitude_deg, ends.rx_longitude_deg, spacing_m
    )
    lapse, n0 = refractivity(lines.middle_latitude_deg, lines.middle_longitude_deg, maps_folder)
    scans, sources = np.zeros(lines.points.size, SCAN), np.zeros((2, ends.edge_km.size))
    points, cover_knots = lines.points, np.zeros((0, 2, lines.row.size))
    if sheet.cover is not None:
        cover_knots, whole = sheet.cover.knots(lines.knot_latitude_deg, lines.knot_longitude_deg, lines.first_knot)
        points = np.where(whole, points, 0)
    scan_lines(
        arrays,
        cover_arrays(sheet.cover),
        scratch_for(arrays),
        lines.first_knot,
        lines.row,
        lines.column,
        cover_knots,
        lines.length_km,
        points,
        500 / effective_earth_radius_km(lapse),
        ends.antenna_agl_m,
        ends.aerial_agl_m,
        FLATTENED_KM,
        ends.first_edge,
        ends.edge_km,
        ROOT,
        BACK,
        scans,
        sources,
    )
    columns = {name: np.ascontiguousarray(scans[name]) for name in scans.dtype.names or ()}
    return _closed(columns, ends, lines.length_km, lines.points, lapse, n0, sources)


def _joined(batches: Sequence[Digests], first_edge: NDArray[np.int64]) -> Digests:
    """Batches as one, in their order."""

    def together(parts: Sequence[T]) -> T:
        kind = type(parts[0])
        return kind(**{f.name: np.concatenate([getattr(part, f.name) for part in parts]) for f in fields(kind)})

    return Digests(
        known=np.concatenate([batch.known for batch in batches]),
        digest=together([batch.digest for batch in batches]),
        terms=together([batch.terms for batch in batches]),
        delta_n_per_km=np.concatenate([batch.delta_n_per_km for batch in batches]),
        n0=np.concatenate([batch.n0 for batch in batches]),
        first_edge=first_edge,
        source_km=np.concatenate([batch.source_km for batch in batches]),
        source_slope=np.concatenate([batch.source_slope for batch in batches]),
    )


@np.errstate(divide="ignore", invalid="ignore")  # of paths that are not known
def _closed(
    s: Mapping[str, NDArray[Any]],
    ends: Ends,
    d: FloatArray,
    points: NDArray[np.int64],
    lapse: FloatArray,
    n0: FloatArray,
    sources: FloatArray,
) -> Digests:
    """Every formula after the scan; what follows from a path that is not known is without meaning."""
    known = s["known"]
    radius = effective_earth_radius_km(lapse)
    d = np.where(known, d, 1.0)
    points = np.where(known, points, 5)
    a, b = s["tx_ground_amsl_m"] + ends.antenna_agl_m, s["rx_ground_amsl_m"] + ends.aerial_agl_m
    smooth = smooth_earth_of_fit(
        s["tx_fit_amsl_m"],
        s["rx_fit_amsl_m"],
        s["over_line_m"],
        s["over_line_from_tx"],
        s["over_line_from_rx"],
        s["tx_ground_amsl_m"],
        s["rx_ground_amsl_m"],
    )
    true_earth, beta0 = np.full_like(radius, EARTH_RADIUS_KM), np.full_like(radius, BETA0_EARTH_RADIUS_KM)
    smooth_edge = {
        name: _smooth_edge(a - smooth.tx_amsl_m, b - smooth.rx_amsl_m, d, points, r)
        for name, r in (("median", radius), ("true_earth", true_earth), ("beta0", beta0))
    }
    edge = {
        name: bullington_edge_of_rays(s[f"tx_{name}"], s[f"rx_{name}"], s[f"nu_{name}"], d, a, b)
        for name in ("median", "true_earth", "beta0")
    }
    horizon_rays = _horizon_rays_mrad(s["tx_horizon_median"], s["rx_horizon_median"], d, a, b, radius)
    return Digests(
        known,
        _digest(s, d, a, b, radius, smooth, edge, smooth_edge, horizon_rays),
        _terms(s, ends, d, a, b, radius, smooth, edge, smooth_edge, horizon_rays),
        lapse,
        n0,
        ends.first_edge,
        *sources,
    )


def _smooth_edge(
    tx_over: FloatArray, rx_over: FloatArray, d: FloatArray, points: NDArray[np.int64], radius: FloatArray
) -> FloatArray:
    steepest, steepest_back, clear = smooth_rays(tx_over, rx_over, d, points, radius)
    return bullington_edge_of_rays(steepest, steepest_back, clear, d, tx_over, rx_over)


def _horizon_rays_mrad(
    steepest: FloatArray, steepest_back: FloatArray, d: FloatArray, a: FloatArray, b: FloatArray, radius: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Elevation of both horizon rays, P.1812 eqs. (77)-(82); on a line of sight, of the ray itself. [mrad]"""
    sinking = 500 * d / radius  # slopes with the bulge count from the chord, eq. (77) from the horizontal
    direct, direct_back = (b - a) / d, (a - b) / d
    hidden = steepest > direct
    return tuple(
        1000 * np.arctan((np.where(hidden, slope, straight) - sinking) / 1000)
        for slope, straight in ((steepest, direct), (steepest_back, direct_back))
    )  # type: ignore[return-value]


def _digest(
    s: Mapping[str, NDArray[Any]],
    d: FloatArray,
    a: FloatArray,
    b: FloatArray,
    radius: FloatArray,
    smooth: SmoothEarth,
    edge: dict[str, FloatArray],
    smooth_edge: dict[str, FloatArray],
    horizon_rays: tuple[FloatArray, FloatArray],
) -> PathDigest:
    tx_over, rx_over = a - smooth.tx_amsl_m, b - smooth.rx_amsl_m
    horizon = np.sqrt(2 * radius) * (np.sqrt(0.001 * tx_over) + np.sqrt(0.001 * rx_over))  # P.1812 eq. (22)
    worst, into_line = s["worst_km"], s["worst_into_line_m"]
    clearance = -into_line * np.sqrt(d / np.where(s["known"], worst * (d - worst), 1.0))
    true_earth_rays = _horizon_rays_mrad(
        s["tx_horizon_true_earth"], s["rx_horizon_true_earth"], d, a, b, np.full_like(d, EARTH_RADIUS_KM)
    )
    return PathDigest(
        path_length_km=d,
        land_km=np.maximum(d - s["sea_km"], 0.0),
        sea_km=s["sea_km"],
        tx_ground_amsl_m=s["tx_ground_amsl_m"],
        rx_ground_amsl_m=s["rx_ground_amsl_m"],
        h1_source_height_m=a - s["mean_ground_amsl_m"],
        tx_clearance_angle_deg=np.degrees(np.arctan(s["tx_slope"] / 1000)),
        rx_clearance_angle_deg=np.degrees(np.arctan(s["rx_slope"] / 1000)),
        effective_earth_radius_km=radius,
        line_of_sight=clearance >= 0,
        clearance=clearance,
        worst_point_km=worst,
        obstacle_into_line_m=into_line,
        tx_over_smooth_earth_m=tx_over,
        rx_over_smooth_earth_m=rx_over,
        smooth_horizon_km=horizon,
        beyond_horizon=d > horizon,
        actual_edge=edge["median"],
        smooth_edge=smooth_edge["median"],
        angular_distance_mrad=1000 * d / radius + horizon_rays[0] + horizon_rays[1],
        actual_edge_true_earth=edge["true_earth"],
        smooth_edge_true_earth=smooth_edge["true_earth"],
        angular_distance_true_earth_mrad=1000 * d / EARTH_RADIUS_KM + true_earth_rays[0] + true_earth_rays[1],
    )


def _terms(
    s: Mapping[str, NDArray[Any]],
    ends: Ends,
    d: FloatArray,
    a: FloatArray,
    b: FloatArray,
    radius: FloatArray,
    smooth: SmoothEarth,
    edge: dict[str, FloatArray],
    smooth_edge: dict[str, FloatArray],
    horizon_rays: tuple[FloatArray, FloatArray],
) -> PathTerms:
    latitude = path_centre_latitude_deg(
        ends.tx_latitude_deg, ends.tx_longitude_deg, ends.rx_latitude_deg, ends.rx_longitude_deg, d
    )
    tx_base = np.minimum(smooth.tx_fit_amsl_m, s["tx_ground_amsl_m"])  # eq. (92)
    rx_base = np.minimum(smooth.rx_fit_amsl_m, s["rx_ground_amsl_m"])
    return PathTerms(
        path_length_km=d,
        tx_antenna_amsl_m=a,
        rx_antenna_amsl_m=b,
        tx_distance_to_coast_km=np.where(s["tx_coast_km"] < 0, NO_COAST_KM, s["tx_coast_km"]),
        rx_distance_to_coast_km=np.where(s["rx_coast_km"] < 0, NO_COAST_KM, s["rx_coast_km"]),
        rx_at_sea=s["rx_at_sea"],
        fraction_over_sea=np.minimum(s["sea_km"] / d, 1.0),
        longest_land_km=s["longest_land_km"],
        longest_inland_km=s["longest_inland_km"],
        path_centre_latitude_deg=latitude,
        beta0_percent=beta0_percent(latitude, s["longest_land_km"], s["longest_inland_km"]),
        median_effective_earth_radius_km=radius,
        line_of_sight=s["line_of_sight"],
        tx_horizon_distance_km=s["tx_horizon_km"],
        rx_horizon_distance_km=s["rx_horizon_km"],
        tx_horizon_angle_mrad=horizon_rays[0],
        rx_horizon_angle_mrad=horizon_rays[1],
        path_angular_distance_mrad=1000 * d / radius + horizon_rays[0] + horizon_rays[1],
        smooth_earth_tx_uncorrected_amsl_m=smooth.tx_fit_amsl_m,
        smooth_earth_rx_uncorrected_amsl_m=smooth.rx_fit_amsl_m,
        smooth_earth_tx_amsl_m=tx_base,
        smooth_earth_rx_amsl_m=rx_base,
        smooth_earth_tx_diffraction_amsl_m=smooth.tx_amsl_m,
        smooth_earth_rx_diffraction_amsl_m=smooth.rx_amsl_m,
        tx_height_above_smooth_earth_m=a - smooth.tx_amsl_m,
        rx_height_above_smooth_earth_m=b - smooth.rx_amsl_m,
        tx_effective_height_ducting_m=a - tx_base,
        rx_effective_height_ducting_m=b - rx_base,
        terrain_roughness_m=s["roughness_m"],
        actual_edge_median=edge["median"],
        actual_edge_beta0=edge["beta0"],
        smooth_edge_median=smooth_edge["median"],
        smooth_edge_beta0=smooth_edge["beta0"],
    )
