"""Who disturbs whom at a roof and what acts together, whatever the chain."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array

from app.fields import EmissionField
from app.interference import Pairs, pairs_between
from app.interferers import Interferer, spectra_of
from app.networks import Group, Network, grouped, networks_among
from app.rejection import band_of
from app.systems import mode_of

FloatArray = NDArray[np.float64]
State = Literal["a", "b"]
STATES: tuple[State, ...] = ("a", "b")

SAME_PLACE_DEG = 0.001  # emissions of one channel nearer than this to each other are one, stated twice
SAME_CHANNEL_MHZ = 0.05


@dataclass(frozen=True, slots=True)
class Kinds:
    """Interferers that an aerial cannot tell apart: one direction, band and polarisation."""

    bearing_deg: FloatArray  # (k,)
    frequency_mhz: FloatArray  # (k,)
    polarisation: tuple[str, ...]  # (k,)
    of: NDArray[np.intp]  # (i,) kind of each interferer


def kinds_among(interferers: Sequence[Interferer]) -> Kinds:
    """Sort the interferers by what an aerial can tell apart."""
    places: dict[tuple[float, str, str], int] = {}
    first, of = [], []
    for i, one in enumerate(interferers):
        key = (one.bearing_deg, band_of(one.emission.frequency_mhz), one.emission.polarisation)
        if key not in places:
            places[key] = len(places)
            first.append(i)
        of.append(places[key])
    ones = [interferers[i] for i in first]
    return Kinds(
        np.array([one.bearing_deg for one in ones]),
        np.array([one.emission.frequency_mhz for one in ones]),
        tuple(one.emission.polarisation for one in ones),
        np.array(of, dtype=np.intp),
    )


@dataclass(frozen=True, slots=True)
class Company:
    """What is on the air beside each wanted emission."""

    interferers: tuple[Interferer, ...]  # (i,) the wanted emissions first, in their order
    pairs: Pairs
    weights: dict[State, csr_array]  # (e, i) factor by which each interferer's power counts; entries as the pairs
    networks: tuple[Network, ...]
    groups: tuple[Group, ...]  # the same networks
    kinds: Kinds  # of the interferers
    acting: NDArray[np.bool_]  # (e,) False for all but the first member of a network: they act as one
    cautions: tuple[str, ...]
    fade_db: FloatArray  # (e,) of the wanted emissions to the availability
    enhancement_db: FloatArray  # (e,)
    network_of: Mapping[int, Network]  # that a wanted emission is a member of; the others are left out

    def brought(self, state: State, power: FloatArray) -> FloatArray:
        """What interferers of such powers (i,) bring into the wanted channels, one entry for each pair. (p,)"""
        return np.asarray(self.weights[state].data * power[self.pairs.disturber])

    def by_kind(self, brought: FloatArray) -> FloatArray:
        """Sum of entries for each pair (p,) over each kind of interferers, for each wanted emission. (e, k)"""
        count, kinds = len(self.acting), len(self.kinds.bearing_deg)
        cell = self.pairs.wanted * kinds + self.kinds.of[self.pairs.disturber]
        return np.asarray(np.bincount(cell, brought, count * kinds).reshape(count, kinds))

    def rise_db(self, state: State) -> FloatArray:
        """From an emission's level as a wanted one to its level as a disturbing one, in one state. (e,)"""
        return self.fade_db if state == "a" else self.enhancement_db


def company_of(wanted: Sequence[EmissionField], interferers: Sequence[Interferer]) -> Company:
    """Pair the wanted emissions with what disturbs them, and join those that act together."""
    required = np.array([mode_of(one.emission.system, one.emission.mode).required_cn_db for one in wanted])
    emissions = [one.emission for one in interferers]
    pairs = pairs_between(spectra_of([one.emission for one in wanted]), required, spectra_of(emissions))
    networks, cautions = networks_among(wanted)
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
        grouped(networks),
        kinds_among(interferers),
        acting,
        tuple(cautions),
        np.array([one.fade_db for one in wanted]),
        np.array([one.enhancement_db for one in wanted]),
        {e: one for one in networks for e in one.members.tolist()},
    )


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
    return Pairs(
        pairs.disturber[kept],
        pairs.wanted[kept],
        pairs.steady_db[kept],
        pairs.tropospheric_db[kept],
        pairs.rule[kept],
        pairs.shape,
    )
