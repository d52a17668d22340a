"""From the field at the aerial to level, noise, C/N and margin at every outlet.

Levels are across 75 ohms, matched. Noise is reckoned at the aerial's terminals: external noise enters
there, the chain's own noise is referred there by the cascade rule, and both then pass the chain's gain.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import Assumptions
from app.chain import aerial as response
from app.chain.cascade import Stage, cascade_noise_factor, stages, total_gain_db
from app.chain.parts import Chain, MastheadAmplifier
from app.errors import RequestError
from app.levels import level_dbuv
from propagation.noise import man_made_fam_db, noise_power_dbm, system_noise_factor
from propagation.units import db_from_ratio, dbuv_from_dbm, ratio_from_db

FloatArray = NDArray[np.float64]

# Surroundings of a roof -> environment of Rec. ITU-R P.372, Table 1; the pairing is ours.
ENVIRONMENTS = {"open": "rural", "suburban": "residential", "urban": "city", "trees": "rural", "mapped": "rural"}


@dataclass(frozen=True, slots=True)
class Signals:
    """What arrives at a roof and what receiving it takes, one row per emission."""

    frequency_mhz: FloatArray  # (e,)
    bandwidth_mhz: FloatArray  # (e,) in which the set gathers noise
    required_cn_db: FloatArray  # (e,) planning value of the mode
    receiver_noise_figure_db: FloatArray  # (e,) planning value of the system
    bearing_deg: FloatArray  # (e,) from the roof
    polarisation: tuple[str, ...]  # (e,) "horizontal", "vertical" or "mixed"
    mode_source: tuple[str, ...] = ()  # (e,) where the required C/N is from; empty: not said

    def __post_init__(self) -> None:
        """Take numbers as arrays; refuse rows of different length."""
        for key in (
            "frequency_mhz",
            "bandwidth_mhz",
            "required_cn_db",
            "receiver_noise_figure_db",
            "bearing_deg",
        ):
            object.__setattr__(self, key, np.atleast_1d(np.asarray(getattr(self, key), dtype=float)))
        count = self.frequency_mhz.size
        for key in self.__slots__:
            if len(getattr(self, key)) != count and not (key == "mode_source" and not self.mode_source):
                raise RequestError(f"signals: {key} has {len(getattr(self, key))} rows, frequency_mhz has {count}")


@dataclass(frozen=True, slots=True)
class AtOutlet:
    """What stands at one outlet."""

    name: str
    level_dbuv: FloatArray  # (…, e)
    noise_dbuv: FloatArray  # (e,) with the noise of the set behind it
    cn_db: FloatArray  # (…, e)
    margin_db: FloatArray  # (…, e) above required C/N and reserve


@dataclass(frozen=True, slots=True)
class Reception:
    """What one chain makes of every emission: at the deciding outlet, and at each."""

    level_dbuv: FloatArray  # (…, e)
    noise_dbuv: FloatArray  # (…, e)
    cn_db: FloatArray  # (…, e)
    margin_db: FloatArray  # (…, e)
    off_axis_deg: FloatArray  # (…, e)
    pattern_loss_db: FloatArray  # (…, e)
    deciding_outlet: NDArray[np.intp]  # (…, e) index into outlets: the one with the least margin
    outlets: tuple[AtOutlet, ...]


@dataclass(frozen=True, slots=True)
class Step:
    """One line of the ledger."""

    step: str
    value_db: float
    total: float  # dB(µV/m) up to the field, dB(µV) as a level, then dB of C/N and margin
    source: str


def receive(
    chain: Chain,
    signals: Signals,
    field_dbuv_m: ArrayLike,
    pointing_deg: ArrayLike,
    polarisation: str,
    assumptions: Assumptions,
    surroundings: str = "open",
) -> Reception:
    """What a chain makes of every emission.

    Parameters
    ----------
    field_dbuv_m : array (…, e)
        Field at the aerial; NaN where it is not known, which stays NaN. [dB(µV/m)]
    pointing_deg : array (…, 1) or scalar
        True bearing of the aerial's axis.
    polarisation : "horizontal" or "vertical"
        How the aerial is mounted.

    References
    ----------
    Cascade of passive parts at 290 K: Friis 1944. External noise: Rec. ITU-R P.372, section 2: the system's
    noise factor is fext + frx − 1 with every term referred to the aerial's terminals.
    """
    outside_db = man_made_fam_db(signals.frequency_mhz, ENVIRONMENTS[surroundings])
    return receive_with_noise(chain, signals, field_dbuv_m, pointing_deg, polarisation, assumptions, outside_db)


def receive_with_noise(
    chain: Chain,
    signals: Signals,
    field_dbuv_m: ArrayLike,
    pointing_deg: ArrayLike,
    polarisation: str,
    assumptions: Assumptions,
    external_fam_db: ArrayLike,
) -> Reception:
    """Return the same as `receive`, for a stated noise from outside over 290 K [dB], (e,) or scalar."""
    air = _air(chain, signals, pointing_deg, polarisation, assumptions)
    at_aerial = level_dbuv(field_dbuv_m, air.gain_dbd, signals.frequency_mhz) - air.loss_db
    required = signals.required_cn_db + assumptions.value("reserve_db")
    outlets = []
    for name in chain.outlet_names:
        row = stages(chain.run_to(name), signals.frequency_mhz)
        gain = total_gain_db(row, signals.frequency_mhz.size)
        level = at_aerial + gain
        own = chain_noise_factor(row, set_noise_figure_db(chain, signals))
        at_terminals_dbm = noise_power_dbm(signals.bandwidth_mhz, system_noise_factor(external_fam_db, own))
        noise = dbuv_from_dbm(at_terminals_dbm) + gain
        outlets.append(AtOutlet(name, level, noise, level - noise, level - noise - required))
    margins = np.stack([outlet.margin_db for outlet in outlets])
    worst = np.argmin(np.where(np.isnan(margins), np.inf, margins), axis=0)

    def decide(values: list[FloatArray]) -> FloatArray:
        stacked = np.stack([np.broadcast_to(value, worst.shape) for value in values])
        return np.asarray(np.take_along_axis(stacked, worst[np.newaxis], axis=0)[0])

    return Reception(
        level_dbuv=decide([outlet.level_dbuv for outlet in outlets]),
        noise_dbuv=decide([outlet.noise_dbuv for outlet in outlets]),
        cn_db=decide([outlet.cn_db for outlet in outlets]),
        margin_db=decide([outlet.margin_db for outlet in outlets]),
        off_axis_deg=np.broadcast_to(air.off_axis_deg, worst.shape),
        pattern_loss_db=np.broadcast_to(air.pattern_loss_db, worst.shape),
        deciding_outlet=worst,
        outlets=tuple(outlets),
    )


def set_noise_figure_db(chain: Chain, signals: Signals) -> FloatArray:
    """Noise figure of the set [dB], (e,): as stated for the part, else the planning value of the system."""
    stated = chain.receiver.noise_figure_db
    planned = signals.receiver_noise_figure_db
    return planned if stated is None else np.full_like(planned, stated)


def chain_noise_factor(row: list[Stage], set_noise_figure_db: FloatArray) -> FloatArray:
    """Noise factor of a run of parts and the set behind it, at the aerial's terminals [-], (e,)."""
    return cascade_noise_factor(
        [*(stage.gain_db for stage in row), np.zeros_like(set_noise_figure_db)],
        [*(stage.noise_figure_db for stage in row), set_noise_figure_db],
    )


