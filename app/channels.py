"""Channel rasters: which frequency a channel's number stands for. The raster belongs to the country."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from functools import cache

from app.errors import ModeError
from app.tables import rows

# Older assignments stand up to 1/6 MHz off the raster, to spare a neighbour on the same channel.
OFFSET_MHZ = 0.17
OFFSET_SHARE = 0.1  # of the channel's width, where that is less: FM


@dataclass(frozen=True, slots=True)
class Channel:
    """One channel of a raster."""

    name: str
    centre_mhz: float
    bandwidth_mhz: float
    flag: str  # how the figure is known
    source: str


@dataclass(frozen=True, slots=True)
class Raster:
    """The channels of one area."""

    id: str
    area: str
    channels: dict[str, Channel]


def rasters() -> tuple[Raster, ...]:
    """Every raster of the table."""
    return tuple(_rasters().values())


def raster_of(raster: str) -> Raster:
    """Raster by its id.

    Raises
    ------
    ModeError
        No such raster; the message lists them.
    """
    found = _rasters().get(raster.strip().casefold())
    if found is None:
        listed = ", ".join(_rasters())
        raise ModeError(f'channel raster "{raster}" is not known: use {listed}', field="raster", allowed=listed)
    return found


def centre_mhz(raster: str, channel: str) -> tuple[float, float]:
    """Centre frequency and bandwidth of a channel [MHz]; "47", "047" and " 47 " are the same.

    Raises
    ------
    ModeError
        No such raster or channel; the message lists what there is.
    """
    found = raster_of(raster)
    name = channel.strip().upper().lstrip("0")
    if name not in found.channels:
        listed = _spans(found)
        raise ModeError(f'raster {found.id} has no channel "{channel}": use {listed}', field="channel", allowed=listed)
    known = found.channels[name]
    return known.centre_mhz, known.bandwidth_mhz


def channel_of(raster: str, frequency_mhz: float) -> str:
    """Name of the channel whose centre this frequency is, up to an offset of 1/6 MHz or a tenth of its width.

    Raises
    ------
    ModeError
        The frequency [MHz] is no centre of the raster; the message names the nearest one.
    """
    found = raster_of(raster)
    nearest = min(found.channels.values(), key=lambda channel: abs(channel.centre_mhz - frequency_mhz))
    if not abs(nearest.centre_mhz - frequency_mhz) <= min(OFFSET_MHZ, OFFSET_SHARE * nearest.bandwidth_mhz):
        raise ModeError(
            f"{frequency_mhz:g} MHz is no channel's centre in raster {found.id}: "
            f"the nearest is channel {nearest.name} at {nearest.centre_mhz:.6g} MHz",
            field="frequency_mhz",
            allowed=_spans(found),
        )
    return nearest.name


@cache
def _rasters() -> dict[str, Raster]:
    found: dict[str, Raster] = {}
    for row in rows("channels"):
        raster = found.setdefault(row["raster"], Raster(row["raster"], row["area"], {}))
        for number in range(int(row["first"]), int(row["last"]) + 1):
            centre = round(float(row["base_mhz"]) + float(row["step_mhz"]) * number, 9)
            name = row["label"].format(mhz=centre) or str(number)  # FM channels are called by their frequency
            raster.channels[name] = Channel(name, centre, float(row["bandwidth_mhz"]), row["flag"], row["source"])
    return found


def _spans(raster: Raster) -> str:
    """Channels of a raster in words, neighbours joined: "2 to 36, 38 to 69"."""
    names = list(raster.channels)
    spans: list[list[str]] = [[names[0]]]
    for before, name in itertools.pairwise(names):
        if before.isdigit() and name.isdigit() and int(name) == int(before) + 1:
            spans[-1].append(name)
        else:
            spans.append([name])
    return ", ".join(span[0] if len(span) == 1 else f"{span[0]} to {span[-1]}" for span in spans)
