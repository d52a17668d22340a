"""What all other emissions do to each margin, through one chain, for any pointing and both time states.

In state (a) the wanted signal is faded to its availability and interferers stand at their medians; in
state (b) the wanted signal stands at its median and interferers are enhanced. Members of one network are
added first, each in its state: useful power in the wanted one's, self-interference in the interferers'.
Everything is reckoned as interference over carrier, which is the same at every outlet: what a chain does
behind the aerial it does to both.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.sparse import csr_array

from app import network
from app.assumptions import Assumptions
from app.chain import aerial as response
from app.chain.parts import Chain
from app.errors import ModeError
from app.fields import EmissionField
from app.interference import Pairs, degradation_db, nuisance_power, pairs_between
from app.interferers import Interferer, spectra_of
from app.link_budget import Reception, Signals, receive
from app.rejection import band_of, rejection_db
from app.systems import mode_of

FloatArray = NDArray[np.float64]
State = Literal["a", "b"]
STATES: tuple[State, ...] = ("a", "b")

SAME_PLACE_DEG = 0.001  # emissions of one channel nearer than this to each other are one, stated twice
SAME_CHANNEL_MHZ = 0.05
WINDOWS: tuple[network.Window, ...] = ("first above the threshold", "strongest")


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
class Company:
    """What is on the air beside each wanted emission."""

    interferers: tuple[Interferer, ...]  # (i,) the wanted emissions first, in their order
    pairs: Pairs
    weights: dict[State, csr_array]  # (e, i) factor by which each interferer's power counts
    networks: tuple[Network, ...]
    acting: NDArray[np.bool_]  # (e,) False for all but the first member of a network: they act as one
    cautions: tuple[str, ...]
    fade_db: FloatArray  # (e,) of the wanted emissions to the availability
    enhancement_db: FloatArray  # (e,)
    network_of: Mapping[int, Network]  # that a wanted emission is a member of; the others are left out

    def rise_db(self, state: State) -> FloatArray:
        """From an emission's level as a wanted one to its level as a disturbing one, in one state. (e,)"""
        return self.fade_db if state == "a" else self.enhancement_db


def company_of(wanted: Sequence[EmissionField], interferers: Sequence[Interferer]) -> Company:
    """Pair the wanted emissions with what disturbs them, and join those that act together."""
    required = np.array([mode_of(one.emission.system, one.emission.mode).required_cn_db for one in wanted])
    emissions = [one.emission for one in interferers]
    pairs = pairs_between(spectra_of([one.emission for one in wanted]), required, spectra_of(emissions))
    networks, cautions = _networks(wanted)
    together = np.arange(len(interferers))
    for one in networks:
        together[one.members] = one.members[0]
    twice = _stated_twice(interferers)
    if twice:
        names = sorted({interferers[i].emission.id for i in twice})
        cautions.append(
            f"One mast is stated twice on one frequency: {', '.join(names)}; it disturbs others once, itself never."
        )
    latitude, longitude, frequency = _places(interferers)
    i, e = pairs.disturber, pairs.wanted
    same_place = (
        (np.abs(latitude[i] - latitude[e]) < SAME_PLACE_DEG)
        & (np.abs(longitude[i] - longitude[e]) < SAME_PLACE_DEG)
        & (np.abs(frequency[i] - frequency[e]) < SAME_CHANNEL_MHZ)
    )
    kept = (together[i] != together[e]) & ~same_place & ~np.isin(i, sorted(twice))
    acting = together[: len(wanted)] == np.arange(len(wanted))
    pairs = _only(pairs, kept)
    return Company(
        tuple(interferers),
        pairs,
        {"a": pairs.weights(tropospheric=False), "b": pairs.weights(tropospheric=True)},
        tuple(networks),
        acting,
        tuple(cautions),
        np.array([one.fade_db for one in wanted]),
        np.array([one.enhancement_db for one in wanted]),
        {e: one for one in networks for e in one.members.tolist()},
    )


