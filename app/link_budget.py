"""From the field at the aerial to level, noise, C/N, margin and headroom at every outlet.

Levels are across 75 ohms, matched. Noise from outside enters at the aerials' terminals, the chain adds its own,
amplifiers add the third-order products of everything that loads them.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from functools import reduce
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import Assumptions
from app.at_aerial import AtAerial, at_aerial
from app.chain import overload
from app.chain.flow import Flow, OutletFlow, flow, settings
from app.chain.parts import Chain
from app.errors import RequestError
from app.levels import level_dbuv
from app.loads import NOTHING_BESIDE, Beside, with_loads
from app.mobile import mobile_blocks
from propagation.noise import man_made_fam_db, noise_power_dbm
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
    noise_dbuv: FloatArray  # (…, e) with the noise of the set behind it
    intermodulation_dbuv: FloatArray  # (…, e) amplifiers' products in the channel; −inf for none
    cn_db: FloatArray  # (…, e) over noise and products
    margin_db: FloatArray  # (…, e) above required C/N and reserve
    headroom_db: FloatArray  # (…, e) how much more of everything the amplifiers on the way and the set stand


@dataclass(frozen=True, slots=True)
class Reception:
    """What one chain makes of every emission: at the deciding outlet, and at each."""

    level_dbuv: FloatArray  # (…, e)
    noise_dbuv: FloatArray  # (…, e)
    intermodulation_dbuv: FloatArray  # (…, e)
    cn_db: FloatArray  # (…, e)
    margin_db: FloatArray  # (…, e)
    headroom_db: FloatArray  # (…, e) the least over the outlets that count
    off_axis_deg: FloatArray  # (…, e) of the aerial that serves it
    pattern_loss_db: FloatArray  # (…, e) likewise
    serving_aerial: NDArray[np.intp]  # (…, e) index into chain.aerials: the one that gives it most
    deciding_outlet: NDArray[np.intp]  # (…, e) index into outlets: the one with the least margin
    outlets: tuple[AtOutlet, ...]

    def of_field(self, number: int) -> Reception:
        """Return what one of several fields, stacked in a leading axis, becomes."""
        shape = self.level_dbuv.shape

        def picked(place: Reception | AtOutlet) -> dict[str, Any]:
            return {
                field.name: np.broadcast_to(getattr(place, field.name), shape)[number]
                for field in fields(place)
                if field.name not in ("name", "outlets")
            }

        return Reception(outlets=tuple(AtOutlet(one.name, **picked(one)) for one in self.outlets), **picked(self))

    @property
    def loudest(self) -> NDArray[np.intp]:
        """Row of the emission with the highest level, 0 if there is none. (…)"""
        if not self.level_dbuv.shape[-1]:
            return np.zeros(self.level_dbuv.shape[:-1], dtype=np.intp)
        return np.asarray(np.argmax(np.nan_to_num(self.level_dbuv, nan=-np.inf), axis=-1))

    def of_loudest(self, values: FloatArray) -> FloatArray:
        """Value of the loudest emission, from values (…, e). (…, 1)"""
        if not self.level_dbuv.shape[-1]:
            return values
        return np.asarray(
            np.take_along_axis(
                np.broadcast_to(values, self.level_dbuv.shape), np.asarray(self.loudest)[..., np.newaxis], axis=-1
            )
        )


def is_overload(place: Reception | AtOutlet) -> NDArray[np.bool_]:
    """Whether too much level holds an emission back sooner than too little, there. (…, e)"""
    return (place.headroom_db < place.margin_db) | (place.intermodulation_dbuv > place.noise_dbuv)


# what a reception takes from the outlet with the least margin
DECIDED = ("level_dbuv", "noise_dbuv", "intermodulation_dbuv", "cn_db", "margin_db")


def receive(
    chain: Chain,
    signals: Signals,
    field_dbuv_m: ArrayLike,
    pointing_deg: ArrayLike,
    polarisation: str,
    assumptions: Assumptions,
    surroundings: str = "open",
    load_dbuv_m: ArrayLike | None = None,
    beside: Beside = NOTHING_BESIDE,
) -> Reception:
    """What a chain makes of every emission.

    Parameters
    ----------
    field_dbuv_m : array (…, e)
        Field at the aerial; NaN where it is not known, which stays NaN. [dB(µV/m)]
    pointing_deg : array (…, 1) or scalar
        True bearing of the first aerial's axis, and of others that do not say their own.
    polarisation : "horizontal" or "vertical"
        How the aerial is mounted; another aerial that says its own is mounted that way.
    load_dbuv_m : array (…, e)
        Field that loads amplifiers and set, if it is another than the wanted one's: what fades does not
        unload them. None: the same.
    beside : Beside
        What loads them too, without being among the signals.

    References
    ----------
    Cascade of passive parts at 290 K: Friis 1944. External noise: Rec. ITU-R P.372, section 2: the system's
    noise factor is fext + frx − 1 with every term referred to the aerial's terminals.
    """
    outside_db = man_made_fam_db(signals.frequency_mhz, ENVIRONMENTS[surroundings])
    return receive_with_noise(
        chain,
        signals,
        field_dbuv_m,
        pointing_deg,
        polarisation,
        assumptions,
        outside_db,
        load_dbuv_m,
        beside,
    )


def receive_with_noise(
    chain: Chain,
    signals: Signals,
    field_dbuv_m: ArrayLike,
    pointing_deg: ArrayLike,
    polarisation: str,
    assumptions: Assumptions,
    external_fam_db: ArrayLike,
    load_dbuv_m: ArrayLike | None = None,
    beside: Beside = NOTHING_BESIDE,
) -> Reception:
    """Return the same as `receive`, for a stated noise from outside over 290 K [dB], (e,) or scalar."""
    heard = hear(chain, signals, field_dbuv_m, pointing_deg, polarisation, assumptions, load_dbuv_m, beside)
    outside = np.maximum(ratio_from_db(external_fam_db), 1) - 1
    best: Reception | None = None
    for setting in settings(chain):
        run = flow(chain, heard.load_frequency_mhz, setting)
        outlets = outlets_of(chain, signals, heard, run, outside, assumptions)
        one = _decided(chain, heard, run, outlets)
        best = one if best is None else _better(best, one)
    assert best is not None  # there is always a setting
    return best


@dataclass(frozen=True, slots=True)
class Heard:
    """Levels at the terminals of every aerial."""

    airs: tuple[AtAerial, ...]  # (a,)
    level_dbuv: dict[str, FloatArray]  # id of an aerial: (…, e)
    load_dbuv: dict[str, FloatArray]  # id of an aerial: (…, f), the emissions first, then what else loads it
    load_frequency_mhz: FloatArray  # (f,)


def hear(
    chain: Chain,
    signals: Signals,
    field_dbuv_m: ArrayLike,
    pointing_deg: ArrayLike,
    polarisation: str,
    assumptions: Assumptions,
    load_dbuv_m: ArrayLike | None = None,
    beside: Beside = NOTHING_BESIDE,
) -> Heard:
    """Levels that every aerial of a chain gives; arguments as those of `receive`."""
    blocks = mobile_blocks(assumptions)
    frequency = np.concatenate([signals.frequency_mhz, beside.frequency_mhz, blocks.frequency_mhz])
    level: dict[str, FloatArray] = {}
    load: dict[str, FloatArray] = {}
    airs: list[AtAerial] = []
    for number, aerial in enumerate(chain.aerials):
        pointing, rods = pointing_deg, polarisation
        if number:
            pointing = pointing_deg if aerial.pointing_deg is None else aerial.pointing_deg
            rods = aerial.polarisation or polarisation
        air = at_aerial(
            aerial, signals.frequency_mhz, signals.bearing_deg, signals.polarisation, pointing, rods, assumptions
        )
        airs.append(air)
        level[aerial.id] = level_dbuv(field_dbuv_m, air.gain_dbd, signals.frequency_mhz) - air.loss_db
        loaded = (
            level[aerial.id]
            if load_dbuv_m is None
            else level_dbuv(load_dbuv_m, air.gain_dbd, signals.frequency_mhz) - air.loss_db
        )
        load[aerial.id] = with_loads(loaded, aerial, pointing, rods, beside, blocks, assumptions)
    return Heard(tuple(airs), level, load, frequency)


def summed_dbuv(levels: Mapping[str, FloatArray], gain: Mapping[str, FloatArray]) -> FloatArray:
    """Level where the aerials' signals meet, powers added [dB(µV)]; gains are power ratios by aerial."""
    with np.errstate(divide="ignore"):
        through = [
            level + db_from_ratio(gain[name][: level.shape[-1]]) for name, level in levels.items() if name in gain
        ]
        if len(through) == 1:
            return through[0]
        return db_from_ratio(sum((ratio_from_db(one) for one in through), np.zeros_like(through[0])))


