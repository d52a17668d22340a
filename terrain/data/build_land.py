"""Builds land.npz from Natural Earth's 1:10m land as TopoJSON: `python build_land.py land_10m.topo.json`.

Rows of 30 arc-seconds from north to south; each keeps the columns at which sea turns into land and back.
A cell is land where its centre is.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Any

import numpy as np
from affine import Affine
from numpy.typing import NDArray
from rasterio.features import rasterize

CELLS_PER_DEGREE = 120
ROWS, COLUMNS = 180 * CELLS_PER_DEGREE, 360 * CELLS_PER_DEGREE
STRIP = 600  # rows at once


def polygons(topology: dict[str, Any]) -> list[dict[str, Any]]:
    """Polygons in degrees from quantised, shared arcs (TopoJSON specification 1.0, sections 2.1.3 and 2.1.4)."""
    scale, origin = topology["transform"]["scale"], topology["transform"]["translate"]
    arcs = [np.cumsum(arc, axis=0) * scale + origin for arc in topology["arcs"]]

    def ring(numbers: list[int]) -> NDArray[np.float64]:
        parts = [arcs[n] if n >= 0 else arcs[~n][::-1] for n in numbers]
        return whole_turn(np.vstack([parts[0], *(part[1:] for part in parts[1:])]))

    (geometry,) = topology["objects"]["land"]["geometries"]
    shapes = []
    for numbers in geometry["arcs"]:
        outer, *holes = (ring(one) for one in numbers)
        if len(outer) < 4:
            continue  # quantising left some islets with fewer corners than an area needs
        middle = outer[:, 0].mean()
        holes = [hole - [360 * round((hole[:, 0].mean() - middle) / 360), 0] for hole in holes]
        for turn in (-360, 0, 360):
            if outer[:, 0].min() + turn < 180 and outer[:, 0].max() + turn > -180:
                rings = [np.add(one, [turn, 0]).tolist() for one in (outer, *holes)]
                shapes.append({"type": "Polygon", "coordinates": rings})
    return shapes


def whole_turn(ring: NDArray[np.float64]) -> NDArray[np.float64]:
    """The source joins land across the 180th meridian: longitudes go on there; round a pole the ring goes over it."""
    lon = np.unwrap(ring[:, 0], period=360)
    ring = np.column_stack([lon, ring[:, 1]])
    if abs(lon[-1] - lon[0]) > 180:
        pole = 90.0 if ring[:, 1].mean() > 0 else -90.0
        ring = np.vstack([ring, [lon[-1], pole], [lon[0], pole], ring[:1]])
    return ring


def main(source: Path) -> None:
    """Write land.npz."""
    shapes = polygons(json.loads(source.read_text()))
    counts, columns = [], []
    for first in range(0, ROWS, STRIP):
        transform = Affine(1 / CELLS_PER_DEGREE, 0, -180, 0, -1 / CELLS_PER_DEGREE, 90 - first / CELLS_PER_DEGREE)
        land = rasterize(shapes, out_shape=(STRIP, COLUMNS), transform=transform, dtype="uint8")
        turns = np.diff(np.pad(land, ((0, 0), (1, 0))), axis=1) != 0
        row, column = np.nonzero(turns)
        counts.append(np.bincount(row, minlength=STRIP))
        columns.append(column)
    np.savez_compressed(
        Path(__file__).with_name("land.npz"),
        counts=np.concatenate(counts).astype(np.uint16),
        columns=np.concatenate(columns).astype(np.uint16),
    )
    print(sum(map(len, columns)), "turns")


if __name__ == "__main__":
    main(Path(sys.argv[1]))
