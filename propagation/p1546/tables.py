"""The tabulated field strengths of Rec. ITU-R P.1546-6, Annexes 2 to 4, as one array."""

import csv
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.intp]

SURFACES = ("land", "cold_sea", "warm_sea")
TIMES_PERCENT = np.array([1.0, 10.0, 50.0])
FREQUENCIES_MHZ = np.array([100.0, 600.0, 2000.0])
HEIGHTS_M = np.array([10.0, 20.0, 37.5, 75.0, 150.0, 300.0, 600.0, 1200.0])
DISTANCES_KM = np.concatenate(
    [
        np.arange(1.0, 21.0),
        np.arange(25.0, 101.0, 5.0),
        np.arange(110.0, 201.0, 10.0),
        np.arange(225.0, 1001.0, 25.0),
    ]
)


@dataclass(frozen=True, slots=True)
class FieldTables:
    """Fields for 1 kW in dB(µV/m) over the nominal values above."""

    field_dbuv_m: FloatArray  # (surface 3, time 3, frequency 3, distance 78, height 8)
    maximum_dbuv_m: FloatArray  # (surface 3, time 3, frequency 3, distance 78)


@cache
def field_tables() -> FieldTables:
    """Read the tables once; a sea figure without a temperature serves cold and warm sea.

    References
    ----------
    Rec. ITU-R P.1546-6 (08/2019), Figures 1 to 24; layout in data/p1546_tables.source.toml.
    """
    shape = (len(SURFACES), len(TIMES_PERCENT), len(FREQUENCIES_MHZ), len(DISTANCES_KM))
    field = np.full((*shape, len(HEIGHTS_M)), np.nan)
    maximum = np.full(shape, np.nan)
    with files("propagation").joinpath("data/p1546_tables.csv").open(encoding="utf-8") as file:
        rows = csv.reader(file)
        next(rows)
        for row in rows:
            surfaces = (1, 2) if row[2] == "sea" else (SURFACES.index(row[2]),)
            time = int(np.searchsorted(TIMES_PERCENT, float(row[3])))
            frequency = int(np.searchsorted(FREQUENCIES_MHZ, float(row[1])))
            distance = int(np.searchsorted(DISTANCES_KM, float(row[4])))
            for surface in surfaces:
                field[surface, time, frequency, distance] = [float(cell) for cell in row[5:13]]
                maximum[surface, time, frequency, distance] = float(row[13])
    for table in (field, maximum):
        table.setflags(write=False)  # shared by every caller
    return FieldTables(field_dbuv_m=field, maximum_dbuv_m=maximum)


@dataclass(frozen=True, slots=True)
class Place:
    """Where values stand between two nominal ones: both indices agree and share is 0 on a nominal value."""

    below: IntArray
    above: IntArray
    share: FloatArray  # 0 at below, 1 at above, beyond both where the nominal range is left

    def between(self, at_below: FloatArray, at_above: FloatArray) -> FloatArray:
        """Interpolate; exact on a nominal value."""
        return at_below + self.share * (at_above - at_below)


def neighbours(nominal: FloatArray, value: FloatArray) -> tuple[IntArray, IntArray]:
    """Indices of the nominal values on both sides, equal on a nominal value; outside, the nearest two."""
    above = np.clip(np.searchsorted(nominal, value), 1, len(nominal) - 1)
    below = above - 1
    return np.where(nominal[above] == value, above, below), np.where(nominal[below] == value, below, above)


def place(nominal: FloatArray, value: FloatArray) -> Place:
    """Where values stand in nominal ones by their logarithm (eqs. 8, 13 and 14)."""
    below, above = neighbours(nominal, value)
    step = np.log10(nominal)
    width = np.where(below == above, 1.0, step[above] - step[below])
    return Place(below, above, (np.log10(value) - step[below]) / width)