@dataclass(frozen=True, slots=True)
class Ear:
    """One chain in one polarisation: the level of each interferer if the aerial pointed at it."""

    chain: Chain
    polarisation: str
    assumptions: Assumptions
    company: Company
    on_axis_dbuv: dict[State, FloatArray]  # (i,) at the first outlet
    kinds: _Kinds

    def left(self, pointing_deg: ArrayLike) -> FloatArray:
        """Share of each interferer's power that the aerial lets in, (…, i), linear."""
        rejected = rejection_db(
            self.chain.aerial,
            self.kinds.frequency_mhz,
            response.off_axis_deg(self.kinds.bearing_deg, pointing_deg),
            self.polarisation,
            self.kinds.polarisation,
            self.assumptions,
        )
        return np.asarray((10 ** (-rejected / 10))[..., self.kinds.of])


@dataclass(frozen=True, slots=True)
class _Kinds:
    """Interferers that an aerial cannot tell apart: one direction, band and polarisation."""

    bearing_deg: FloatArray  # (k,)
    frequency_mhz: FloatArray  # (k,)
    polarisation: tuple[str, ...]  # (k,)
    of: NDArray[np.intp]  # (i,) kind of each interferer


def _kinds(interferers: Sequence[Interferer]) -> _Kinds:
    places: dict[tuple[float, str, str], int] = {}
    first, of = [], []
    for i, one in enumerate(interferers):
        key = (one.bearing_deg, band_of(one.emission.frequency_mhz), one.emission.polarisation)
        if key not in places:
            places[key] = len(places)
            first.append(i)
        of.append(places[key])
    ones = [interferers[i] for i in first]
    return _Kinds(
        np.array([one.bearing_deg for one in ones]),
        np.array([one.emission.frequency_mhz for one in ones]),
        tuple(one.emission.polarisation for one in ones),
        np.array(of, dtype=np.intp),
    )


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
    return Ear(chain, polarisation, assumptions, company, {"a": level, "b": risen}, _kinds(ones))


@dataclass(frozen=True, slots=True)
class Effect:
    """What the company does to each wanted emission in one state."""

    state: State
    i_over_c: FloatArray  # (…, e) linear, over the carrier that the network makes together
    gain_db: FloatArray  # (…, e) what the other members add to one's own carrier
    rise_db: FloatArray  # (…, e) of the required C/N
    powers: FloatArray  # (…, i) at the first outlet
    carrier: FloatArray  # (…, e) useful power at the first outlet, of the network together
    useful: FloatArray  # (…, e) useful share of each member's own power; 1 outside networks
    stray: FloatArray  # (…, e) power of each member that disturbs its own network; 0 outside networks
    cn_db: FloatArray  # (…, e) C/N at the deciding outlet with the network's gain, before interference
    told: dict[int, tuple[int | None, float | None]] = field(default_factory=dict)  # strongest, once reckoned

    @property
    def i_over_n(self) -> FloatArray:
        """Interference over noise at the deciding outlet, (…, e), linear."""
        return np.asarray(self.i_over_c * 10 ** (self.cn_db / 10))

    def contributions(self, company: Company, e: int) -> tuple[NDArray[np.intp], FloatArray]:
        """Interferers of one wanted emission and their power over its carrier (linear), strongest first. (k,)"""
        who, power = self._acting_on(company, e)
        order = np.argsort(-power)
        order = order[power[order] > 0]
        return who[order], power[order] / self.carrier[e]

    def _acting_on(self, company: Company, e: int) -> tuple[NDArray[np.intp], FloatArray]:
        """Interferers of one wanted emission and what they bring into its channel. (k,)"""
        weights = company.weights[self.state]
        row = slice(weights.indptr[e], weights.indptr[e + 1])
        who = weights.indices[row]
        power = weights.data[row] * self.powers[who]
        mine = company.network_of.get(e)
        if mine is not None:
            who, power = np.append(who, mine.members), np.append(power, self.stray[mine.members])
        return who, power

    def strongest(self, company: Company, e: int) -> tuple[int | None, float | None]:
        """Row of the strongest interferer and how far below it the next one stands [dB]; None: there is none."""
        if e not in self.told:
            who, power = self._acting_on(company, e)
            first = int(np.argmax(power)) if power.size and power.max() > 0 else None
            next_power = 0.0 if first is None else float(np.delete(power, first).max(initial=0.0))
            self.told[e] = (
                None if first is None else int(who[first]),
                None if first is None or next_power == 0 else float(10 * np.log10(power[first] / next_power)),
            )
        return self.told[e]


