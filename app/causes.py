"""What may be behind a reading that no prediction allows: candidates, the one that fits best first."""

from __future__ import annotations

from app.chain.parts import MastheadAmplifier
from app.readings import AT_THE_AERIAL, Reading
from app.vantage import Vantage

FITS_DB = 6.0  # a cause whose effect is this near to the difference comes first


def candidates(reading: Reading, looked: Vantage, emission: str | None, difference_db: float | None) -> tuple[str, ...]:
    """Return causes in words.

    Parameters
    ----------
    difference_db : float or None
        Reading less prediction; None: a word instead of a figure, judged by its direction.
    """
    if difference_db is None:
        poor = reading.state in ("not found", "breaks up") or reading.works is False or reading.count is not None
        difference_db = -20.0 if poor else 20.0
    causes = _below(looked) if difference_db < 0 else _above()
    order = sorted(
        range(len(causes)),
        key=lambda c: (abs(causes[c][0] - difference_db) > FITS_DB, abs(causes[c][0] - difference_db)),
    )
    return tuple(causes[c][1] for c in order)


def _below(looked: Vantage) -> list[tuple[float, str]]:
    """Effect [dB] and name of what makes a reading too low."""
    causes = [
        (-looked.chain.aerial.front_to_back_db or -15.0, "the aerial points elsewhere than was said: wrong bearing"),
        (-16.0, "the aerial stands in the other polarisation: rods flat or upright"),
        (-12.0, "a near obstacle in this direction: tree, roof, neighbour's house"),
        (-40.0, "the transmitter is off the air, or on lower power, today"),
    ]
    if looked.point != AT_THE_AERIAL:
        causes.append((-10.0, "a bad joint or lead between the aerial and this point"))
        gain_db = sum(part.gain_db for part in looked.chain.parts if isinstance(part, MastheadAmplifier))
        if gain_db:
            causes.append((-gain_db - 5, "the amplifier has no power"))
    return causes


def _above() -> list[tuple[float, str]]:
    """Effect [dB] and name of what makes a reading too high."""
    return [
        (12.0, "another transmitter on the same channel was read"),
        (15.0, "uncommon weather carried the signal: read again on another day"),
        (8.0, "the transmitter radiates more in this direction than the register says"),
        (60.0, "the figure is in another unit: dBm + 108.8 and dBmV + 60 give dB(µV)"),
        (20.0, "an amplifier in the chain that was not named"),
    ]
