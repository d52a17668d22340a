"""How signal, noise and amplifier products run through the tree of a chain, once for all emissions.

Every part is passed once, whatever the number of outlets. Power gains are kept from each source to each place;
sources are the aerials and the amplifiers that have a rated output, whose products are born there. Noise is kept
as a factor over k T0: 1 is a source at 290 K. What a place has of it is

    n = Σ n_in g + (1 − Σ g)     passive parts and combiners at 290 K        n = n_in g + (F − 1) g     amplifiers

which along one run is the cascade rule (Friis 1944), referred to the output.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.chain.cascade import stage_of
from app.chain.parts import Aerial, Amplifier, Chain, Part, Switch
from propagation.units import ratio_from_db

FloatArray = NDArray[np.float64]
Setting = Mapping[str, int]  # id of a switch: number of the input that it lets through


@dataclass(frozen=True, slots=True)
class Place:
    """What reaches one place of a chain."""

    gain: dict[str, FloatArray]  # id of an aerial or amplifier: power gain from there to here, (f,) [-]
    noise: FloatArray  # (f,) over k T0, every aerial taken at 290 K [-]


@dataclass(frozen=True, slots=True)
class OutletFlow:
    """One outlet and the set behind it."""

    name: str
    at: Place  # at the socket
    lead_gain: FloatArray  # (f,) of the fly leads, power [-]
    lead_noise: FloatArray  # (f,) they and the set's input add, referred to the set, without the set's own [-]


@dataclass(frozen=True, slots=True)
class Flow:
    """A chain for one setting of its switches."""

    outlets: tuple[OutletFlow, ...]
    amplifiers: dict[str, Place]  # id of each amplifier with a rated output: what stands at its output
    rated_dbuv: dict[str, float]


def settings(chain: Chain) -> Iterator[Setting]:
    """Every setting of the chain's switches; one that is empty without switches."""
    switches = [part for part in chain.tree.order if isinstance(part, Switch)]
    for choice in itertools.product(*(range(len(chain.tree.fed_by[switch.id])) for switch in switches)):
        yield {switch.id: number for switch, number in zip(switches, choice, strict=True)}


def flow(chain: Chain, frequency_mhz: FloatArray, setting: Setting) -> Flow:
    """Gains and noise of a chain at frequencies (f,) [MHz], for one setting of its switches."""
    at: dict[str, Place] = {}  # behind each part, its usual port
    through: dict[str, Place] = {}  # behind each tap, its way on
    amplifiers: dict[str, Place] = {}
    for part in chain.tree.order:
        if isinstance(part, Aerial):
            at[part.id] = Place({part.id: np.ones_like(frequency_mhz)}, np.ones_like(frequency_mhz))
            continue
        above = chain.tree.fed_by[part.id]
        fed = [(through if part.port == "through" else at)[ident] for ident in above]
        at[part.id] = _passed(part, fed, frequency_mhz, False, setting)
        if part.kind == "tap":
            through[part.id] = _passed(part, fed, frequency_mhz, True, setting)
        if isinstance(part, Amplifier) and part.powered and part.rated_output_dbuv is not None:
            place = at[part.id]
            amplifiers[part.id] = place
            born = {part.id: np.ones_like(frequency_mhz)}
            at[part.id] = Place({**place.gain, **born}, place.noise)
    outlets = []
    ids = {part.name: part.id for part in chain.tree.order if part.kind == "outlet"}
    for name in chain.outlet_names:
        gain = np.ones_like(frequency_mhz)
        for lead in chain.tree.leads[name]:
            gain = gain * ratio_from_db(stage_of(lead, frequency_mhz).gain_db)
        outlets.append(OutletFlow(name, at[ids[name]], gain, 1 - gain))
    return Flow(tuple(outlets), amplifiers, _rated(chain))


def _rated(chain: Chain) -> dict[str, float]:
    return {
        part.id: part.rated_output_dbuv
        for part in chain.parts
        if isinstance(part, Amplifier) and part.powered and part.rated_output_dbuv is not None
    }


def _passed(part: Part, fed: list[Place], frequency_mhz: FloatArray, through: bool, setting: Setting) -> Place:
    """Return what stands behind a part, from what stands before each of its inputs."""
    gains: list[FloatArray] = []
    added = np.zeros_like(frequency_mhz)
    for entry in range(len(fed)):
        stage = stage_of(part, frequency_mhz, through, entry)
        gain = ratio_from_db(stage.gain_db)
        if isinstance(part, Switch) and setting[part.id] != entry:
            gain = np.zeros_like(gain)
        if isinstance(part, Amplifier) and part.powered:
            added = (ratio_from_db(stage.noise_figure_db) - 1) * gain
        gains.append(gain)
    if not (isinstance(part, Amplifier) and part.powered):
        added = np.maximum(1 - sum(gains, np.zeros_like(frequency_mhz)), 0)
    total: dict[str, FloatArray] = {}
    noise = added
    for place, gain in zip(fed, gains, strict=True):
        noise = noise + place.noise * gain
        for source, known in place.gain.items():
            total[source] = total.get(source, 0) + known * gain
    return Place(total, noise)
