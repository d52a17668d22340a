"""Which wanted emissions act together as single-frequency networks, and those networks as columns."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app import network
from app.errors import ModeError
from app.fields import EmissionField

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Network:
    """Members of one single-frequency network at a roof."""

    members: NDArray[np.intp]  # (m,) rows of the wanted emissions
    arrival_us: FloatArray  # (m,) path and static delay
    symbol: network.Symbol
    bandwidth_mhz: float
    rise_at_0_db: float  # of the required C/N by an echo of 0 dB
    delay_assumed: bool  # a member's static delay is not stated and taken as 0


@dataclass(frozen=True, slots=True)
class Group:
    """Networks of equally many members, one row each, which are reckoned together."""

    members: NDArray[np.intp]  # (n, m) rows of the wanted emissions
    arrival_us: FloatArray  # (n, m)
    shares: FloatArray  # (n, m, m) of network.shares_by_start
    bandwidth_mhz: FloatArray  # (n,)
    rise_at_0_db: FloatArray  # (n,)


def grouped(networks: Sequence[Network]) -> tuple[Group, ...]:
    """Gather networks by their number of members."""
    by_size: dict[int, list[Network]] = {}
    for one in networks:
        by_size.setdefault(len(one.members), []).append(one)
    return tuple(
        Group(
            np.stack([one.members for one in ones]),
            np.stack([one.arrival_us for one in ones]),
            np.stack([network.shares_by_start(one.arrival_us, one.symbol) for one in ones]),
            np.array([one.bandwidth_mhz for one in ones]),
            np.array([one.rise_at_0_db for one in ones]),
        )
        for ones in by_size.values()
    )


def networks_among(wanted: Sequence[EmissionField]) -> tuple[list[Network], list[str]]:
    """Networks among the wanted emissions: one content, one frequency, one mode, several masts."""
    groups: dict[tuple[str, float, float], list[int]] = {}
    for e, sent in enumerate(wanted):
        key = (sent.emission.multiplex_id, round(sent.emission.frequency_mhz, 3), sent.emission.bandwidth_mhz)
        groups.setdefault(key, []).append(e)
    networks: list[Network] = []
    cautions: list[str] = []
    for rows in groups.values():
        if len(rows) < 2:
            continue
        first = wanted[rows[0]].emission
        masts = {(wanted[e].transmitter.latitude_deg, wanted[e].transmitter.longitude_deg) for e in rows}
        told = {(wanted[e].emission.system, wanted[e].emission.mode, wanted[e].emission.guard) for e in rows}
        where = f"{first.multiplex_id} on {first.frequency_mhz:g} MHz"
        if len(told) > 1:
            cautions.append(f"{where}: its masts do not send the same mode, so they count as disturbing each other.")
            continue
        if len(masts) < 2:
            continue
        try:
            symbol = network.symbol_of(first.system, first.bandwidth_mhz, first.guard)
        except ModeError as error:
            cautions.append(f"{where}: {error.message}; its masts count as disturbing each other.")
            continue
        if symbol is None:
            cautions.append(
                f"{where}: {first.system} has no guard interval, so its masts count as disturbing each other."
            )
            continue
        delays = [wanted[e].emission.static_delay_us for e in rows]
        one = Network(
            np.array(rows),
            np.array([wanted[e].distance_km for e in rows]) / network.LIGHT_KM_PER_US
            + np.array([delay or 0.0 for delay in delays]),
            symbol,
            first.bandwidth_mhz,
            network.rise_at_0_db(first.system, first.mode),
            any(delay is None for delay in delays),
        )
        networks.append(one)
        unknown = ["static delays taken as 0"] * one.delay_assumed + [
            f"guard interval taken as the usual {symbol.guard_us:.0f} µs"
        ] * symbol.assumed
        if unknown:
            cautions.append(f"{where} is a single-frequency network; not stated: {' and '.join(unknown)}.")
    return networks, cautions
