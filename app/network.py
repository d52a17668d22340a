"""Single-frequency networks: what arrives in time adds, what arrives late or early disturbs.

Each member's power is split by its delay tau after the start of the receiver's window: the share w(tau) is
useful, 1 - w(tau) disturbs,

    w = 1                              0 <= tau <= guard
    w = ((Tu + guard - tau) / Tu)^2    guard < tau <= Tp
    w = 0                              before the window, and beyond Tp

with the useful interval Tu and the longest echo Tp that the channel estimation follows: 7 Tu / 24 for DVB-T
and ISDB-T, 57/64 of Tu / Dx for DVB-T2, Dx being the carriers from pilot to pilot of the pattern that goes
with the guard interval (Rec. ITU-R BT.1368 and EBU Tech 3348, from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from functools import cache
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.errors import ModeError
from app.tables import rows

FloatArray = NDArray[np.float64]

LIGHT_KM_PER_US = 0.299792458
Window = Literal["first above the threshold", "strongest"]

# Carriers from pilot to pilot of the DVB-T2 pattern usual with a guard interval up to this (EN 302 755).
_PILOTS = ((Fraction(1, 128), 24), (Fraction(19, 256), 12), (Fraction(19, 128), 6), (Fraction(1, 4), 3))


@dataclass(frozen=True, slots=True)
class Symbol:
    """Times of one multi-carrier mode."""

    useful_us: float  # Tu
    guard_us: float
    longest_us: float  # Tp
    assumed: bool  # the register named no guard interval: the usual one is taken


def symbol_of(system: str, channel_mhz: float, guard: str = "") -> Symbol | None:
    """Times of a system on a channel of a width, for a guard interval such as "8K 1/4"; empty: the usual one.

    None for a system that is no multi-carrier system.

    Raises
    ------
    ModeError
        The system has no such carriers or guard interval; the message lists them.
    """
    table = [row for row in _symbols() if row["system"] == system]
    if not table:
        return None
    usual = next(row for row in table if row["usual"])
    fft, _, share = (guard or f"{usual['fft']} {usual['usual']}").strip().upper().partition(" ")
    for row in table:
        if row["fft"] == fft and share in row["guards"].split():
            useful_us = float(row["useful_us"]) * float(row["reference_bandwidth_mhz"]) / channel_mhz
            part = Fraction(share)
            longest = 7 / 24 * useful_us
            if system == "DVB-T2":
                spacing = next(pilots for up_to, pilots in _PILOTS if part <= up_to)
                longest = 57 / 64 * useful_us / spacing
            guard_us = useful_us * float(part)
            return Symbol(useful_us, guard_us, max(longest, guard_us), not guard)
    listed = "; ".join(f"{row['fft']} {row['guards']}" for row in table)
    raise ModeError(
        f'{system} has no guard interval "{guard}": write one such as "{usual["fft"]} {usual["usual"]}" from {listed}',
        field="guard",
        allowed=listed,
    )


def useful_share(delay_us: ArrayLike, symbol: Symbol) -> FloatArray:
    """Share of a member's power that is useful [-], elementwise over its delay after the window's start [µs]."""
    late = np.asarray(delay_us, dtype=float)
    fading = ((symbol.useful_us + symbol.guard_us - late) / symbol.useful_us) ** 2
    share = np.where(late <= symbol.guard_us, 1.0, np.where(late <= symbol.longest_us, fading, 0.0))
    return np.where(late < -1e-9, 0.0, share)


def window_start(power: FloatArray, arrival_us: FloatArray, window: Window, threshold_db: float) -> NDArray[np.intp]:
    """Member whose arrival starts the window, (…, m) to (…); arrivals broadcast.

    "first above the threshold": the earliest of those within `threshold_db` of the strongest.
    "strongest": the strongest itself, so that everything before it disturbs.
    Both are strategies of EBU Tech 3348 and BPN 066.
    """
    strongest = power.max(axis=-1, keepdims=True)
    least = strongest if window == "strongest" else strongest * 10 ** (-threshold_db / 10)
    arrivals = np.where(power >= least, arrival_us, np.inf)
    return np.asarray(np.argmin(arrivals, axis=-1))


def shares_by_start(arrival_us: FloatArray, symbol: Symbol) -> FloatArray:
    """Useful share of each member's power, by the member that starts the window, (m, m) for arrivals (m,) [µs]."""
    return useful_share(arrival_us[np.newaxis, :] - arrival_us[:, np.newaxis], symbol)


def split(
    power: FloatArray, arrival_us: FloatArray, shares: FloatArray, window: Window, threshold_db: float
) -> FloatArray:
    """Useful share of each member's power, (…, m).

    Parameters
    ----------
    power : array (…, n, m)
        Of the members of n networks of m members each; without n everywhere: one network.
    arrival_us : array (n, m)
        When each arrives. [µs]
    shares : array (n, m, m)
        Of `shares_by_start`. [-]
    """
    start = window_start(power, arrival_us, window, threshold_db)
    return np.asarray(shares[start] if shares.ndim == 2 else shares[np.arange(len(shares)), start])


def echo_rise_db(
    power: FloatArray, arrival_us: FloatArray, bandwidth_mhz: ArrayLike, rise_at_0_db: ArrayLike, fades_over_db: float
) -> FloatArray:
    """Rise of the required C/N by the strongest echo, (…, n, m) to (…, n) as in `split`, width and rise (n,) [dB].

    `rise_at_0_db` for an echo as strong as the signal, falling to 0 over `fades_over_db` (a line of ours
    between two published points). Echoes closer than 1 / bandwidth are one signal to the set.
    """
    first = np.argmax(power, axis=-1)[..., np.newaxis]
    apart_us = np.abs(arrival_us - np.take_along_axis(np.broadcast_to(arrival_us, power.shape), first, axis=-1))
    strongest = np.take_along_axis(power, first, axis=-1)[..., 0]
    echo = np.where(apart_us * np.asarray(bandwidth_mhz)[..., np.newaxis] > 1, power, 0.0).max(axis=-1)
    with np.errstate(divide="ignore"):
        below_db = -10 * np.log10(echo / strongest)
    return np.asarray(rise_at_0_db * np.clip(1 - below_db / fades_over_db, 0, 1))


def rise_at_0_db(system: str, mode: str) -> float:
    """Rise of the required C/N by an echo of 0 dB [dB]; 0 where the table has no such mode."""
    return _rises().get((system, mode), 0.0)


@cache
def _symbols() -> list[dict[str, str]]:
    return rows("ofdm")


@cache
def _rises() -> dict[tuple[str, str], float]:
    return {(row["system"], row["mode"]): float(row["rise_db"]) for row in rows("echo_0db")}