def outlets_of(
    chain: Chain,
    signals: Signals,
    heard: Heard,
    run: Flow,
    outside: FloatArray,
    assumptions: Assumptions,
) -> list[AtOutlet]:
    """Return what stands at every outlet, for one setting of the switches.

    `outside` is the noise from outside beyond 290 K as a factor over k T0, (e,) or scalar.
    """
    count = signals.frequency_mhz.size
    power = {name: np.nan_to_num(ratio_from_db(level)) for name, level in heard.load_dbuv.items()}
    products: dict[str, FloatArray] = {}  # of each amplifier at its output, (…, e) as power
    headroom: dict[str, FloatArray] = {}  # (…)
    for name, place in run.amplifiers.items():
        out = summed_dbuv(heard.load_dbuv, place.gain)
        rated = run.rated_dbuv[name]
        below = overload.carrier_to_intermodulation_db(out, rated)
        products[name] = np.nan_to_num(ratio_from_db((out - below)[..., :count]))
        headroom[name] = overload.headroom_db(out, rated)
    return [
        _at_outlet(chain, signals, heard, one, power, products, headroom, outside, assumptions) for one in run.outlets
    ]


def _at_outlet(
    chain: Chain,
    signals: Signals,
    heard: Heard,
    one: OutletFlow,
    power: Mapping[str, FloatArray],
    products: Mapping[str, FloatArray],
    headroom: Mapping[str, FloatArray],
    outside: FloatArray,
    assumptions: Assumptions,
) -> AtOutlet:
    count = signals.frequency_mhz.size
    level = summed_dbuv(heard.level_dbuv, one.at.gain)
    noise = dbuv_from_dbm(noise_power_dbm(signals.bandwidth_mhz, noise_factor_at(chain, signals, one, outside)))
    disturbing = sum(
        (products[name] * one.at.gain[name][:count] for name in products if name in one.at.gain),
        np.zeros(count),
    )
    with np.errstate(divide="ignore"):
        intermodulation = db_from_ratio(disturbing)
    cn = level - (noise if not products else db_from_ratio(ratio_from_db(noise) + disturbing))
    total = sum((power[name] @ (gain * one.lead_gain) for name, gain in one.at.gain.items() if name in power), 0.0)
    with np.errstate(divide="ignore"):
        spare = most_total_dbuv(chain, one.name, assumptions) - db_from_ratio(total)
    for name, left in headroom.items():
        if name in one.at.gain and one.at.gain[name].any():
            spare = np.minimum(spare, left)
    required = signals.required_cn_db + assumptions.value("reserve_db")
    return AtOutlet(
        name=one.name,
        level_dbuv=level,
        noise_dbuv=noise,
        intermodulation_dbuv=np.broadcast_to(intermodulation, level.shape),
        cn_db=cn,
        margin_db=cn - required,
        headroom_db=np.broadcast_to(np.asarray(spare)[..., np.newaxis], level.shape),
    )


