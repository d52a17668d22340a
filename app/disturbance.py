"""What all other emissions do to each margin, through one chain, for any pointing and both time states.

In state (a) the wanted signal is faded to its availability and interferers stand at their medians; in
state (b) the wanted signal stands at its median and interferers are enhanced. Members of one network are
added first, each in its state: useful power in the wanted one's, self-interference in the interferers'.
Everything is reckoned as interference over carrier, which is the same at every outlet: what a chain does
behind the aerial it does to both.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app import network
from app.assumptions import Assumptions
from app.chain import aerial as response
from app.chain.parts import Chain
from app.company import Company, State
from app.interference import degradation_db, nuisance_power
from app.link_budget import AtOutlet, Reception, Signals, receive
from app.rejection import rejection_db

FloatArray = NDArray[np.float64]

WINDOWS: tuple[network.Window, ...] = ("first above the threshold", "strongest")


@dataclass(frozen=True, slots=True)
class Ear:
    """One chain in one polarisation: the level of each interferer if the aerial pointed at it."""

    chain: Chain
    polarisation: str
    assumptions: Assumptions
    company: Company
    on_axis: dict[State, FloatArray]  # (i,) power at the first outlet
    brought: dict[State, FloatArray]  # (e, k) what each kind of them would bring into each wanted channel

    def left(self, pointing_deg: ArrayLike) -> FloatArray:
        """Share of the power of each kind of interferers that the aerial lets in, (…, k), linear."""
        kinds = self.company.kinds
        rejected = rejection_db(
            self.chain.aerial,
            kinds.frequency_mhz,
            response.off_axis_deg(kinds.bearing_deg, pointing_deg),
            self.polarisation,
            kinds.polarisation,
            self.assumptions,
        )
        return np.asarray(10 ** (-rejected / 10))


def ear_of(chain: Chain, polarisation: str, company: Company, assumptions: Assumptions, surroundings: str) -> Ear:
    """Prepare a chain for any pointing."""
    ones = company.interferers
    count = len(ones)
    signals = Signals(
        frequency_mhz=np.array([one.emission.frequency_mhz for one in ones]),
        bandwidth_mhz=np.array([one.emission.bandwidth_mhz for one in ones]),
        required_cn_db=np.zeros(count),
        receiver_noise_figure_db=np.zeros(count),
        bearing_deg=np.zeros(count),
        polarisation=(polarisation,) * count,
    )
    field = np.array([one.field_dbuv_m for one in ones])
    level = receive(chain, signals, field, 0.0, polarisation, assumptions, surroundings).outlets[0].level_dbuv
    risen = level + np.array([one.enhancement_db for one in ones])
    on_axis: dict[State, FloatArray] = {"a": 10 ** (level / 10), "b": 10 ** (risen / 10)}
    brought = {state: company.by_kind(company.brought(state, power)) for state, power in on_axis.items()}
    return Ear(chain, polarisation, assumptions, company, on_axis, brought)


@dataclass(frozen=True)
class Effect:
    """What the company does to each wanted emission in one state."""

    state: State
    ear: Ear
    left: FloatArray  # (…, k) of Ear.left
    i_over_c: FloatArray  # (…, e) linear, over the carrier that the network makes together
    gain_db: FloatArray  # (…, e) what the other members add to one's own carrier
    rise_db: FloatArray  # (…, e) of the required C/N
    carrier: FloatArray  # (…, e) useful power at the first outlet, of the network together
    shares: tuple[FloatArray, ...]  # (…, n, m) useful share of each member's own power, by group of networks
    strays: tuple[FloatArray, ...]  # (…, n, m) power of each member that disturbs its own network, likewise
    cn_db: FloatArray  # (…, e) C/N at the deciding outlet with the network's gain, before interference
    i_over_n: FloatArray  # (…, e) there, linear
    told: dict[int, tuple[int | None, float | None]] = field(default_factory=dict)  # strongest, once reckoned

    def contributions(self, e: int) -> tuple[NDArray[np.intp], FloatArray]:
        """Interferers of one wanted emission and their power over its carrier (linear), strongest first. (k,)"""
        who, power = self._acting_on(e)
        order = np.argsort(-power)
        order = order[power[order] > 0]
        return who[order], power[order] / self.carrier[e]

    @cached_property
    def useful(self) -> FloatArray:
        """Useful share of each emission's own power; 1 outside networks. (…, e)"""
        return self._by_emission(self.shares, 1.0)

    @cached_property
    def stray(self) -> FloatArray:
        """Power of each emission that disturbs its own network; 0 outside networks. (…, e)"""
        return self._by_emission(self.strays, 0.0)

    def _by_emission(self, of_groups: Sequence[FloatArray], usual: float) -> FloatArray:
        values = np.full(self.carrier.shape, usual)
        for group, ones in zip(self.ear.company.groups, of_groups, strict=True):
            values[..., group.members] = ones
        return values

    @cached_property
    def brought(self) -> FloatArray:
        """Power that each pair brings into the wanted channel, in the order of the pairs, at one pointing. (p,)"""
        company = self.ear.company
        return company.brought(self.state, self.left[company.kinds.of] * self.ear.on_axis[self.state])

    def _acting_on(self, e: int) -> tuple[NDArray[np.intp], FloatArray]:
        """Interferers of one wanted emission, members of its own network that stray too, and their power. (k,)"""
        company = self.ear.company
        row = slice(*company.weights[self.state].indptr[e : e + 2])
        who, power = company.pairs.disturber[row], self.brought[row]
        mine = company.network_of.get(e)
        if mine is not None:
            who, power = np.append(who, mine.members), np.append(power, self.stray[mine.members])
        return who, power

    def strongest(self, e: int) -> tuple[int | None, float | None]:
        """Row of the strongest interferer and how far below it the next one stands [dB]; None: there is none."""
        if e not in self.told:
            who, power = self._acting_on(e)
            first = int(np.argmax(power)) if power.size else 0
            if not power.size or power[first] == 0:
                self.told[e] = (None, None)
            else:
                next_power = max(power[:first].max(initial=0.0), power[first + 1 :].max(initial=0.0))
                next_db = float(10 * np.log10(power[first] / next_power)) if next_power > 0 else None
                self.told[e] = (int(who[first]), next_db)
        return self.told[e]