@dataclass(frozen=True, slots=True)
class _Air:
    """What aerial and place make of the field, before the first part."""

    gain_dbd: FloatArray  # (e,)
    covering_loss_db: float
    off_axis_deg: FloatArray  # (…, e)
    pattern_loss_db: FloatArray  # (…, e)
    polarisation_loss_db: FloatArray  # (…, e) what it adds to the pattern's

    @property
    def loss_db(self) -> FloatArray:
        return self.covering_loss_db + self.pattern_loss_db + self.polarisation_loss_db


def _air(chain: Chain, signals: Signals, pointing_deg: ArrayLike, polarisation: str, assumptions: Assumptions) -> _Air:
    aerial = chain.aerial
    off_axis = response.off_axis_deg(signals.bearing_deg, pointing_deg)
    pattern = response.pattern_loss_db(aerial, off_axis, polarisation, assumptions.value("dipole_null_db"))
    cross_db = assumptions.value("cross_polar_db")
    on_axis = np.array(
        [response.polarisation_loss_db(polarisation, emitted, cross_db) for emitted in signals.polarisation]
    )
    mixed = np.array([emitted == "mixed" for emitted in signals.polarisation], dtype=bool)
    # Rec. ITU-R BT.419-3, Note 3: pattern and cross-polar rejection do not add up, the larger one holds.
    # A mixed emission loses its other half in every direction.
    added = np.where(mixed, on_axis, np.maximum(on_axis - pattern, 0))
    return _Air(
        response.gain_dbd(aerial, signals.frequency_mhz, assumptions.value("aerial_out_of_range_db_per_octave")),
        assumptions.value("loft_covering_db") if aerial.place == "loft" else 0.0,
        off_axis,
        pattern,
        added,
    )


