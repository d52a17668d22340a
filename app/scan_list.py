"""Reads a set's list of channels pasted as text, whatever its form: what is recognised, and the rest as it came.

A line counts where it names something on the air: an emission's id, a multiplex's id or name, a frequency in MHz or
kHz within 2 MHz of an emission (where several share it: the channel), or a channel as "21", "ch 21", "E21", "K21",
"C21", "UHF 21". A percentage, bars such as 3/5 or words beside it say how well; several figures: the first labelled
strength or signal for strength, one labelled quality for quality. Words are looked for in the line, "no" before
"perfect"; without any, a listed channel was found and plays.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

from app.errors import ReadingError
from app.readings import Reading, State

MOST_LINES = 5000
NEAR_MHZ = 2.0

# Words of sets' menus and of people, lower case; the first that stands in the line decides.
WORDS: tuple[tuple[str, State], ...] = (
    ("not found", "not found"), ("no signal", "not found"), ("not receiv", "not found"), ("missing", "not found"),
    ("nothing", "not found"), ("weak or no", "not found"), ("none", "not found"), ("off", "not found"),
    ("breaks", "breaks up"), ("break up", "breaks up"), ("pixel", "breaks up"), ("freez", "breaks up"),
    ("blocks", "breaks up"), ("sometimes", "breaks up"), ("poor", "breaks up"), ("bad", "breaks up"),
    ("dropout", "breaks up"), ("perfect", "perfect"), ("good", "perfect"), ("found", "perfect"), ("ok", "perfect"),
    ("excellent", "perfect"),
)  # fmt: skip
_CHANNEL = re.compile(r"(?<![\w.])(?:(?:uhf|vhf|channel|chan|kanal|ch|k|c|e)\s*\.?\s*)?(\d{1,2})(?![\w.%/])", re.I)
_LABELLED = re.compile(r"(?<!\w)(?:uhf|vhf|channel|chan|kanal|ch|k|c|e)\s*\.?\s*(\d{1,2})(?![\w.%])", re.I)
_FREQUENCY = re.compile(r"(?<![\w.])(\d{2,3}(?:[.,]\d+)?)\s*mhz|(?<![\w.])(\d{5,6})\s*khz", re.I)
_PERCENT = re.compile(r"(strength|signal|level|quality)?\D{0,12}?(\d{1,3})\s*%", re.I)
_BARS = re.compile(r"(?<![\w/])(\d{1,2})\s*/\s*(\d{1,2})(?![\w/])")


ANY = Reading(kind="seen", emission="any", state="perfect", instrument="set")


@dataclass(frozen=True, slots=True)
class OnAir:
    """What a line may name."""

    emission: str
    multiplex: str
    name: str  # of the multiplex
    channel: str
    frequency_mhz: float


@dataclass(frozen=True, slots=True)
class Recognised:
    """One line that was understood."""

    line: int
    text: str
    of: str  # emission or multiplex
    state: State
    strength_percent: float | None
    quality_percent: float | None


@dataclass(frozen=True, slots=True)
class ScanList:
    """A pasted list after reading."""

    recognised: tuple[Recognised, ...]
    rest: tuple[tuple[int, str], ...]  # line number and text of what was not understood
    readings: tuple[Reading, ...]


def read_scan_list(
    text: str,
    on_air: Sequence[OnAir],
    complete: bool = False,
    shared: Reading | None = None,
) -> ScanList:
    """Return what a pasted list says.

    Parameters
    ----------
    on_air : sequence of OnAir
        What is on the air in reach.
    complete : bool
        The list is all that the set found: every multiplex on the air that it does not name was not found.
    shared : Reading
        What all of them have in common: chain, day, pointing, point.

    Raises
    ------
    ReadingError
        The list is empty or far too long.
    """
    lines = text.splitlines()
    if not any(line.strip() for line in lines):
        raise ReadingError("the scan list is empty: paste what the set shows, one channel a line", field="text")
    if len(lines) > MOST_LINES:
        raise ReadingError(
            f"the scan list has {len(lines)} lines: paste at most {MOST_LINES}", field="text", allowed=f"{MOST_LINES}"
        )
    recognised, rest = [], []
    for number, line in enumerate(lines, 1):
        if not line.strip():
            continue
        of = _named(line, on_air)
        if of is None:
            rest.append((number, line.strip()[:200]))
        else:
            strength, quality = _percentages(line)
            recognised.append(Recognised(number, line.strip()[:200], of, _state(line), strength, quality))
    return ScanList(tuple(recognised), tuple(rest), _readings(recognised, on_air, complete, shared or ANY))


def _readings(
    recognised: Sequence[Recognised], on_air: Sequence[OnAir], complete: bool, shared: Reading
) -> tuple[Reading, ...]:
    emissions = {one.emission for one in on_air}
    seen: dict[str, Recognised] = {}
    for one in recognised:  # programmes of one multiplex share a channel: the first line of each counts
        seen.setdefault(one.of, one)
    readings = [
        replace(
            shared,
            emission=of if of in emissions else None,
            multiplex=None if of in emissions else of,
            state=one.state,
            note=one.text if one.text.isprintable() else "",
        )
        for of, one in seen.items()
    ]
    if complete and seen:
        named = set(seen) | {one.multiplex for one in on_air if one.emission in seen}
        missing = dict.fromkeys(one.multiplex for one in on_air if one.multiplex not in named)
        readings.extend(replace(shared, emission=None, multiplex=name, state="not found") for name in missing)
    for figures in (
        {of: one.strength_percent for of, one in seen.items()},
        {of: one.quality_percent for of, one in seen.items()},
    ):
        ranked = sorted((of for of in figures if figures[of] is not None), key=lambda of: -(figures[of] or 0.0))
        distinct = [of for k, of in enumerate(ranked) if k == 0 or figures[of] != figures[ranked[k - 1]]]
        if len(distinct) >= 2:
            order = replace(shared, kind="order", emission=None, state=None, stronger=tuple(distinct))
            readings.append(order)
    return tuple(readings)


def _named(line: str, on_air: Sequence[OnAir]) -> str | None:
    """Emission or multiplex that a line names; the most particular way of naming first."""
    words = line.casefold()
    for one in on_air:
        if one.emission.casefold() in words:
            return one.emission
    for match in _FREQUENCY.finditer(line):
        mhz = float(match[1].replace(",", ".")) if match[1] else float(match[2]) / 1e3
        near = sorted((abs(one.frequency_mhz - mhz), one.emission, one.channel) for one in on_air)
        if near and near[0][0] <= NEAR_MHZ:
            return _of_channel(near[0][2], on_air) or near[0][1]
    for one in sorted(on_air, key=lambda one: -len(one.name)):
        if one.name.casefold() in words or one.multiplex.casefold() in words:
            return one.multiplex
    for pattern in (_LABELLED, _CHANNEL):
        for match in pattern.finditer(line):
            of = _of_channel(match[1].lstrip("0"), on_air)
            if of is not None:
                return of
    return None


def _of_channel(channel: str, on_air: Sequence[OnAir]) -> str | None:
    owners = [one for one in on_air if one.channel == channel]
    if not owners:
        return None
    # Several masts on one channel: the set does not say which, so the first, nearest in the list of what is on the air.
    return owners[0].emission


def _state(line: str) -> State:
    words = line.casefold()
    return next((state for word, state in WORDS if re.search(rf"(?<!\w){word}", words)), "perfect")


def _percentages(line: str) -> tuple[float | None, float | None]:
    strength = quality = None
    for label, figure in _PERCENT.findall(line):
        value = float(figure)
        if value > 100:
            continue
        if label.lower() == "quality":
            quality = value if quality is None else quality
        elif strength is None:
            strength = value
        elif quality is None:
            quality = value
    if strength is None:
        for shown, of in _BARS.findall(line):
            if 3 <= int(of) <= 10 and int(shown) <= int(of):
                strength = 100 * int(shown) / int(of)
                break
    return strength, quality
