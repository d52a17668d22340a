"""Broadcast systems and their modes: what a set needs, and how wide and noisy it listens."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache

from app.errors import ModeError
from app.tables import rows, told_source


@dataclass(frozen=True, slots=True)
class Mode:
    """One modulation and code rate of a system."""

    system: str
    name: str
    raw_cn_db: float  # as the standard gives it
    added_cn_db: float  # from there to the planning value for fixed roof reception
    noise_figure_db: float  # planning value of a set for this system
    bandwidths: tuple[tuple[float, float], ...]  # (channel bandwidth, noise bandwidth) in MHz
    source: str
    flag: str  # how the raw figure is known

    @property
    def required_cn_db(self) -> float:
        """C/N that fixed roof reception is planned with."""
        return self.raw_cn_db + self.added_cn_db

    def noise_bandwidth_mhz(self, channel_bandwidth_mhz: float) -> float:
        """Bandwidth in which a set gathers noise, for a channel's bandwidth; both in MHz.

        Raises
        ------
        ModeError
            The system is not in the table with channels of that width.
        """
        for channel, noise in self.bandwidths:
            if abs(channel - channel_bandwidth_mhz) < 1e-6:
                return noise
        listed = ", ".join(f"{channel:g}" for channel, _ in self.bandwidths)
        raise ModeError(
            f"{self.system} has no channels of {channel_bandwidth_mhz:g} MHz in the table: use {listed} MHz",
            field="bandwidth_mhz",
            allowed=listed,
        )


@dataclass(frozen=True, slots=True)
class System:
    """One broadcast system with its modes."""

    name: str
    modes: tuple[Mode, ...]


def systems() -> tuple[System, ...]:
    """Every system of the tables, with its modes."""
    return tuple(_systems().values())


def system_of(text: str) -> System:
    """System by its name; case, spaces and dashes do not matter ("dvbt2" is DVB-T2).

    Raises
    ------
    ModeError
        No such system; the message lists them.
    """
    wanted = _plain(text)
    for key, system in _systems().items():
        if wanted == key:
            return system
    listed = ", ".join(system.name for system in systems())
    raise ModeError(f'system "{text}" is not known: use {listed}', field="system", allowed=listed)


@cache
def mode_of(system: str, mode: str) -> Mode:
    """Mode by system and name; "256QAM 2/3", "qam256, 2/3" and "256-QAM 2/3" are the same.

    Raises
    ------
    ModeError
        No such system or mode; the message lists what there is.
    """
    found = system_of(system)
    wanted = _plain_mode(mode)
    for candidate in found.modes:
        if _plain_mode(candidate.name) == wanted:
            return candidate
    listed = ", ".join(candidate.name for candidate in found.modes)
    raise ModeError(f'{found.name} has no mode "{mode}": use one of {listed}', field="mode", allowed=listed)


@cache
def _systems() -> dict[str, System]:
    bandwidths = rows("noise_bandwidths")
    figures = rows("modes")
    found: dict[str, System] = {}
    for system in rows("systems"):
        name = system["system"]
        widths = tuple(
            (float(row["channel_bandwidth_mhz"]), float(row["noise_bandwidth_mhz"]))
            for row in bandwidths
            if row["system"] == name
        )
        modes = tuple(
            Mode(
                name,
                row["mode"],
                float(row["raw_cn_db"]),
                float(system["added_cn_db"]),
                float(system["noise_figure_db"]),
                widths,
                _source(row, system),
                row["flag"],
            )
            for row in figures
            if row["system"] == name
        )
        found[_plain(name)] = System(name, modes)
    return found


def _source(row: dict[str, str], system: dict[str, str]) -> str:
    added = float(system["added_cn_db"])
    raw = f"{float(row['raw_cn_db']):g} dB, {told_source(row['source'], row['flag'])}"
    if added == 0:
        return raw
    return f"{raw}; {added:g} dB to planning, {told_source(system['added_source'], system['added_flag'])}"


def _plain(text: str) -> str:
    return re.sub(r"[^a-z0-9+]", "", text.casefold().replace("plus", "+"))  # DAB+ is not DAB


def _plain_mode(text: str) -> str:
    kept = re.sub(r"[^a-z0-9/]", "", text.casefold())
    return re.sub(r"^(qam|vsb)(256|64|32|16|8|4)", r"\2\1", kept)
