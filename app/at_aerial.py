"""What aerial and place make of the field, before the first part of the chain."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import Assumptions
from app.chain import aerial as response
from app.chain.match import mismatch_loss_db
from app.chain.parts import Aerial
from app.chain.room import entry_loss
from app.chain.stacking import Stack, stacked_gain_db, stacked_loss_db
from app.levels import level_dbuv

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class AtAerial:
    """One aerial at its pointing, for every emission."""

    aerial: Aerial
    gain_dbd: FloatArray  # (e,)
    covering_loss_db: FloatArray  # (e,) of roof or walls
    mismatch_loss_db: FloatArray  # (e,) 0 where the gain holds it already, or nobody measured it
    off_axis_deg: FloatArray  # (…, e)
    pattern_loss_db: FloatArray  # (…, e)
    polarisation_loss_db: FloatArray  # (…, e) what it adds to the pattern's

    @property
    def loss_db(self) -> FloatArray:
        """All of it together [dB], (…, e)."""
        return self.covering_loss_db + self.mismatch_loss_db + self.pattern_loss_db + self.polarisation_loss_db


def at_aerial(
    aerial: Aerial,
    frequency_mhz: FloatArray,
    bearing_deg: FloatArray,
    emitted: Sequence[str],
    pointing_deg: ArrayLike,
    polarisation: str,
    assumptions: Assumptions,
) -> AtAerial:
    """Gain and losses of an aerial turned to `pointing_deg` (…, 1), rods as `polarisation`, for emissions (e,)."""
    off_axis = response.off_axis_deg(bearing_deg, pointing_deg)
    clockwise = response.clockwise_deg(bearing_deg, pointing_deg)
    null_db = assumptions.value("dipole_null_db")
    pattern = response.pattern_loss_db(aerial, clockwise, polarisation, null_db, frequency_mhz)
    gain = response.gain_dbd(aerial, frequency_mhz, assumptions.value("aerial_out_of_range_db_per_octave"))
    if aerial.stacked > 1 and frequency_mhz.size:
        stack = Stack(aerial.stacked, aerial.stack_layout, aerial.stack_spacing_m, aerial.stack_loss_db)
        gain = gain + stacked_gain_db(stack, aerial, frequency_mhz, polarisation)
        pattern = pattern + stacked_loss_db(stack, clockwise, frequency_mhz, null_db)
    cross_db = assumptions.value("cross_polar_db")
    on_axis = np.array([response.polarisation_loss_db(polarisation, one, cross_db) for one in emitted])
    mixed = np.array([one == "mixed" for one in emitted], dtype=bool)
    # Rec. ITU-R BT.419-3, Note 3: pattern and cross-polar rejection do not add up, the larger one holds.
    # A mixed emission loses its other half in every direction.
    added = np.where(mixed, on_axis, np.maximum(on_axis - pattern, 0))
    if aerial.pattern == "measured" and response.measured_pattern(aerial).has_cross(response.mounted(polarisation)):
        whole = response.measured_pattern(aerial).cross_loss_db(
            clockwise, frequency_mhz, response.mounted(polarisation)
        )
        crossed = np.array([one not in (polarisation, "mixed") for one in emitted], dtype=bool)
        added = np.where(crossed, whole - pattern, added)
    return AtAerial(
        aerial=aerial,
        gain_dbd=gain,
        covering_loss_db=_covering_db(aerial, frequency_mhz, assumptions),
        mismatch_loss_db=_mismatch_db(aerial, frequency_mhz),
        off_axis_deg=off_axis,
        pattern_loss_db=pattern,
        polarisation_loss_db=added,
    )


def _covering_db(aerial: Aerial, frequency_mhz: FloatArray, assumptions: Assumptions) -> FloatArray:
    if aerial.place == "loft":
        return np.full(frequency_mhz.shape, assumptions.value("loft_covering_db"))
    if aerial.place == "room" and frequency_mhz.size:
        return entry_loss(frequency_mhz, aerial.building).median_db
    return np.zeros(frequency_mhz.shape)


def room_sd_db(aerial: Aerial, frequency_mhz: FloatArray) -> FloatArray:
    """Spread of the entry loss round an aerial in a room [dB], (e,); 0 elsewhere.

    Half the distance between the losses not reached and exceeded in 16 of 100 rooms (Rec. ITU-R P.2109-2), taken
    as the standard deviation of a normal about the median: its long tail of very lossy rooms is cut short by that.
    """
    if aerial.place != "room" or not frequency_mhz.size:
        return np.zeros(frequency_mhz.shape)
    loss = entry_loss(frequency_mhz, aerial.building)
    return (loss.high_db - loss.low_db) / 2


def _mismatch_db(aerial: Aerial, frequency_mhz: FloatArray) -> FloatArray:
    if aerial.gain_includes_mismatch or not frequency_mhz.size:
        return np.zeros(frequency_mhz.shape)
    return np.nan_to_num(mismatch_loss_db(aerial.reflection, frequency_mhz))


Line = tuple[str, FloatArray, str]


def aerial_lines(at: AtAerial, frequency_mhz: float, emitted: str, polarisation: str, index: int) -> list[Line]:
    """Lines of the ledger from the field to the aerial's terminals, for one emission of the batch."""
    aerial = at.aerial
    one = slice(index, index + 1)
    stated = "stated gain" if aerial.measured else "gain of an own build, not measured"
    if aerial.stacked > 1:
        stated += f", {aerial.stacked} stacked by their array factor, combiner taken off"
    if not response.in_range(aerial, frequency_mhz).all():
        stated += " beyond its frequencies: assumption aerial_out_of_range_db_per_octave"
    off_axis = f"{float(at.off_axis_deg[..., one].flat[0]):.0f}° off; {_pattern_words(aerial, polarisation)}"
    dipole = f"33.68 − 20 log f at {frequency_mhz:g} MHz, 75 ohms matched"
    lines: list[Line] = []
    if aerial.place == "loft":
        lines.append(("roof covering", -at.covering_loss_db[one], "assumption loft_covering_db"))
    if aerial.place == "room":
        walls = f"median of {aerial.building.replace('_', ' ')} buildings, Rec. ITU-R P.2109-2"
        lines.append(("walls and windows of the room", -at.covering_loss_db[one], walls))
    lines += [
        ("level of a half-wave dipole", level_dbuv(0, 0, np.array([frequency_mhz])), dipole),
        (f"gain of {aerial.name}", at.gain_dbd[one], stated),
        ("off the axis", -at.pattern_loss_db[..., one], off_axis),
    ]
    if emitted != polarisation:
        turned = (
            "one plane of a mixed emission, half its power"
            if emitted == "mixed"
            else f"{emitted} emission, {polarisation} aerial; assumption cross_polar_db, less the pattern"
        )
        lines.append(("polarisation", -at.polarisation_loss_db[..., one], turned))
    if not aerial.gain_includes_mismatch:
        known = bool(np.isfinite(mismatch_loss_db(aerial.reflection, frequency_mhz)))
        source = "−10 log (1 − Γ²) of the measured match" if known else "not measured at this frequency: taken as none"
        lines.append(("mismatch", -at.mismatch_loss_db[one], source))
    return lines


def _pattern_words(aerial: Aerial, polarisation: str) -> str:
    words = {
        "class": f"{aerial.beamwidth_deg:g}° beamwidth, {aerial.front_to_back_db:g} dB front to back",
        "dipole": "round, rods upright" if polarisation == "vertical" else "figure of eight, assumption dipole_null_db",
        "measured": f"measured pattern, {len(aerial.cuts)} cuts",
    }[aerial.pattern]
    return words if aerial.stacked == 1 else f"{words}; {aerial.stacked} stacked {aerial.stack_spacing_m:g} m apart"
