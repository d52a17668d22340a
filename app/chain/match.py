"""How well an aerial matches 75 ohms, from a reflection measured through whatever hung before it.

Voltages and currents are carried through the pad by its chain matrix, so that open and short circuits need no
special case: a wave of 1 and its reflection Γ are V = 1 + Γ and R I = 1 − Γ at the plane of calibration; the
pad undone gives V and I at the aerial, and Γ at 75 ohms is (V − 75 I) / (V + 75 I). All of it is one Möbius map
of the raw reflection, and such a map takes circles to circles: that gives the band around the result exactly.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from app.chain.pad import chain_matrix, minimum_loss_pad, pad_loss_db, series_pad
from app.chain.touchstone import ComplexArray, FloatArray, Touchstone, refuse
from app.errors import ChainError
from propagation.constants import RECEIVER_IMPEDANCE_OHM

MATCH_IS_NOT_GAIN = (
    "Match is not gain. This file says how much of the power comes back at the terminals, not how much the aerial "
    "catches nor from where: a 75 ohm resistor matches perfectly and receives nothing. State the gain as well."
)
Calibration = Literal["behind-pad", "before-pad"]
Pad = Literal["none", "minimum-loss", "series-25", "own"]
CALIBRATIONS: tuple[Calibration, ...] = ("behind-pad", "before-pad")
PADS: tuple[Pad, ...] = ("none", "minimum-loss", "series-25", "own")

RAW_UNCERTAINTY = 0.02  # of the raw reflection, a hand-held analyser after calibration; common practice, no source
RAW_ROUNDING = 1e-4  # a total reflection written with few digits
LARGEST_REFLECTION = 1.05  # after removal; more is no passive aerial but a wrong pad or calibration
LEAST_REFLECTION = 1e-3  # 60 dB: less no analyser tells, and a text needs a number
TOTAL_REFLECTION = 0.999  # 27 dB of mismatch: as much as a loss in a ledger makes sense


@dataclass(frozen=True, slots=True)
class Measurement:
    """What was measured and what hung before the aerial."""

    sweep: Touchstone  # one port
    calibrated: Calibration  # where the calibration standards were screwed on
    pad: Pad = "none"  # between analyser and aerial; only asked if calibrated before it
    own_pad: Touchstone | None = None  # two ports, port 1 at the analyser
    # of the load used in calibration; None: as the file says. An analyser writes its own 50 even if calibrated
    # behind the pad with a load of 75: ask.
    standard_ohm: float | None = None


@dataclass(frozen=True, slots=True)
class Match:
    """Reflection of an aerial at 75 ohms over its sweep, with the band that the measurement leaves."""

    name: str
    frequency_mhz: FloatArray  # (n,) rising
    reflection: ComplexArray  # (n,) at 75 ohms; above 1.05 in magnitude where the file cannot be right
    lowest: FloatArray  # (n,) least and
    highest: FloatArray  # (n,) greatest magnitude, the raw reflection being off by RAW_UNCERTAINTY any way
    floor: FloatArray  # (n,) magnitude that a perfect aerial may show: less cannot be told apart
    pad_loss_db: FloatArray  # (n,) of what was removed, in power; 0 for nothing

    @property
    def magnitude(self) -> FloatArray:
        """Reflection in magnitude [-]."""
        return np.abs(self.reflection)

    @property
    def pairs(self) -> tuple[tuple[float, float], ...]:
        """Frequency [MHz] and magnitude of the reflection, as a part of a chain keeps them."""
        return tuple(zip(self.frequency_mhz.tolist(), self.magnitude.tolist(), strict=True))


@dataclass(frozen=True, slots=True)
class ChannelMatch:
    """What the match does to one channel; figures are None where it is refused."""

    channel: str
    vswr: float | None  # worst in the channel
    return_loss_db: float | None  # worst in the channel
    return_loss_low_db: float | None  # least and
    return_loss_high_db: float | None  # most that it may be by the uncertainty of the raw reflection
    floor_db: float | None  # return loss above which nothing can be told
    mismatch_loss_db: float | None  # mean over the channel, of power
    refused: str = ""  # why there are no figures, and the mend


def measured_match(measured: Measurement) -> Match:
    """Reflection of the aerial at 75 ohms, with everything before it removed.

    Raises
    ------
    ChainError
        A raw reflection above 1, a two-port in the place of a sweep, a pad that is missing, does not cover the
        band or lets nothing through; the file and the mend are named.

    References
    ----------
    Definition of the chain (ABCD) matrix and its tie to S-parameters: D. M. Pozar, Microwave Engineering, 4th ed.,
    section 4.4, Table 4.2. Image of a circle under a Möbius map: any text on complex functions.
    """
    sweep = measured.sweep
    if sweep.s.shape[1] != 1:
        refuse(sweep.name, "has two ports", "give the sweep of the aerial as .s1p; a pad's .s2p goes with the pad")
    raw = sweep.s[:, 0, 0]
    _check_raw(sweep, raw)
    reference = float(sweep.reference_ohm[0]) if measured.standard_ohm is None else measured.standard_ohm
    if not 1 <= reference <= 1000:
        refuse(sweep.name, f"calibrated with {reference:g} ohms", "give the load used, 50 or 75 ohms")
    chain = _chain_matrix(measured, sweep.frequency_mhz)
    a, b, c, d = _map_to_75(chain, reference)
    with np.errstate(divide="ignore", invalid="ignore"):  # the pole: no aerial; its channel is refused
        reflection = (a * raw + b) / (c * raw + d)
    centre, radius = _image_of_circle(a, b, c, d, raw, RAW_UNCERTAINTY)
    perfect = -b / a  # the raw reflection of an aerial of 75 ohms
    perfect_centre, perfect_radius = _image_of_circle(a, b, c, d, perfect, RAW_UNCERTAINTY)
    whole = np.ones_like(sweep.frequency_mhz)
    return Match(
        name=sweep.name,
        frequency_mhz=sweep.frequency_mhz,
        reflection=reflection,
        lowest=np.maximum(np.abs(centre) - radius, 0),
        highest=np.abs(centre) + radius,
        floor=(np.abs(perfect_centre) + perfect_radius) * whole,
        pad_loss_db=pad_loss_db(chain, reference, RECEIVER_IMPEDANCE_OHM) * whole
        if _is_removed(measured)
        else 0 * whole,
    )


def match_over_channels(match: Match, channels: Sequence[tuple[str, float, float]]) -> tuple[ChannelMatch, ...]:
    """Match in each wanted channel, given as name, centre [MHz] and bandwidth [MHz].

    A channel is refused, not guessed, if the sweep does not cover it, has no point in it, or shows more than
    1.05 in magnitude there.
    """
    return tuple(_channel(match, *channel) for channel in channels)


def mismatch_loss_db(pairs: ArrayLike, frequency_mhz: ArrayLike) -> FloatArray:
    """Power lost to reflection [dB, 0 or more], elementwise over frequency [MHz]; for the ledger.

    Only where the aerial's gain was stated without it: a realised or measured gain holds it already. NaN where
    the sweep does not reach or shows more than 1.05. `pairs` (n, 2) are `Match.pairs`; between its points the
    reflected power is taken as linear in frequency.
    """
    table = np.asarray(pairs, dtype=float)
    magnitude = np.where(table[:, 1] <= LARGEST_REFLECTION, np.minimum(table[:, 1], TOTAL_REFLECTION), np.nan)
    reflected = np.interp(np.asarray(frequency_mhz, dtype=float), table[:, 0], magnitude**2, left=np.nan, right=np.nan)
    return np.asarray(-10 * np.log10(1 - reflected))


def vswr(reflection: ArrayLike) -> FloatArray:
    """Voltage standing wave ratio of a magnitude of reflection, (1 + Γ) / (1 − Γ); infinite from 1 on."""
    magnitude = np.asarray(reflection, dtype=float)
    with np.errstate(divide="ignore"):
        return np.asarray(np.where(magnitude < 1, (1 + magnitude) / np.maximum(1 - magnitude, 0), np.inf))


def return_loss_db(reflection: ArrayLike) -> FloatArray:
    """Return loss of a magnitude of reflection [dB], −20 log Γ; infinite at 0."""
    with np.errstate(divide="ignore"):
        return np.asarray(-20 * np.log10(np.asarray(reflection, dtype=float)))


def _check_raw(sweep: Touchstone, raw: ComplexArray) -> None:
    over = np.abs(raw) > 1 + RAW_ROUNDING
    if over.any():
        at = int(np.argmax(np.abs(raw)))
        refuse(
            sweep.name,
            f"a raw reflection of {np.abs(raw[at]):.3f} at {sweep.frequency_mhz[at]:g} MHz, more than comes in",
            "calibrate the analyser again and measure again",
        )


def _chain_matrix(measured: Measurement, frequency_mhz: FloatArray) -> ComplexArray:
    """What stands between the plane of calibration and the aerial, (2, 2) or (n, 2, 2)."""
    if measured.calibrated not in CALIBRATIONS:
        raise ChainError(
            f'calibration "{measured.calibrated}" is not known: use {" or ".join(CALIBRATIONS)}',
            field="calibrated",
            allowed=", ".join(CALIBRATIONS),
        )
    if not _is_removed(measured):
        return np.eye(2, dtype=np.complex128)
    match measured.pad:
        case "minimum-loss":
            return minimum_loss_pad()
        case "series-25":
            return series_pad()
        case "own":
            return _own_pad(measured, frequency_mhz)
    raise ChainError(f'pad "{measured.pad}" is not known: use {", ".join(PADS)}', field="pad", allowed=", ".join(PADS))


def _is_removed(measured: Measurement) -> bool:
    return measured.calibrated == "before-pad" and measured.pad != "none"


def _own_pad(measured: Measurement, frequency_mhz: FloatArray) -> ComplexArray:
    pad = measured.own_pad
    if pad is None:
        refuse(measured.sweep.name, "was measured through a pad of your own", "give its .s2p as well, or name its kind")
    if pad.s.shape[1] != 2:
        refuse(pad.name, "has one port", "measure the pad as a two-port, .s2p")
    low, high = pad.frequency_mhz[0], pad.frequency_mhz[-1]
    if frequency_mhz[0] < low or frequency_mhz[-1] > high:
        refuse(
            pad.name,
            f"covers {low:g} to {high:g} MHz, the aerial was swept over {frequency_mhz[0]:g} to {frequency_mhz[-1]:g}",
            "measure the pad over the whole sweep",
        )
    known = chain_matrix(pad).reshape(-1, 4)
    columns = [np.interp(frequency_mhz, pad.frequency_mhz, known[:, i]) for i in range(4)]
    return np.asarray(np.stack(columns, axis=-1).reshape(-1, 2, 2), dtype=np.complex128)


def _map_to_75(
    chain: ComplexArray, reference_ohm: float
) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
    """Coefficients of Γ75 = (a Γ + b) / (c Γ + d)."""
    big_a, big_b, big_c, big_d = (chain[..., i, j] for i in (0, 1) for j in (0, 1))
    # with V1 = 1 + Γ and I1 = (1 − Γ) / R the inverse chain matrix gives, up to its determinant,
    # V2 = D V1 − B I1 and I2 = A I1 − C V1, each as (of Γ, constant)
    v = (big_d + big_b / reference_ohm, big_d - big_b / reference_ohm)
    i = (-big_a / reference_ohm - big_c, big_a / reference_ohm - big_c)
    z = RECEIVER_IMPEDANCE_OHM
    return v[0] - z * i[0], v[1] - z * i[1], v[0] + z * i[0], v[1] + z * i[1]


def _image_of_circle(
    a: ComplexArray, b: ComplexArray, c: ComplexArray, d: ComplexArray, centre: ComplexArray, radius: float
) -> tuple[ComplexArray, FloatArray]:
    """Centre and radius of the circle that a Möbius map makes of a circle which its pole is outside of."""

    def mapped(point: ComplexArray) -> ComplexArray:
        return np.asarray((a * point + b) / (c * point + d))

    distance = c * centre + d  # of the centre from the pole, times c
    # the point that mirrors the pole in the circle goes to the image's centre
    mirror = centre - radius**2 * np.conj(c) / np.conj(distance)
    with np.errstate(divide="ignore", invalid="ignore"):
        image = mapped(mirror)
        spread = np.abs(mapped(centre + radius) - image)
    outside = np.abs(distance) > np.abs(c) * radius
    return image, np.asarray(np.where(outside, spread, np.inf))


def _channel(match: Match, name: str, centre_mhz: float, bandwidth_mhz: float) -> ChannelMatch:
    low, high = centre_mhz - bandwidth_mhz / 2, centre_mhz + bandwidth_mhz / 2
    f = match.frequency_mhz

    def refused(why: str) -> ChannelMatch:
        return ChannelMatch(name, None, None, None, None, None, None, f"{match.name}: channel {name}: {why}")

    if low < f[0] or high > f[-1]:
        return refused(
            f"{low:g} to {high:g} MHz is not in the sweep of {f[0]:g} to {f[-1]:g} MHz: measure the whole channel"
        )
    inside = (f >= low) & (f <= high)
    if not inside.any():
        return refused(f"no point between {low:g} and {high:g} MHz: measure with more points")
    first, last = np.searchsorted(f, low, "right") - 1, np.searchsorted(f, high, "left")
    worst = float(match.magnitude[first : last + 1].max())  # with the neighbours that the edges lie between
    if not worst <= LARGEST_REFLECTION:
        return refused(
            f"a reflection of {worst:.2f} after removal of the pad, no aerial does that: "
            "check which pad it was and where the analyser was calibrated"
        )
    points = np.concatenate(([low], f[inside], [high]))
    magnitude, bad, good, floor = (
        float(np.interp(points, f, values).max())
        for values in (match.magnitude, match.highest, match.lowest, match.floor)
    )
    worst_db, low_db, high_db, floor_db = (
        float(return_loss_db(np.clip(value, LEAST_REFLECTION, 1))) + 0.0 for value in (magnitude, bad, good, floor)
    )
    loss = mismatch_loss_db(np.array(match.pairs), np.linspace(low, high, 33))
    return ChannelMatch(
        channel=name,
        vswr=float(vswr(min(magnitude, TOTAL_REFLECTION))),
        return_loss_db=worst_db,
        return_loss_low_db=low_db,
        return_loss_high_db=high_db,
        floor_db=floor_db,
        mismatch_loss_db=float(-10 * np.log10(np.mean(10 ** (-loss / 10)))) + 0.0,
    )
