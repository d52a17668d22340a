"""The plane of the `slope` fixture, and positions of samples."""

import numpy as np

WEST, NORTH, PIXEL = 8.0, 47.0, 0.001


def plane(lat, lon):
    """The height that the `slope` fixture's raster has at a position: half a pixel off its corner."""
    row, column = (NORTH - lat) / PIXEL - 0.5, (lon - WEST) / PIXEL - 0.5
    return 100 + 3 * row + 2 * column


def samples(rows, columns, north=NORTH, west=WEST, pixel=PIXEL):
    """Latitudes (rows, 1) and longitudes (columns,) of sample centres."""
    return north - (np.arange(rows)[:, None] + 0.5) * pixel, west + (np.arange(columns) + 0.5) * pixel
