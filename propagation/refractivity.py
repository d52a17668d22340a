"""Refractivity of the air by place (Rec. ITU-R P.453): median lapse rate and sea-level value.

The package carries both maps on a grid of 3° (data/refractivity.csv); the full maps of 1.5°
are read from a folder where the user names one.
"""

from functools import lru_cache
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import RegularGridInterpolator

from propagation.errors import MapError, RangeError

FloatArray = NDArray[np.float64]

TABLE = Path(__file__).parent / "data" / "refractivity.csv"
MAP_NAMES = ("DN50.TXT", "N050.TXT")
MAP_SHAPE = (121, 241)  # rows from 90 N to 90 S, columns from 0 to 360 E, every 1.5°


def refractivity(
    latitude_deg: ArrayLike, longitude_deg: ArrayLike, maps_folder: Path | None = None
) -> tuple[FloatArray, FloatArray]:
    """Lapse rate and sea-level refractivity exceeded in half of the year, at a position.

    For a path: the position of its centre. Inputs broadcast; NaN in, NaN out.

    Parameters
    ----------
    latitude_deg : array
        -90 to 90, north positive. [deg]
    longitude_deg : array
        Any finite longitude; it is wrapped to one turn. [deg]
    maps_folder : Path, optional
        Folder with the digital maps DN50.TXT and N050.TXT of the Recommendations (121 rows from
        90 N, 241 columns from 0 to 360 E), read once. Without it the package's own table answers.

    Returns
    -------
    delta_n_per_km, n0 : array
        Fall of refractivity over the first kilometre, positive [N/km]; refractivity reduced to
        sea level [N]. Bilinear between the points of the grid. The own table departs from the
        maps by at most 7.0 N/km (0.3 RMS) and 5.3 N (0.3 RMS).

    Raises
    ------
    RangeError
        A latitude beyond a pole or a longitude that is not finite.
    MapError
        A map that is missing or not of that form.

    References
    ----------
    Rec. ITU-R P.1812-7, section 3.5; digital maps "DN50" and "N050" of Rec. ITU-R P.452-16 and
    P.1812; bilinear interpolation as in Rec. ITU-R P.1144.
    """
    latitude, longitude = np.broadcast_arrays(
        np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float)
    )
    beyond = np.abs(latitude) > 90
    if beyond.any():
        raise RangeError(f"latitude {latitude[beyond][0]:g} is beyond a pole: use -90 to 90 degrees")

    if np.isinf(longitude).any():
        raise RangeError("longitude is infinite: give degrees east of Greenwich, west negative")

    values = (_own_table() if maps_folder is None else _maps(maps_folder))(
        np.stack([latitude, np.mod(longitude, 360.0)], axis=-1)
    )
    return values[..., 0], values[..., 1]


@lru_cache(maxsize=1)
def _own_table() -> RegularGridInterpolator:
    rows = np.loadtxt(TABLE, delimiter=",", skiprows=1)
    latitude, longitude = np.unique(rows[:, 0]), np.unique(rows[:, 1])
    grid = rows[:, 2:].reshape(latitude.size, longitude.size, 2)
    closed = np.concatenate([grid, grid[:, :1]], axis=1)  # 360 E is 0 E
    # outside the bounds is only NaN, which stays NaN
    return RegularGridInterpolator((latitude, np.append(longitude, 360.0)), closed, bounds_error=False)


@lru_cache(maxsize=4)
def _maps(folder: Path) -> RegularGridInterpolator:
    latitude, longitude = np.linspace(90, -90, MAP_SHAPE[0]), np.linspace(0, 360, MAP_SHAPE[1])
    both = np.stack([_map(folder / name) for name in MAP_NAMES], axis=-1)
    return RegularGridInterpolator((latitude[::-1], longitude), both[::-1], bounds_error=False)


def _map(path: Path) -> FloatArray:
    wanted = f"{MAP_SHAPE[0]} lines of {MAP_SHAPE[1]} numbers, from 90 N and 0 E in steps of 1.5 degrees"
    if not path.is_file():
        raise MapError(f"no map {path}: the folder must hold {' and '.join(MAP_NAMES)}, or leave the folder away")
    try:
        figures = np.loadtxt(path, dtype=float, ndmin=2)
    except ValueError as error:
        raise MapError(f"{path} is not a map ({error}): it needs {wanted}") from error
    if figures.shape != MAP_SHAPE:
        raise MapError(f"{path} holds {figures.shape[0]} x {figures.shape[1]} numbers: it needs {wanted}")
    if not np.isfinite(figures).all():
        raise MapError(f"{path} holds a figure that is no number: fetch the file again, it needs {wanted}")
    return figures