def effect_of(ear: Ear, reception: Reception, left: FloatArray, state: State) -> Effect:
    """Interference, self-interference and network gain for every wanted emission.

    `reception` holds the wanted emissions in the same state, `left` is `Ear.left`, both at the same pointing.
    """
    company = ear.company
    own = 10 ** (reception.outlets[0].level_dbuv / 10)
    powers = left * 10 ** (ear.on_axis_dbuv[state] / 10)
    disturbing = nuisance_power(powers, company.weights[state])
    disturbing = np.broadcast_to(disturbing, own.shape).copy()
    carrier, rise, useful = own.copy(), np.zeros(own.shape), np.ones(own.shape)
    stray = np.zeros(own.shape)
    for one in company.networks:
        mine = own[..., one.members]
        share = network.split(mine, one.arrival_us, one.symbol, _window(ear), ear.assumptions.value("sfn_threshold_db"))
        together = (share * mine).sum(axis=-1)
        stray[..., one.members] = (1 - share) * mine * 10 ** (company.rise_db(state)[one.members] / 10)
        disturbing[..., one.members] += stray[..., one.members].sum(axis=-1)[..., None]
        carrier[..., one.members] = together[..., None]
        useful[..., one.members] = share
        rise[..., one.members] = network.echo_rise_db(
            share * mine,
            one.arrival_us,
            one.bandwidth_mhz,
            one.rise_at_0_db,
            ear.assumptions.value("sfn_echo_range_db"),
        )[..., None]
    with np.errstate(divide="ignore"):
        gain = 10 * np.log10(carrier / own)
    return Effect(state, disturbing / carrier, gain, rise, powers, carrier, useful, stray, reception.cn_db + gain)


def disturbed(reception: Reception, effect: Effect) -> Reception:
    """Return the reception with C/(N + I) for C/N and the margin that it leaves, at every outlet."""

    def after(cn_db: FloatArray) -> FloatArray:
        carrier_to_noise = cn_db + effect.gain_db
        return np.asarray(carrier_to_noise - degradation_db(carrier_to_noise, effect.i_over_c))

    outlets = tuple(
        replace(
            outlet,
            level_dbuv=outlet.level_dbuv + effect.gain_db,
            cn_db=after(outlet.cn_db),
            margin_db=outlet.margin_db + after(outlet.cn_db) - outlet.cn_db - effect.rise_db,
        )
        for outlet in reception.outlets
    )
    return replace(
        reception,
        level_dbuv=reception.level_dbuv + effect.gain_db,
        cn_db=after(reception.cn_db),
        margin_db=reception.margin_db + after(reception.cn_db) - reception.cn_db - effect.rise_db,
        outlets=outlets,
    )


def _window(ear: Ear) -> network.Window:
    return WINDOWS[round(ear.assumptions.value("sfn_window")) - 1]


def _networks(wanted: Sequence[EmissionField]) -> tuple[list[Network], list[str]]:
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


def _places(interferers: Sequence[Interferer]) -> tuple[FloatArray, FloatArray, FloatArray]:
    return (
        np.array([one.transmitter.latitude_deg for one in interferers]),
        np.array([one.transmitter.longitude_deg for one in interferers]),
        np.array([one.emission.frequency_mhz for one in interferers]),
    )


def _stated_twice(interferers: Sequence[Interferer]) -> set[int]:
    """Rows that claim a frequency and place which a stronger row, or an earlier one as strong, claims too."""
    best: dict[tuple[int, int, int], int] = {}
    twice: set[int] = set()
    for i, one in enumerate(interferers):
        key = (
            round(one.transmitter.latitude_deg / SAME_PLACE_DEG),
            round(one.transmitter.longitude_deg / SAME_PLACE_DEG),
            round(one.emission.frequency_mhz / SAME_CHANNEL_MHZ),
        )
        other = best.setdefault(key, i)
        if other != i:
            weaker = i if one.emission.erp_kw <= interferers[other].emission.erp_kw else other
            twice.add(weaker)
            best[key] = other if weaker == i else i
    return twice


def _only(pairs: Pairs, kept: NDArray[np.bool_]) -> Pairs:
    rule = tuple(one for one, keep in zip(pairs.rule, kept.tolist(), strict=True) if keep)
    return Pairs(
        pairs.disturber[kept], pairs.wanted[kept], pairs.steady_db[kept], pairs.tropospheric_db[kept], rule, pairs.shape
    )