def ledger_steps(
    chain: Chain,
    signals: Signals,
    index: int,
    field_dbuv_m: ArrayLike,
    pointing_deg: float,
    polarisation: str,
    assumptions: Assumptions,
    surroundings: str = "open",
    outlet: str | None = None,
) -> list[Step]:
    """Every gain and loss of one emission, from the field at the aerial to the margin.

    Each step's total is the one before plus its value; the last total is the margin of `receive`.

    Parameters
    ----------
    index : int
        Row of the emission in `signals`.
    field_dbuv_m : array (e,) or scalar
        Field at the aerial. [dB(µV/m)]
    outlet : str or None
        Name of the outlet; None: the deciding one.
    """
    signals = _row(signals, index)
    field = np.atleast_1d(np.asarray(field_dbuv_m, dtype=float))
    field = field[index : index + 1] if field.size > 1 else field
    if outlet is None:
        got = receive(chain, signals, field, pointing_deg, polarisation, assumptions, surroundings)
        outlet = chain.outlet_names[int(got.deciding_outlet[0])]
    air = _air(chain, signals, pointing_deg, polarisation, assumptions)
    row = stages(chain.run_to(outlet), signals.frequency_mhz)
    lines = [
        ("field at the aerial", field, "field of the path"),
        *_air_lines(chain, signals, air, polarisation),
        *((stage.part.name, stage.gain_db, stage.source) for stage in row),
        *_noise_lines(chain, signals, row, surroundings),
        (
            "C/N that the mode needs",
            -signals.required_cn_db,
            "".join(signals.mode_source) or "planning value of the mode",
        ),
        ("reserve", -assumptions.value("reserve_db"), "assumption reserve_db"),
    ]
    steps: list[Step] = []
    total = 0.0
    for name, value, source in lines:
        value_db = float(np.asarray(value).reshape(-1)[0]) + 0.0  # no negative zero
        total += value_db
        steps.append(Step(name, value_db, total, source))
    return steps


Line = tuple[str, FloatArray | float, str]


def _air_lines(chain: Chain, signals: Signals, air: _Air, polarisation: str) -> list[Line]:
    aerial = chain.aerial
    dipole_level = level_dbuv(0, 0, signals.frequency_mhz)
    stated = "stated gain" if aerial.measured else "gain of an own build, not measured"
    if not response.in_range(aerial, signals.frequency_mhz).all():
        stated += " beyond its frequencies: assumption aerial_out_of_range_db_per_octave"
    pattern = {
        "class": f"{aerial.beamwidth_deg:g}° beamwidth, {aerial.front_to_back_db:g} dB front to back",
        "dipole": "round, rods upright" if polarisation == "vertical" else "figure of eight, assumption dipole_null_db",
    }[aerial.pattern]
    emitted = signals.polarisation[0]
    turned = {
        True: "one plane of a mixed emission, half its power",
        False: f"{emitted} emission, {polarisation} aerial; assumption cross_polar_db, less the pattern",
    }[emitted == "mixed"]
    lines: list[Line] = [
        (
            "level of a half-wave dipole",
            dipole_level,
            f"33.68 − 20 log f at {signals.frequency_mhz[0]:g} MHz, 75 ohms matched",
        ),
        (f"gain of {aerial.name}", air.gain_dbd, stated),
        ("off the axis", -air.pattern_loss_db, f"{float(air.off_axis_deg.flat[0]):.0f}° off; {pattern}"),
    ]
    if emitted != polarisation:
        lines.append(("polarisation", -air.polarisation_loss_db, turned))
    if aerial.place == "loft":
        lines.insert(0, ("roof covering", -air.covering_loss_db, "assumption loft_covering_db"))
    return lines


def _noise_lines(chain: Chain, signals: Signals, row: list[Stage], surroundings: str) -> list[Line]:
    """Noise at the outlet, split by where it comes from; each line is 0 or a loss of C/N."""
    gain = ratio_from_db(total_gain_db(row, 1))
    set_figure_db = set_noise_figure_db(chain, signals)
    fam_db = man_made_fam_db(signals.frequency_mhz, ENVIRONMENTS[surroundings])
    own = chain_noise_factor(row, set_figure_db)
    bandwidth = signals.bandwidth_mhz[0]
    stated = chain.receiver.noise_figure_db is not None
    lines: list[Line] = [
        (
            "thermal noise",
            -dbuv_from_dbm(noise_power_dbm(bandwidth)),
            f"k T0 B in {bandwidth:g} MHz at 290 K, 75 ohms",
        ),
        (
            f"noise of {chain.receiver.name}",
            -set_figure_db,
            "as stated for the part" if stated else "planning noise figure of the system",
        ),
    ]
    if any(isinstance(stage.part, MastheadAmplifier) for stage in row):
        left = db_from_ratio(gain * own) - set_figure_db
        lines.append(("noise the amplifier leaves", -left, "cascade rule (Friis 1944), parts at 290 K"))
    heard = db_from_ratio(system_noise_factor(fam_db, own) / own)
    lines.append(("noise from outside", -heard, f"Rec. ITU-R P.372, {ENVIRONMENTS[surroundings]}, at least 290 K"))
    return lines


def _row(signals: Signals, index: int) -> Signals:
    one = slice(index, index + 1)
    return Signals(
        signals.frequency_mhz[one],
        signals.bandwidth_mhz[one],
        signals.required_cn_db[one],
        signals.receiver_noise_figure_db[one],
        signals.bearing_deg[one],
        signals.polarisation[index : index + 1],
        signals.mode_source[index : index + 1],
    )
