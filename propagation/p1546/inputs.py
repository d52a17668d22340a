"""Arguments of `field_strength` as flat arrays, checked against the limits of Rec. ITU-R P.1546-6."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.errors import RangeError

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

ENVIRONMENTS = ("rural", "suburban", "urban", "dense_urban", "sea")
_IN_CLUTTER = ("suburban", "urban", "dense_urban")
_SIGMA_DB = {"rural": 12.0, "suburban": 10.0, "urban": 8.0, "dense_urban": 8.0, "sea": 0.0}  # terrain unknown

# name, words, lowest, highest, unit
_LIMITS = (
    ("frequency_mhz", "frequency", 30.0, 4000.0, "MHz"),
    ("time_percent", "time percentage", 1.0, 50.0, "%"),
    ("path_length_km", "path length", 1e-3, 1000.0, "km"),
    ("cold_sea_km", "length over cold sea", 0.0, 1000.0, "km"),
    ("warm_sea_km", "length over warm sea", 0.0, 1000.0, "km"),
    ("land_km", "length over land", 0.0, 1000.0, "km"),
    ("h1_source_height_m", "source height", -9000.0, 20000.0, "m"),
    ("tx_height_agl_m", "antenna height", 0.0, 3000.0, "m above ground"),
    ("rx_height_agl_m", "aerial height", 1.0, 3000.0, "m above ground"),
    ("tx_clutter_height_m", "clutter height at the transmitter", 0.0, 500.0, "m"),
    ("rx_clutter_height_m", "clutter height at the receiver", 0.0, 500.0, "m"),
    ("tx_clearance_angle_deg", "clearance angle at the transmitter", -90.0, 90.0, "degrees"),
    ("rx_clearance_angle_deg", "clearance angle at the receiver", -90.0, 90.0, "degrees"),
    ("tx_ground_amsl_m", "ground at the transmitter", -500.0, 9000.0, "m above sea level"),
    ("rx_ground_amsl_m", "ground at the receiver", -500.0, 9000.0, "m above sea level"),
    ("location_percent", "location percentage", 1.0, 99.0, "%"),
    ("location_sigma_db", "spread over locations", 0.0, 30.0, "dB"),
    ("location_area_width_m", "width of the area", 1.0, 100000.0, "m"),
    ("erp_kw", "radiated power", 1e-9, 1e5, "kW"),
)


@dataclass(frozen=True, slots=True)
class Inputs:
    """Every input as an array (n,), NaN where an optional one is missing."""

    shape: tuple[int, ...]  # common shape of the arguments
    frequency_mhz: FloatArray
    time_percent: FloatArray
    path_length_km: FloatArray
    sea_share: FloatArray
    warm_sea_km: FloatArray
    h1_source_height_m: FloatArray
    tx_height_agl_m: FloatArray
    rx_height_agl_m: FloatArray
    rx_in_clutter: BoolArray
    rx_at_sea: BoolArray
    sigma_of_surroundings_db: FloatArray
    tx_clutter_height_m: FloatArray
    rx_clutter_height_m: FloatArray
    tx_clearance_angle_deg: FloatArray
    rx_clearance_angle_deg: FloatArray
    height_difference_m: FloatArray  # of the antennas, over sea level where the ground is known
    terrain_information: BoolArray
    location_percent: FloatArray
    location_sigma_db: FloatArray
    location_area_width_m: FloatArray
    erp_kw: FloatArray


def checked_inputs(*, rx_environment: ArrayLike, terrain_information: ArrayLike, **numbers: ArrayLike | None) -> Inputs:
    """Broadcast all arguments and refuse what lies outside the Recommendation (RangeError)."""
    environment = np.asarray(rx_environment)
    names = list(numbers)
    broadcast = np.broadcast_arrays(
        environment,
        np.asarray(terrain_information, dtype=bool),
        *(np.asarray(np.nan if numbers[name] is None else numbers[name], dtype=float) for name in names),
    )
    shape = broadcast[0].shape
    environment, terrain = broadcast[0].ravel(), broadcast[1].ravel()
    value = {name: array.ravel() for name, array in zip(names, broadcast[2:], strict=True)}
    for name, words, lowest, highest, unit in _LIMITS:
        _check(value[name], words, lowest, highest, unit)

    unknown = environment[~np.isin(environment, ENVIRONMENTS)]
    if unknown.size:
        raise RangeError(f'surroundings "{unknown[0]}" are not known: use {", ".join(ENVIRONMENTS)}')
    at_sea, in_clutter = environment == "sea", np.isin(environment, _IN_CLUTTER)
    _check(np.where(at_sea, value["rx_height_agl_m"], np.nan), "aerial height at sea", 3.0, 3000.0, "m")
    if numbers["rx_clutter_height_m"] is None and in_clutter.any():
        raise RangeError(
            f"surroundings {environment[in_clutter][0]} need a clutter height: give rx_clutter_height_m, "
            "or rural surroundings"
        )
    d, ha = value["path_length_km"], value["tx_height_agl_m"]
    if ((d < 1) & np.isnan(ha)).any():
        raise RangeError(f"path of {d.min():g} km needs the antenna's height: give tx_height_agl_m below 1 km")
    no_spread = terrain & np.isnan(value["location_sigma_db"]) & np.isnan(value["location_area_width_m"])
    if ((value["location_percent"] != 50) & ~at_sea & no_spread).any():
        raise RangeError(
            "location percentages other than 50 need a spread: give location_sigma_db or location_area_width_m"
        )

    ground = value["tx_ground_amsl_m"] - value["rx_ground_amsl_m"]
    return Inputs(
        shape=shape,
        sea_share=_sea_share(d, value["land_km"], value["cold_sea_km"] + value["warm_sea_km"]),
        rx_in_clutter=in_clutter,
        rx_at_sea=at_sea,
        sigma_of_surroundings_db=np.select(
            [environment == name for name in _SIGMA_DB], list(_SIGMA_DB.values()), np.nan
        ),
        height_difference_m=ha - value["rx_height_agl_m"] + np.where(np.isnan(ground), 0.0, ground),
        terrain_information=terrain,
        **{name: value[name] for name in names if name in Inputs.__slots__},
    )


def _check(values: FloatArray, words: str, lowest: float, highest: float, unit: str) -> None:
    outside = (values < lowest) | (values > highest)
    if outside.any():
        raise RangeError(
            f"{words} {values[outside][0]:g} {unit} is outside Rec. ITU-R P.1546-6: "
            f"use {lowest:g} to {highest:g} {unit}"
        )


def _sea_share(d: FloatArray, land: FloatArray, sea: FloatArray) -> FloatArray:
    total = np.where(np.isnan(land), np.maximum(d, sea), land + sea)
    wrong = np.abs(total - d) > 1e-3 * d
    if wrong.any():
        raise RangeError(
            f"sections add up to {total[wrong][0]:g} km on a path of {d[wrong][0]:g} km: "
            "give lengths over land and sea that fill the path"
        )
    share = np.clip(sea / d, 0.0, 1.0)
    # A trace of land left by rounding would count on a path all over sea: its weight is share^(2/3).
    return np.where(np.abs(share - np.round(share)) < 1e-9, np.round(share), share)
