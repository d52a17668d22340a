"""Where a raster's samples lie on Earth: positions to rows and columns, and back."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TypeVar

import numpy as np
from affine import Affine
from numpy.typing import NDArray
from pyproj import CRS, Transformer
from pyproj.exceptions import ProjError

from terrain.errors import RasterError
from terrain.geodesy import distance_and_bearing

FloatArray = NDArray[np.float64]
Number = TypeVar("Number", float, FloatArray)

_WGS84 = CRS.from_epsg(4326)


@dataclass(frozen=True, slots=True)
class Grid:
    """Samples in rows and columns of one coordinate system; row 0, column 0 is the first sample.

    Rows and columns are counted between sample *centres*: a point sample on a tile's edge and a
    pixel's middle are both whole numbers. Rotated and south-up rasters are as good as any.
    """

    rows: int
    columns: int
    transform: Affine  # column, row of pixel corners -> x, y of the coordinate system
    crs: CRS  # horizontal part only
    to_crs: Transformer | None  # None where x, y are WGS 84 longitude and latitude as they are
    turns_deg: float  # whole turns that a plain raster's own x stands above longitudes from -180
    west_deg: float  # -180 to 180
    south_deg: float
    east_deg: float  # above 180 where the raster reaches over the 180th meridian
    north_deg: float
    spacing_m: float  # side of the square as large as one cell in the raster's middle

    @classmethod
    def place(cls, rows: int, columns: int, transform: Affine, crs: CRS) -> Grid:
        """Grid of a raster of `rows` × `columns` pixels.

        Raises RasterError where the numbers cannot be a place in that coordinate system.
        """
        horizontal = _horizontal(crs)
        try:
            to_crs = way_to(horizontal)
            bounds = _bounds(rows, columns, transform, to_crs)
        except ProjError as error:
            raise RasterError(f"no way leads from longitude and latitude to {crs_text(crs)}") from error
        west, south, east, north = bounds
        if not (np.isfinite(bounds).all() and -90.01 <= south < north <= 90.01 and 0 < east - west <= 360.1):
            raise RasterError(
                f"its corner x = {transform.c:g}, y = {transform.f:g} is no place on Earth in {crs_text(crs)}"
            )
        turns = 360.0 * float(np.floor((west + 180) / 360))
        grid = cls(
            rows, columns, transform, horizontal, to_crs, turns, west - turns, south, east - turns, north, np.nan
        )
        corner = np.array([[-0.5, -0.5], [-0.5, 0.5], [0.5, -0.5]])
        row, column = (np.array([rows - 1.0, columns - 1.0]) / 2 + corner).T
        lat, lon = grid.position(row, column)
        sides_km, _ = distance_and_bearing(lat[0], lon[0], lat[1:], lon[1:])
        return replace(grid, spacing_m=1e3 * float(np.sqrt(sides_km.prod())))

    def shifted(self, rows: int, columns: int, transform: Affine) -> Grid:
        """Grid of the same coordinate system with another corner and size; it may reach over a pole by a few rows."""
        west, south, east, north = _bounds(rows, columns, transform, self.to_crs)
        turns = self.turns_deg
        return replace(
            self,
            rows=rows,
            columns=columns,
            transform=transform,
            west_deg=west - turns,
            south_deg=south,
            east_deg=east - turns,
            north_deg=north,
        )

    def index(self, lat: FloatArray, lon: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Row and column (fractional) of positions [deg]; NaN or outside the raster where it does not reach."""
        if self.to_crs is None:
            # The unlit side of the Earth is shared between both edges, so that a point a little
            # outside is a little outside on its own side.
            start = self.west_deg - max(0.0, 360.0 - (self.east_deg - self.west_deg)) / 2
            with np.errstate(invalid="ignore"):
                x, y = start + (lon - start) % 360.0 + self.turns_deg, lat
        else:
            x, y = (np.asarray(value) for value in self.to_crs.transform(lon, lat))
        with np.errstate(invalid="ignore"):
            column, row = apply(~self.transform, x, y)
        return row - 0.5, column - 0.5

    def position(self, row: FloatArray, column: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Latitude and longitude [deg] of rows and columns, fractional or outside the raster alike."""
        x, y = apply(self.transform, column + 0.5, row + 0.5)
        if self.to_crs is not None:
            x, y = self.to_crs.transform(x, y, direction="INVERSE")
        lon = (np.asarray(x, dtype=float) + 180.0) % 360.0 - 180.0
        return np.asarray(y, dtype=float), lon

    def near(self, lat: FloatArray, lon: FloatArray) -> NDArray[np.bool_]:
        """Whether positions lie in the bounding box; a few points too many, never one too few."""
        slack = self.slack_deg
        inside: NDArray[np.bool_] = (lat >= self.south_deg - slack) & (lat <= self.north_deg + slack)
        inside &= (lon - self.west_deg + slack) % 360.0 <= self.east_deg - self.west_deg + 2 * slack
        return inside

    def holds(self, south: float, west: float, north: float, east: float) -> bool:
        """Whether another box lies wholly in the bounding box [deg]."""
        if south < self.south_deg or north > self.north_deg:
            return False
        return (west - self.west_deg) % 360.0 + (east - west) <= self.east_deg - self.west_deg

    @property
    def slack_deg(self) -> float:
        """Rounding of positions; for curved edges also what bulges out between the places looked at."""
        return 1e-6 if self.to_crs is None else 1e-3 * (self.north_deg - self.south_deg)


class Boxes:
    """Bounding boxes of many grids, asked at once."""

    def __init__(self, grids: Sequence[Grid]) -> None:
        rows = [(one.south_deg, one.west_deg, one.north_deg, one.east_deg, one.slack_deg) for one in grids]
        self._south, self._west, self._north, self._east, self._slack = np.array(rows).reshape(-1, 5).T
        sides = [((o.north_deg - o.south_deg) / o.rows, (o.east_deg - o.west_deg) / o.columns) for o in grids]
        self._cell = np.array(sides).reshape(-1, 2).max(axis=1)

    def meeting(self, south: float, west: float, north: float, east: float, cells: float = 0.0) -> list[int]:
        """Numbers of the grids that share ground with a box [deg], or lie within so many of their cells of it.

        The box's east is not below its west.
        """
        wider = cells * self._cell
        near = (south - wider <= self._north + self._slack) & (north + wider >= self._south - self._slack)
        width = self._east - self._west + self._slack
        its_west_inside = (west - wider - self._west) % 360.0 <= width
        own_west_inside = (self._west - west + wider) % 360.0 <= east - west + 2 * wider + self._slack
        return [int(number) for number in np.flatnonzero(near & (its_west_inside | own_west_inside))]


def apply(transform: Affine, across: Number, down: Number) -> tuple[Number, Number]:
    """Turn columns and rows of pixel corners into x, y, or back with the inverse."""
    t = transform
    return t.a * across + t.b * down + t.c, t.d * across + t.e * down + t.f


def way_to(crs: CRS) -> Transformer | None:
    """From longitude and latitude to x, y; None where they are the same. Raises ProjError where there is no way."""
    plain = crs.is_geographic and _is_wgs84(crs)
    return None if plain else Transformer.from_crs(_WGS84, crs, always_xy=True)


def crs_text(crs: CRS) -> str:
    """Short name of a coordinate system: its EPSG code where it carries one, else its name."""
    identity = crs.to_json_dict().get("id")
    return f"{identity['authority']}:{identity['code']}" if identity else str(crs.name)


def _horizontal(crs: CRS) -> CRS:
    """The part that places a sample; a vertical part or a third axis says nothing of where it is."""
    part = crs.sub_crs_list[0] if crs.is_compound else crs
    return part.to_2d() if len(part.axis_info) > 2 else part


def _is_wgs84(crs: CRS) -> bool:
    """Longitude and latitude in degrees from Greenwich on WGS 84, as nearly all open tiles are."""
    datum = crs.datum or (crs.source_crs.datum if crs.source_crs else None)
    degrees = all(axis.unit_name == "degree" for axis in crs.axis_info)
    greenwich = crs.prime_meridian is not None and crs.prime_meridian.longitude == 0
    return degrees and greenwich and datum is not None and datum.name.startswith("World Geodetic System 1984")


def _bounds(
    rows: int, columns: int, transform: Affine, to_crs: Transformer | None
) -> tuple[float, float, float, float]:
    """West, south, east, north of the pixels' outer edges [deg]; east may exceed 180, never below west."""
    across, down = np.array([0.0, columns, columns, 0.0]), np.array([0.0, 0.0, rows, rows])
    corner_x, corner_y = apply(transform, across, down)
    box = (corner_x.min(), corner_y.min(), corner_x.max(), corner_y.max())
    if to_crs is None:
        return float(box[0]), float(box[1]), float(box[2]), float(box[3])
    west, south, east, north = to_crs.transform_bounds(*box, densify_pts=41, direction="INVERSE")
    return west, south, east + 360.0 * (east < west), north
