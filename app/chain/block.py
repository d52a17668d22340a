"""A block of flats from four answers: how many outlets, star or riser, longest and shortest run, which aerial.

Proposed are amplifier, attenuator, equaliser and splitters or taps so that every channel lies inside the level
window at every outlet. It is a beginning: everything may be edited after. Gains, ratings and losses are classes of
the trade (common practice, no source); their prices are not known.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from app.chain.flow import flow
from app.chain.parts import (
    Aerial,
    Attenuator,
    Chain,
    Equaliser,
    Feeder,
    LaunchAmplifier,
    Outlet,
    Part,
    Receiver,
    Splitter,
    Tap,
)
from app.chain.tables import CABLES, SPLITTERS
from app.chain.windows import ADJACENT_DB, SPREAD_DB, adjacent_step_db, spread_db
from app.errors import ChainError
from app.tables import rows
from propagation.units import db_from_ratio

FloatArray = NDArray[np.float64]
Layout = Literal["star", "riser"]
LAYOUTS: tuple[Layout, ...] = ("star", "riser")
MOST_OUTLETS = 64
TRUNK_M = 10.0  # from the aerial to the amplifier
OUTLET_DB = 1.0
AMPLIFIER_GAINS_DB = (15.0, 20.0, 25.0, 30.0, 35.0, 40.0)
AMPLIFIER_FIGURE_DB, AMPLIFIER_RATED_DBUV = 6.0, 116.0
LEAST_SLOPE_DB, LARGEST_SLOPE_DB = 2.0, 12.0  # below nobody fits an equaliser
PORTS_OF_A_TAP = (1, 2, 4)
MOST_TAPS = 8  # in one riser before a tap with more ports is taken


@dataclass(frozen=True, slots=True)
class Answers:
    """What is asked of a block."""

    outlets: int
    layout: Layout
    longest_m: float
    shortest_m: float
    aerial: Aerial
    cable: str = "copper-7mm"

    def __post_init__(self) -> None:
        """Refuse what is no block."""
        if not 1 <= self.outlets <= MOST_OUTLETS:
            _refuse("outlets", f"{self.outlets} outlets", f"use 1 to {MOST_OUTLETS}")
        if self.layout not in LAYOUTS:
            _refuse("layout", f'layout "{self.layout}"', f"use {' or '.join(LAYOUTS)}")
        if self.cable not in CABLES:
            _refuse("cable", f'cable "{self.cable}"', f"use {', '.join(CABLES)}")
        if not (math.isfinite(self.longest_m) and 0 < self.longest_m <= 500):
            _refuse("longest_m", f"a longest run of {self.longest_m:g} m", "use more than 0 to 500 m")
        if not 0 <= self.shortest_m <= self.longest_m:
            _refuse("shortest_m", f"a shortest run of {self.shortest_m:g} m", "use 0 to the longest run")


@dataclass(frozen=True, slots=True)
class Arriving:
    """What the aerial gives: one row per channel."""

    frequency_mhz: FloatArray  # (e,)
    bandwidth_mhz: FloatArray  # (e,)
    level_dbuv: FloatArray  # (e,) at the aerial's terminals
    lowest_dbuv: FloatArray  # (e,) level window at an outlet
    highest_dbuv: FloatArray  # (e,)


@dataclass(frozen=True, slots=True)
class Proposal:
    """A chain for a block, and how it does."""

    chain: Chain
    level_dbuv: FloatArray  # (outlets, e)
    findings: tuple[str, ...]  # what lies outside, with the mend; empty: all inside


def propose(answers: Answers, arriving: Arriving, name: str = "block") -> Proposal:
    """Return a chain for a block with every channel inside its window at every outlet, as far as that is possible.

    Raises
    ------
    ChainError
        No channel arrives, or the answers describe no block.
    """
    if not arriving.level_dbuv.size:
        _refuse("channels", "no channel arrives at the aerial", "choose another aerial, pointing or roof")
    slope_db = _slope_db(answers, arriving.frequency_mhz)
    best: tuple[float, Proposal] | None = None
    for taps_from in _tap_starts(answers):
        bare = _chain(answers, arriving, name, 0.0, slope_db, taps_from)
        net_db = _net_gain_db(arriving, _levels(bare, arriving))
        chain = _chain(answers, arriving, name, net_db, slope_db, taps_from)
        levels = _levels(chain, arriving)
        clear_db = float(np.min(np.minimum(levels - arriving.lowest_dbuv, arriving.highest_dbuv - levels)))
        score = clear_db - max(0.0, max(spread_db(row) for row in levels) - SPREAD_DB)
        if best is None or score > best[0] + 1e-9:
            best = (score, Proposal(chain, levels, _findings(chain, arriving, levels)))
    assert best is not None
    return best[1]


def _slope_db(answers: Answers, frequency_mhz: FloatArray) -> float:
    """Return how much more the mean run loses at the highest channel than at the lowest, in whole decibels."""
    run = Feeder(
        id="run", name="run", cable=answers.cable, length_m=TRUNK_M + (answers.longest_m + answers.shortest_m) / 2
    )
    cable = CABLES[run.cable]
    ends = np.array([frequency_mhz.min(), frequency_mhz.max()])
    low, high = run.length_m / 100 * (cable.a_db * np.sqrt(ends) + cable.b_db * ends)
    slope = float(round(high - low))
    return min(slope, LARGEST_SLOPE_DB) if slope >= LEAST_SLOPE_DB else 0.0


def _net_gain_db(arriving: Arriving, bare_dbuv: FloatArray) -> float:
    """Return the gain that centres the levels in their windows, in whole decibels."""
    least = float(np.max(arriving.lowest_dbuv - bare_dbuv))
    most = float(np.min(arriving.highest_dbuv - bare_dbuv))
    return float(round((least + most) / 2))


def _head(answers: Answers, net_db: float, slope_db: float, frequency_mhz: FloatArray) -> list[Part]:
    """Return aerial, lead, attenuator, amplifier and equaliser that together have a net gain."""
    equaliser_db = 1.0 if slope_db else 0.0
    needed = net_db + equaliser_db
    parts: list[Part] = [
        answers.aerial,
        Feeder(id="trunk", name="Lead from the aerial", cable=answers.cable, length_m=TRUNK_M),
    ]
    gain_db = 0.0
    if needed > 0:
        gain_db = next((gain for gain in AMPLIFIER_GAINS_DB if gain >= needed), AMPLIFIER_GAINS_DB[-1])
    pad_db = gain_db - needed
    if pad_db >= 1:
        parts.append(Attenuator(id="pad", name="Attenuator", loss_db=min(pad_db, 60.0)))
    if gain_db:
        parts.append(
            LaunchAmplifier(
                id="launch",
                name="Launch amplifier",
                gain_db=gain_db,
                noise_figure_db=AMPLIFIER_FIGURE_DB,
                rated_output_dbuv=AMPLIFIER_RATED_DBUV,
            )
        )
    if slope_db:
        low, high = float(frequency_mhz.min()), float(frequency_mhz.max())
        parts.append(
            Equaliser(
                id="equaliser", name="Equaliser", slope_db=slope_db, loss_db=equaliser_db, low_mhz=low, high_mhz=high
            )
        )
    return parts


def _chain(answers: Answers, arriving: Arriving, name: str, net_db: float, slope_db: float, taps_from: int) -> Chain:
    head = _head(answers, net_db, slope_db, arriving.frequency_mhz)
    behind = _star(answers) if answers.layout == "star" else _riser(answers, arriving, taps_from)
    first = replace(behind[0], after=(head[-1].id,))
    title = f"Block of {answers.outlets}, {answers.layout}"
    return Chain(name, (*head, first, *behind[1:], Receiver(id="set", name="Television set")), title=title)


def _runs_m(answers: Answers) -> list[float]:
    return [round(float(one), 1) for one in np.linspace(answers.shortest_m, answers.longest_m, answers.outlets)]


def _star(answers: Answers) -> list[Part]:
    """Return splitters with enough ports and one run to each outlet."""
    parts: list[Part] = []
    free: list[str] = []  # splitter of each free port
    if answers.outlets == 1:
        return [
            Feeder(id="run-1", name="Run 1", cable=answers.cable, length_m=answers.longest_m),
            Outlet(id="outlet-1", name="Outlet 1", loss_db=OUTLET_DB),
        ]
    largest = max(SPLITTERS)
    groups = math.ceil(answers.outlets / largest)
    if groups == 1:
        ports = min(one for one in SPLITTERS if one >= answers.outlets)
        parts.append(Splitter(id="splitter", name="Splitter", ports=ports))
        free = ["splitter"] * ports
    else:
        ports = min(one for one in SPLITTERS if one >= groups)
        parts.append(Splitter(id="splitter", name="First splitter", ports=ports))
        each = min(one for one in SPLITTERS if one >= math.ceil(answers.outlets / groups))
        for group in range(1, groups + 1):
            ident = f"splitter-{group}"
            parts.append(Splitter(id=ident, name=f"Splitter {group}", ports=each, after=("splitter",)))
            free += [ident] * each
    for number, (length_m, ident) in enumerate(zip(_runs_m(answers), free, strict=False), 1):
        parts += [
            Feeder(id=f"run-{number}", name=f"Run {number}", cable=answers.cable, length_m=length_m, after=(ident,)),
            Outlet(id=f"outlet-{number}", name=f"Outlet {number}", loss_db=OUTLET_DB, after=(f"run-{number}",)),
        ]
    return parts


def _ports_each(answers: Answers) -> int:
    return next((one for one in PORTS_OF_A_TAP if math.ceil(answers.outlets / one) <= MOST_TAPS), PORTS_OF_A_TAP[-1])


def _tap_starts(answers: Answers) -> range:
    """Return how much larger than the least the first tap may be, as steps in the table; a star has none."""
    return range(1) if answers.layout == "star" else range(len(_values(_ports_each(answers))))


def _values(ports: int) -> list[tuple[float, float]]:
    return sorted(
        (float(row["tap_loss_db"]), float(row["through_loss_db"])) for row in rows("taps") if int(row["ports"]) == ports
    )


def _riser(answers: Answers, arriving: Arriving, taps_from: int) -> list[Part]:
    """Return one tap per floor, tap values falling with the level so that all floors get the same."""
    ports = _ports_each(answers)
    values = _values(ports)
    floors = math.ceil(answers.outlets / ports)
    lengths = [float(one) for one in np.linspace(answers.shortest_m, answers.longest_m, floors)]
    cable = CABLES[answers.cable]
    middle = float(np.mean(arriving.frequency_mhz))
    per_m = (cable.a_db * math.sqrt(middle) + cable.b_db * middle) / 100
    parts: list[Part] = []
    aim_db, lost_db, at_m, outlet = values[taps_from][0], 0.0, 0.0, 0
    aim_db += per_m * lengths[0]
    for floor, along_m in enumerate(lengths, 1):
        lost_db += per_m * (along_m - at_m)
        loss_db, through_db = min(values, key=lambda one: abs(one[0] - (aim_db - lost_db)))
        above = f"tap-{floor - 1}"
        parts.append(
            Feeder(
                id=f"riser-{floor}",
                name=f"Riser {floor}",
                cable=answers.cable,
                length_m=round(along_m - at_m, 1),
                after=() if floor == 1 else (above,),
                port="" if floor == 1 else "through",
            )
        )
        parts.append(
            Tap(
                id=f"tap-{floor}",
                name=f"Tap {floor}",
                ports=ports,
                tap_loss_db=loss_db,
                through_loss_db=through_db,
                after=(f"riser-{floor}",),
            )
        )
        for _ in range(min(ports, answers.outlets - outlet)):
            outlet += 1
            parts.append(
                Outlet(id=f"outlet-{outlet}", name=f"Outlet {outlet}", loss_db=OUTLET_DB, after=(f"tap-{floor}",))
            )
        lost_db, at_m = lost_db + through_db, along_m
    return parts


def _levels(chain: Chain, arriving: Arriving) -> FloatArray:
    run = flow(chain, arriving.frequency_mhz, {})
    return np.stack([arriving.level_dbuv + db_from_ratio(one.at.gain[chain.aerial.id]) for one in run.outlets])


def _findings(chain: Chain, arriving: Arriving, levels: FloatArray) -> tuple[str, ...]:
    found = []
    for outlet, row in zip(chain.outlet_names, levels, strict=True):
        for below, word, mend in (
            (arriving.lowest_dbuv - row, "below", "more gain, a shorter run, a larger aerial or a better cable"),
            (row - arriving.highest_dbuv, "above", "an attenuator or filter for that channel"),
        ):
            worst = int(np.argmax(below))
            if below[worst] > 0.05:
                at = f"{arriving.frequency_mhz[worst]:g} MHz"
                found.append(f"{outlet}: {at} stands {below[worst]:.1f} dB {word} its window: {mend}")
    spread = max(spread_db(row) for row in levels)
    if spread > SPREAD_DB:
        found.append(
            f"channels differ by {spread:.1f} dB at an outlet, {SPREAD_DB:g} are good: "
            "level them channel by channel, or choose another pointing"
        )
    step = max(adjacent_step_db(row, arriving.frequency_mhz, arriving.bandwidth_mhz) for row in levels)
    if step > ADJACENT_DB:
        found.append(f"neighbouring channels differ by {step:.1f} dB, {ADJACENT_DB:g} are good: filter the stronger")
    return tuple(found)


def _refuse(field: str, came: str, mend: str) -> None:
    raise ChainError(f"block of flats: {came}: {mend}", field=field)