def noise_factor_at(chain: Chain, signals: Signals, one: OutletFlow, outside: FloatArray) -> FloatArray:
    """Noise over k T0 at an outlet, with that of fly lead and set referred to it [-], (e,)."""
    count = signals.frequency_mhz.size
    lead, added = one.lead_gain[:count], one.lead_noise[:count]
    heard = sum(
        (gain[:count] for name, gain in one.at.gain.items() if any(name == aerial.id for aerial in chain.aerials)),
        np.zeros(count),
    )
    figure = ratio_from_db(set_noise_figure_db(chain, signals, one.name))
    factor: FloatArray = one.at.noise[:count] + heard * outside + (added + figure - 1) / lead
    return factor


def set_noise_figure_db(chain: Chain, signals: Signals, outlet: str) -> FloatArray:
    """Noise figure of the set [dB], (e,): as stated for the part, else the planning value of the system."""
    stated = chain.tree.sets[outlet].noise_figure_db
    planned = signals.receiver_noise_figure_db
    return planned if stated is None else np.full_like(planned, stated)


def most_total_dbuv(chain: Chain, outlet: str, assumptions: Assumptions) -> float:
    """Level of everything together that the set behind an outlet stands [dB(µV)]."""
    stated = chain.tree.sets[outlet].most_total_dbuv
    return assumptions.value("set_most_total_dbuv") if stated is None else stated