def effect_of(ear: Ear, reception: Reception, left: FloatArray, state: State) -> Effect:
    """Interference, self-interference and network gain for every wanted emission.

    `reception` holds the wanted emissions in the same state, `left` is `Ear.left`, both at the same pointing.
    """
    company, value = ear.company, ear.assumptions.value
    own = 10 ** (reception.outlets[0].level_dbuv / 10)
    disturbing = np.array(np.broadcast_to(nuisance_power(left, ear.brought[state]), own.shape))
    carrier, rise = own.copy(), np.zeros(own.shape)
    shares, strays = [], []
    for group in company.groups:
        mine = own[..., group.members]
        share = network.split(mine, group.arrival_us, group.shares, _window(ear), value("sfn_threshold_db"))
        useful = share * mine
        stray = (mine - useful) * 10 ** (company.rise_db(state)[group.members] / 10)
        disturbing[..., group.members] += stray.sum(axis=-1, keepdims=True)
        carrier[..., group.members] = useful.sum(axis=-1, keepdims=True)
        rise[..., group.members] = network.echo_rise_db(
            useful, group.arrival_us, group.bandwidth_mhz, group.rise_at_0_db, value("sfn_echo_range_db")
        )[..., np.newaxis]
        shares.append(share)
        strays.append(stray)
    with np.errstate(divide="ignore"):
        gain = 10 * np.log10(carrier / own)
    i_over_c, cn_db = disturbing / carrier, reception.cn_db + gain
    i_over_n = i_over_c * 10 ** (cn_db / 10)
    return Effect(state, ear, left, i_over_c, gain, rise, carrier, tuple(shares), tuple(strays), cn_db, i_over_n)


def disturbed(reception: Reception, effect: Effect) -> Reception:
    """Return the reception with C/(N + I) for C/N and the margin that it leaves, at every outlet."""

    def after(outlet: AtOutlet) -> FloatArray:
        carrier_to_noise = outlet.cn_db + effect.gain_db
        return np.asarray(carrier_to_noise - degradation_db(carrier_to_noise, effect.i_over_c))

    def left_of_margin(place: Reception | AtOutlet, cn_db: FloatArray) -> FloatArray:
        return place.margin_db + cn_db - place.cn_db - effect.rise_db

    outlets = tuple(
        replace(
            outlet,
            level_dbuv=outlet.level_dbuv + effect.gain_db,
            cn_db=(cn_db := after(outlet)),
            margin_db=left_of_margin(outlet, cn_db),
        )
        for outlet in reception.outlets
    )
    cn_db = effect.cn_db - 10 * np.log10(1 + effect.i_over_n)
    return replace(
        reception,
        level_dbuv=reception.level_dbuv + effect.gain_db,
        cn_db=cn_db,
        margin_db=left_of_margin(reception, cn_db),
        outlets=outlets,
    )


def _window(ear: Ear) -> network.Window:
    return WINDOWS[round(ear.assumptions.value("sfn_window")) - 1]
