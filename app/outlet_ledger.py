"""Every gain and loss of one emission from the field at the aerial to the margin at one outlet, with its source."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import Assumptions
from app.at_aerial import AtAerial, aerial_lines
from app.chain import overload
from app.chain.cascade import Stage, stage_of
from app.chain.flow import Flow, OutletFlow, flow, settings
from app.chain.parts import Amplifier, Chain, Part
from app.link_budget import (
    ENVIRONMENTS,
    AtOutlet,
    Heard,
    Signals,
    hear,
    noise_factor_at,
    outlets_of,
    set_noise_figure_db,
    summed_dbuv,
)
from propagation.noise import man_made_fam_db, noise_power_dbm
from propagation.units import db_from_ratio, dbuv_from_dbm, ratio_from_db

FloatArray = NDArray[np.float64]
Line = tuple[str, FloatArray, str]


@dataclass(frozen=True, slots=True)
class Step:
    """One line of the ledger."""

    step: str
    value_db: float
    total: float  # dB(µV/m) up to the field, dB(µV) as a level, then dB of C/N and margin
    source: str


@dataclass(frozen=True, slots=True)
class Book:
    """All that the ledgers of one chain at one pointing are written from."""

    chain: Chain
    signals: Signals
    field_dbuv_m: FloatArray  # (e,)
    polarisation: str
    assumptions: Assumptions
    surroundings: str
    heard: Heard
    runs: tuple[tuple[Flow, tuple[AtOutlet, ...]], ...]  # one for each setting of the switches
    stages: dict[tuple[str, bool, int], Stage] = field(default_factory=dict)  # of parts, reckoned once
    noise: dict[tuple[int, str], list[Line]] = field(default_factory=dict)  # lines by setting and outlet, likewise
    catch: dict[tuple[str, int], list[Line]] = field(default_factory=dict)  # lines by aerial and emission, likewise

    def steps(self, index: int, outlet: str | None = None) -> list[Step]:
        """Every gain and loss of one emission (row of the signals), from the field at the aerial to the margin.

        `outlet` None: the one with the least margin of those that count.
        """
        number, run, reached = self._best(index)
        names = [one.name for one in reached]
        if outlet is None:
            counting = [i for i, name in enumerate(names) if name in self.chain.deciding_outlets]
            outlet = names[min(counting, key=lambda i: float(reached[i].margin_db[index]))]
        at = names.index(outlet)
        air = self._serving(run.outlets[at], index)
        lines: list[Line] = [
            ("field at the aerial", self.field_dbuv_m[index : index + 1], "field of the path"),
            *self._catch(air, index),
            *self._run_lines(air, outlet, index),
        ]
        lines += self._joined(lines, reached[at], index)
        lines += self._noise_lines(run.outlets[at], reached[at], number, index)
        needed = self.signals.mode_source[index] if self.signals.mode_source else "planning value of the mode"
        lines += [
            ("C/N that the mode needs", -self.signals.required_cn_db[index : index + 1], needed),
            ("reserve", np.array([-self.assumptions.value("reserve_db")]), "assumption reserve_db"),
        ]
        steps: list[Step] = []
        total = 0.0
        for name, value, source in lines:
            value_db = float(value.reshape(-1)[0]) + 0.0  # no negative zero
            total += value_db
            steps.append(Step(name, value_db, total, source))
        return steps

    def _best(self, index: int) -> tuple[int, Flow, tuple[AtOutlet, ...]]:
        """Return the setting of the switches that serves an emission best."""

        if len(self.runs) == 1:
            return 0, *self.runs[0]

        def margin(number: int) -> float:
            return min(
                float(min(one.margin_db[index], one.headroom_db[index]))
                for one in self.runs[number][1]
                if one.name in self.chain.deciding_outlets
            )

        number = max(range(len(self.runs)), key=margin)
        return number, *self.runs[number]

    def _serving(self, outlet: OutletFlow, index: int) -> AtAerial:
        if len(self.heard.airs) == 1:
            return self.heard.airs[0]

        def level(air: AtAerial) -> float:
            gain = outlet.at.gain.get(air.aerial.id)
            if gain is None or gain[index] == 0:
                return -np.inf
            return float(self.heard.level_dbuv[air.aerial.id][index] + 10 * np.log10(gain[index]))

        return max(self.heard.airs, key=level)

    def _catch(self, air: AtAerial, index: int) -> list[Line]:
        key = (air.aerial.id, index)
        if key not in self.catch:
            frequency_mhz, emitted = float(self.signals.frequency_mhz[index]), self.signals.polarisation[index]
            self.catch[key] = aerial_lines(air, frequency_mhz, emitted, self._rods(air), index)
        return self.catch[key]

    def _rods(self, air: AtAerial) -> str:
        first = air.aerial is self.heard.airs[0].aerial
        return self.polarisation if first else air.aerial.polarisation or self.polarisation

    def _run_lines(self, air: AtAerial, outlet: str, index: int) -> list[Line]:
        run = self.chain.run_to(outlet, air.aerial.id)
        lines: list[Line] = []
        above = air.aerial.id
        for part, port in zip(run, [*(part.port for part in run[1:]), ""], strict=True):
            entry = self.chain.tree.fed_by[part.id].index(above)
            stage = self._stage(part, port == "through", entry)
            lines.append((part.name, stage.gain_db[index : index + 1], stage.source))
            above = part.id
        return lines

    def _stage(self, part: Part, through: bool, entry: int) -> Stage:
        key = (part.id, through, entry)
        if key not in self.stages:
            self.stages[key] = stage_of(part, self.signals.frequency_mhz, through, entry)
        return self.stages[key]

    def _joined(self, lines: list[Line], reached: AtOutlet, index: int) -> list[Line]:
        """Return what the other aerials add to the level that a combiner gives."""
        if len(self.heard.airs) == 1:
            return []
        alone = sum(float(value.reshape(-1)[0]) for _, value, _ in lines)
        added = float(reached.level_dbuv[index]) - alone
        return [("the other aerial adds", np.array([added]), "powers add")] if added > 1e-9 else []

    def _noise_lines(self, outlet: OutletFlow, reached: AtOutlet, number: int, index: int) -> list[Line]:
        """Noise at the outlet, split by where it comes from; each line is 0 or a loss of C/N."""
        key = (number, outlet.name)
        if key not in self.noise:
            self.noise[key] = self._noise_at(outlet, reached, number)
        bandwidth = self.signals.bandwidth_mhz[index]
        return [
            (name, value[index : index + 1], source.format(bandwidth=bandwidth))
            for name, value, source in self.noise[key]
        ]

    def _noise_at(self, outlet: OutletFlow, reached: AtOutlet, number: int) -> list[Line]:
        """Return the same lines for all emissions together, (e,)."""
        chain, signals = self.chain, self.signals
        count = signals.frequency_mhz.size
        behind = chain.tree.sets[outlet.name]
        set_figure_db = set_noise_figure_db(chain, signals, outlet.name)
        own = noise_factor_at(chain, signals, outlet, np.zeros(1))
        stated = behind.noise_figure_db is not None
        lead_db = -db_from_ratio(outlet.lead_gain[:count])
        lines: list[Line] = [
            (
                "thermal noise",
                -dbuv_from_dbm(noise_power_dbm(signals.bandwidth_mhz)),
                "k T0 B in {bandwidth:g} MHz at 290 K, 75 ohms",
            ),
            (
                f"noise of {behind.name}",
                -set_figure_db,
                "as stated for the part" if stated else "planning noise figure of the system",
            ),
        ]
        if chain.tree.leads[outlet.name]:
            lines.append(("fly lead to the set", -lead_db, "its loss adds to the noise figure of the set"))
        left = db_from_ratio(own) - set_figure_db - lead_db
        if any(isinstance(part, Amplifier) for part in chain.parts):
            lines.append(("noise the amplifier leaves", -left, "cascade rule (Friis 1944), parts at 290 K"))
        elif (np.abs(left) > 1e-9).any():
            lines.append(("noise that the combiner adds", -left, "ports at 290 K"))
        environment = ENVIRONMENTS[self.surroundings]
        outside = np.maximum(ratio_from_db(man_made_fam_db(signals.frequency_mhz, environment)), 1) - 1
        heard = db_from_ratio(noise_factor_at(chain, signals, outlet, outside) / own)
        lines.append(("noise from outside", -heard, f"Rec. ITU-R P.372, {environment}, at least 290 K"))
        if self.runs[number][0].amplifiers:
            noise, products = ratio_from_db(reached.noise_dbuv), ratio_from_db(reached.intermodulation_dbuv)
            source = f"all that loads them; rated output, C/I3 law from memory; {self._loading(number)}"
            escaped = source.replace("{", "{{").replace("}", "}}")  # names of parts may hold braces
            lines.append(("third-order products of amplifiers", -db_from_ratio((noise + products) / noise), escaped))
        return lines

    def _loading(self, number: int) -> str:
        """Say how far the signals drive each amplifier, beside the trade's derating."""
        run = self.runs[number][0]
        words = []
        for name, place in run.amplifiers.items():
            level = summed_dbuv(self.heard.load_dbuv, place.gain)
            strong = int((level > np.nanmax(level) - 20).sum()) if level.size else 0
            derated = run.rated_dbuv[name] - overload.derating_db(max(strong, 2))
            words.append(
                f"{self.chain.tree.part(name).name} puts out {float(overload.power_sum_dbuv(level)):.0f} dB(µV) "
                f"in all, {strong} channels: rated {run.rated_dbuv[name]:g}, {derated:.0f} each by the trade's derating"
            )
        return "; ".join(words)


def book_of(
    chain: Chain,
    signals: Signals,
    field_dbuv_m: ArrayLike,
    pointing_deg: float,
    polarisation: str,
    assumptions: Assumptions,
    surroundings: str = "open",
    load_dbuv_m: ArrayLike | None = None,
) -> Book:
    """Gather what the ledgers of one chain need; arguments as those of `receive`, fields (e,) or scalar."""
    known = np.broadcast_to(np.asarray(field_dbuv_m, dtype=float), signals.frequency_mhz.shape)
    heard = hear(chain, signals, known, pointing_deg, polarisation, assumptions, load_dbuv_m)
    fam_db = man_made_fam_db(signals.frequency_mhz, ENVIRONMENTS[surroundings])
    outside = np.maximum(ratio_from_db(fam_db), 1) - 1
    runs = []
    for setting in settings(chain):
        run = flow(chain, heard.load_frequency_mhz, setting)
        runs.append((run, tuple(outlets_of(chain, signals, heard, run, outside, assumptions))))
    return Book(chain, signals, known, polarisation, assumptions, surroundings, heard, tuple(runs))


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
    book = book_of(chain, signals, field_dbuv_m, pointing_deg, polarisation, assumptions, surroundings)
    return book.steps(index, outlet)
