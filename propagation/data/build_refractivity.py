"""Make refractivity.csv: the two P.453 maps as P.452-16 carries them, on a 3° grid.

Run from a checkout with the test extra: `python propagation/data/build_refractivity.py`.
Reads the maps out of the installed pycraf (figures only, nothing of it is run).
"""

import hashlib
import importlib.util
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

MAP_STEP_DEG = 1.5
STEP_DEG = 3.0
HERE = Path(__file__).parent

FloatArray = NDArray[np.float64]


def published_maps() -> dict[str, FloatArray]:
    """Both maps, rows from 90 S to 90 N, columns 0 to 358.5 E."""
    spec = importlib.util.find_spec("pycraf")
    if spec is None or spec.origin is None:
        raise SystemExit("pycraf is not installed: pip install -e '.[test]'")
    with np.load(Path(spec.origin).parent / "itudata" / "p.452-16" / "refract_map.npz") as maps:
        return {
            "delta_n_per_km": maps["dn50"][::-1, :-1].astype(float),
            "n0": maps["n050"][::-1, :-1].astype(float),
        }


def linear_weights(position_deg: FloatArray, knot_deg: FloatArray, period_deg: float = np.inf) -> FloatArray:
    """Weight of every knot at every position, for linear interpolation."""
    apart = np.abs(position_deg[:, None] - knot_deg)
    apart = np.minimum(apart, period_deg - apart)
    weights: FloatArray = np.clip(1 - apart / (knot_deg[1] - knot_deg[0]), 0, None)
    return weights


def fitted_grid(published: FloatArray, rows: FloatArray, columns: FloatArray) -> FloatArray:
    """Values on the coarse grid whose bilinear surface keeps the largest error small.

    Start: least squares. Then repeated projections of the error raised to the 7th power, which
    push the largest errors down. The grids share their points, so on no place between them is
    the error larger than at a point of the published map.
    """
    to_rows, to_columns = np.linalg.pinv(rows), np.linalg.pinv(columns)
    grid = to_rows @ published @ to_columns.T
    best, lowest = grid, np.inf
    for _ in range(400):
        error = rows @ grid @ columns.T - published
        largest = np.abs(error).max()
        if largest < lowest:
            best, lowest = grid, largest
        worst = largest * np.sign(error) * np.abs(error / largest) ** 7
        grid = grid - 0.3 * (to_rows @ worst @ to_columns.T)
    return best


def main() -> None:
    """Write the table and say how far it is from the maps."""
    map_latitude, map_longitude = np.arange(-90, 90.1, MAP_STEP_DEG), np.arange(0, 360, MAP_STEP_DEG)
    latitude, longitude = np.arange(-90, 90.1, STEP_DEG), np.arange(0, 360, STEP_DEG)
    rows = linear_weights(map_latitude, latitude)
    columns = linear_weights(map_longitude, longitude, 360)
    rounded = {}
    for name, published in published_maps().items():
        grid = fitted_grid(published, rows, columns)
        grid[[0, -1]] = published[[0, -1], :1]  # one value at each pole
        rounded[name] = np.round(grid, 1)
        error = rows @ rounded[name] @ columns.T - published
        print(f"{name}: largest error {np.abs(error).max():.2f}, RMS {np.sqrt((error**2).mean()):.2f}")
    lines = ["latitude_deg,longitude_deg,delta_n_per_km,n0"]
    for i, lat in enumerate(latitude):
        for j, lon in enumerate(longitude):
            lapse, n0 = rounded["delta_n_per_km"][i, j], rounded["n0"][i, j]
            lines.append(f"{lat:.0f},{lon:.0f},{lapse:.1f},{n0:.1f}")
    text = "\n".join(lines) + "\n"
    (HERE / "refractivity.csv").write_text(text, encoding="utf-8", newline="\n")
    print("sha256", hashlib.sha256(text.encode()).hexdigest())


if __name__ == "__main__":
    main()