def _decided(chain: Chain, heard: Heard, run: Flow, outlets: Sequence[AtOutlet]) -> Reception:
    """Take the outlets that count together: the least margin, the least headroom."""
    counting = [i for i, outlet in enumerate(outlets) if outlet.name in chain.deciding_outlets]
    first = outlets[counting[0]]
    worst = np.full(first.margin_db.shape, counting[0], dtype=np.intp)
    kept = {key: np.broadcast_to(getattr(first, key), worst.shape) for key in DECIDED}
    for i in counting[1:]:
        with np.errstate(invalid="ignore"):
            lower = outlets[i].margin_db < kept["margin_db"]
        if lower.any():
            worst[lower] = i
            kept = {key: np.where(lower, getattr(outlets[i], key), values) for key, values in kept.items()}
    gain = run.outlets[counting[0]].at.gain
    with np.errstate(divide="ignore"):
        strength = [
            np.broadcast_to(level + db_from_ratio(gain[name][: level.shape[-1]]), worst.shape)
            if name in gain
            else np.full(worst.shape, -np.inf)
            for name, level in heard.level_dbuv.items()
        ]
    serving = (
        np.zeros(worst.shape, dtype=np.intp)
        if len(strength) == 1
        else np.argmax(np.nan_to_num(np.stack(strength), nan=-np.inf), axis=0)
    )

    def of_serving(values: Sequence[FloatArray]) -> FloatArray:
        if len(values) == 1:
            return np.broadcast_to(values[0], worst.shape)
        stacked = np.stack([np.broadcast_to(value, worst.shape) for value in values])
        return np.asarray(np.take_along_axis(stacked, serving[np.newaxis], axis=0)[0])

    return Reception(
        **kept,
        headroom_db=reduce(np.minimum, (outlets[i].headroom_db for i in counting)),
        off_axis_deg=of_serving([air.off_axis_deg for air in heard.airs]),
        pattern_loss_db=of_serving([air.pattern_loss_db for air in heard.airs]),
        serving_aerial=serving,
        deciding_outlet=worst,
        outlets=tuple(outlets),
    )


def _better(one: Reception, other: Reception) -> Reception:
    """Take each emission from the setting of the switches that serves it better."""
    with np.errstate(invalid="ignore"):
        takes = np.minimum(other.margin_db, other.headroom_db) > np.minimum(one.margin_db, one.headroom_db)

    def mixed(first: Reception | AtOutlet, second: Reception | AtOutlet) -> dict[str, NDArray[np.generic]]:
        return {
            field.name: np.where(takes, getattr(second, field.name), getattr(first, field.name))
            for field in fields(first)
            if field.name not in ("name", "outlets")
        }

    outlets = tuple(
        AtOutlet(name=first.name, **mixed(first, second))  # type: ignore[arg-type]  # float arrays stay float arrays
        for first, second in zip(one.outlets, other.outlets, strict=True)
    )
    return Reception(outlets=outlets, **mixed(one, other))  # type: ignore[arg-type]
