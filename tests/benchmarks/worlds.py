"""Worlds drawn from the error model, to see whether the chances mean what they say.

A roof has four masts with four emissions each, the second mast carrying two multiplexes of the first; two chains
share a feeder run. A world is one draw of every error there is: by the true model, which may differ from the one that
the chances come from. In each world the roof is read: two levels and three words about the picture, one of them about
a multiplex with two emissions.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from app.chance import Cells, ErrorPart, Loadings, PathError, received
from app.conditioning import Bound, Joint, Plain, Posterior, Site, condition
from app.reading_value import Readable, expected_after, most_valuable
from app.statements import best_of

FloatArray = NDArray[np.float64]

MASTS, EACH = 4, 4
EMISSIONS = MASTS * EACH
NEAR_DB, SOFTNESS_DB = 1.5, 1.0
POSITION_DB, METER_DB, REPEAT_DB, WEATHER_DB, SET_DB = 1.5, 1.5, 0.7, 1.0, 1.5
WORTH, COST = 50.0, 10.0


@dataclass(frozen=True)
class RoofCase:
    """One roof with a chain that is up and one that may be bought."""

    now: Cells
    idea: Cells
    median_state: Cells  # of what is up: no fade; margins without reserve
    multiplex_of: tuple[str, ...]
    price: float
    masts: tuple[str, ...]

    @property
    def multiplexes(self) -> list[str]:
        return sorted(set(self.multiplex_of))


def roof_case(number: int) -> RoofCase:
    """One roof of the benchmark, the same for its number ever after."""
    rng = np.random.default_rng(7000 + number)
    bearing = np.repeat(rng.uniform(0, 360, MASTS).round(), EACH)
    masts = tuple(f"mast-{number}-{m}" for m in range(MASTS) for _ in range(EACH))
    ids = [f"{mast}-{e}" for e, mast in enumerate(masts)]
    owners = [f"mux-{e}" for e in range(EMISSIONS)]
    owners[EACH], owners[EACH + 1] = owners[0], owners[1]
    path_sd = np.repeat(rng.choice([3.0, 5.0, 7.0, 8.0], MASTS), EACH)
    base = np.repeat(rng.uniform(-8, 10, MASTS), EACH) + rng.normal(0, 1.5, EMISSIONS)
    fade = np.repeat(rng.uniform(1.5, 6, MASTS), EACH)
    off = np.repeat(rng.random(MASTS) < 0.4, EACH)
    gain = np.where(off, rng.uniform(-8, 2), rng.uniform(3, 9))
    path = PathError(masts, bearing, path_sd, 0.5, 20.0)

    def cells(aerial: str, median: FloatArray, fades: bool = True) -> Cells:
        def same(key: str, sd: float) -> ErrorPart:
            return ErrorPart((key,) * EMISSIONS, np.full(EMISSIONS, sd))

        parts = (
            same("roof", 2.0),
            ErrorPart(tuple(f"band:{mast}:1" for mast in masts), np.full(EMISSIONS, 2.0)),
            ErrorPart(tuple(f"emission:{one}" for one in ids), np.full(EMISSIONS, 2.5)),
            same(f"aerial:{aerial}", 1.5),
            same("feeder:run", 1.0),
            ErrorPart(tuple(f"off-axis:{aerial}:{one}" for one in ids), np.where(off, 3.0, 0.0)),
            ErrorPart(tuple(f"fade:{mast}" for mast in masts), 0.4 * fade),
        )
        return Cells(median, path, parts if fades else parts[:-1])

    return RoofCase(
        now=cells("small", base),
        idea=cells("large", base + gain),
        median_state=cells("small", base + fade + 3.0, fades=False),
        multiplex_of=tuple(owners),
        price=float(rng.uniform(20, 200)),
        masts=masts,
    )


def scaled(cells: Cells, factor: float) -> Cells:
    """The same margins with every spread times a factor."""
    path = replace(cells.path, sd_db=cells.path.sd_db * factor)
    return replace(cells, path=path, parts=tuple(ErrorPart(p.keys, p.sd_db * factor) for p in cells.parts))


@dataclass(frozen=True)
class World:
    """What is true at one roof."""

    z: dict[str, float]
    now: FloatArray  # (e,) margins
    idea: FloatArray
    median_state: FloatArray

    def got(self, case: RoofCase, margins: FloatArray) -> NDArray[np.bool_]:
        return received(margins[None, :], case.multiplex_of, case.multiplexes)[0]


def world(case: RoofCase, rng: np.random.Generator, scale: float = 1.0, low_mast_db: float = 0.0) -> World:
    """Draw a world; `scale` widens all errors, `low_mast_db` takes the first mast down without telling the model."""
    z: dict[str, float] = {}
    margins = []
    for cells in (case.now, case.idea, case.median_state):
        loadings = _loadings(cells)
        for key in loadings.keys:
            if key not in z:
                z[key] = float(rng.normal())
        errors = loadings.db @ np.array([z[key] for key in loadings.keys])
        margins.append(cells.median_db + scale * errors - low_mast_db * (np.arange(EMISSIONS) < EACH))
    return World(z, *margins)


@dataclass
class Read:
    """The readings of one world as the model sees them."""

    names: list[str] = field(default_factory=list)
    rows: list[dict[str, float]] = field(default_factory=list)
    sites: list[Site] = field(default_factory=list)
    joint: list[Joint] = field(default_factory=list)

    def add(self, name: str, normals: dict[str, float]) -> int:
        self.names.append(name)
        self.rows.append(normals)
        return len(self.rows) - 1

    def loadings(self) -> Loadings:
        keys = tuple(dict.fromkeys(key for row in self.rows for key in row))
        return Loadings(keys, np.array([[row.get(key, 0.0) for key in keys] for row in self.rows]))

    def posterior(self) -> Posterior:
        return condition(self.loadings(), self.sites, self.joint, None, self.names)


def level_of(read: Read, case: RoofCase, here: World, e: int, rng: np.random.Generator, circumstances: dict) -> None:
    """Read the level of one emission through what is up."""
    normals = _row(case.median_state, e)
    for key, sd in ((f"position:{e}", POSITION_DB), ("meter", METER_DB), (f"weather:{case.masts[e]}", WEATHER_DB)):
        normals[key] = sd
    error = sum(circumstances.setdefault(key, rng.normal()) * normals[key] for key in list(normals)[-3:])
    value = float(here.median_state[e] - case.median_state.median_db[e]) + error + REPEAT_DB * rng.normal()
    read.sites.append(Plain(read.add(f"level:{e}", normals), value, REPEAT_DB))


def picture_of(
    read: Read, case: RoofCase, here: World, emissions: Sequence[int], rng: np.random.Generator, circumstances: dict
) -> None:
    """Say of the best of some emissions whether it is perfect, breaks up or is not found."""
    shown, rows = [], []
    for e in emissions:
        normals = _row(case.median_state, e)
        normals |= {f"position:{e}": POSITION_DB, "set": SET_DB, f"weather:{case.masts[e]}": WEATHER_DB}
        error = sum(circumstances.setdefault(key, rng.normal()) * normals[key] for key in list(normals)[-3:])
        shown.append(float(here.median_state[e]) + error + SOFTNESS_DB * rng.normal())
        rows.append(read.add(f"seen:{e}", normals))
    best = max(shown)
    low, high = (NEAR_DB, np.inf) if best > NEAR_DB else (-NEAR_DB, NEAR_DB) if best > -NEAR_DB else (-np.inf, -NEAR_DB)
    bounds = [
        Bound(row, low - case.median_state.median_db[e], high - case.median_state.median_db[e], SOFTNESS_DB)
        for row, e in zip(rows, emissions, strict=True)
    ]
    if len(bounds) == 1:
        read.sites.append(bounds[0])
    else:
        likely = int(np.argmax([case.median_state.median_db[e] for e in emissions]))
        read.joint.append(best_of(bounds, likely))


def read_roof(case: RoofCase, here: World, rng: np.random.Generator) -> Read:
    """Two levels and three words, of emissions chosen at random."""
    read, circumstances = Read(), {}
    chosen = rng.permutation(np.arange(2, EMISSIONS))
    for e in chosen[:2]:
        level_of(read, case, here, int(e), rng, circumstances)
    alone = [int(e) for e in chosen[2:] if int(e) not in (EACH, EACH + 1)]
    for e in alone[:2]:
        picture_of(read, case, here, [e], rng, circumstances)
    picture_of(read, case, here, [0, EACH], rng, circumstances)
    return read


# What a run gathers


@dataclass
class Tally:
    """Chances given and what happened, world by world."""

    chance: list[FloatArray] = field(default_factory=list)
    happened: list[NDArray[np.bool_]] = field(default_factory=list)
    inside: list[NDArray[np.bool_]] = field(default_factory=list)

    def add(self, chance: FloatArray, happened: NDArray[np.bool_], inside: NDArray[np.bool_]) -> None:
        self.chance.append(chance)
        self.happened.append(happened)
        self.inside.append(inside)

    def deciles(self) -> list[tuple[int, float, float, float]]:
        """Number, mean chance, frequency and world-clustered standard error in each decile of the chance."""
        p, y = np.stack(self.chance), np.stack(self.happened)
        rows = []
        for k in range(10):
            here = (p >= k / 10) & ((p < (k + 1) / 10) | (k == 9))
            n = int(here.sum())
            if n:
                per_world = (np.where(here, y - p, 0.0)).sum(axis=1)
                error = float(np.sqrt((per_world**2).sum()) / n)
                rows.append((n, float(p[here].mean()), float(y[here].mean()), error))
        return rows

    def coverage(self) -> float:
        return float(np.concatenate(self.inside).mean())

    def brier(self) -> float:
        return float(((np.stack(self.chance) - np.stack(self.happened)) ** 2).mean())


def judged(case: RoofCase, cells: Cells, truth: FloatArray, tally: Tally) -> None:
    """Note chance and outcome of every multiplex, and whether each margin lies in its 90 % interval."""
    draws = cells.draws()
    got = received(draws, case.multiplex_of, case.multiplexes)
    happened = received(truth[None, :], case.multiplex_of, case.multiplexes)[0]
    if cells.known is None or cells.known.is_normal:
        low, high = cells.mean_db - 1.6449 * cells.sigma_db, cells.mean_db + 1.6449 * cells.sigma_db
    else:
        low, high = np.quantile(draws, [0.05, 0.95], axis=0)
    tally.add(got.mean(axis=0), happened, (truth >= low) & (truth <= high))


@dataclass(frozen=True)
class Policies:
    """Mean earnings per world by each way of deciding."""

    rule: float
    rule_error: float
    always: float
    never: float
    median_margin: float
    measured_share: float


def earnings(cases: Sequence[RoofCase], worlds: int, seed: int) -> Policies:
    """Follow each policy in worlds of every roof; a reading is paid for and read with its errors."""
    rng = np.random.default_rng(seed)
    per_world: dict[str, list[float]] = {name: [] for name in ("rule", "always", "never", "median")}
    measured = 0
    for case in cases:
        before = received(case.now.draws(), case.multiplex_of, case.multiplexes).sum(axis=1)
        after = received(case.idea.draws(), case.multiplex_of, case.multiplexes).sum(axis=1)
        worth = WORTH * (after - before) - case.price
        sd = float(np.linalg.norm([POSITION_DB, METER_DB, REPEAT_DB, WEATHER_DB]))
        levels = case.median_state.draws()
        readables = [Readable(str(e), 0.0, levels[:, e], sd) for e in range(EMISSIONS)]
        best = most_valuable(readables, worth, before * 1.0, after * 1.0)
        measure = best is not None and best.value > COST
        median_gain = sum(
            received(one.median_db[None, :], case.multiplex_of, case.multiplexes).sum() * sign
            for one, sign in ((case.idea, 1), (case.now, -1))
        )
        for _ in range(worlds):
            here = world(case, rng)
            gain = WORTH * (here.got(case, here.idea).sum() - here.got(case, here.now).sum()) - case.price
            if measure:
                assert best is not None
                e = int(best.emission)
                level = np.array([here.median_state[e] + sd * rng.normal()])
                buy = float(expected_after(readables[e], level, worth)[0]) > 0
                measured += 1
            else:
                buy = float(worth.mean()) > 0
            per_world["rule"].append((gain if buy else 0.0) - (COST if measure else 0.0))
            per_world["always"].append(gain)
            per_world["never"].append(0.0)
            per_world["median"].append(gain if WORTH * median_gain > case.price else 0.0)
    rule = np.array(per_world["rule"])
    return Policies(
        float(rule.mean()),
        float(rule.std() / np.sqrt(len(rule))),
        *(float(np.mean(per_world[name])) for name in ("always", "never", "median")),
        measured / len(rule),
    )


def consistency(
    cases: Sequence[RoofCase],
    worlds: int,
    seed: int,
    scale: float = 1.0,
    progress: Callable[[int], None] = lambda done: None,
) -> tuple[Tally, Tally]:
    """Tallies before and after readings over `worlds` worlds of each roof; `scale` widens the truth only."""
    rng = np.random.default_rng(seed)
    before, after = Tally(), Tally()
    for number, case in enumerate(cases):
        plain = Tally()
        for _ in range(worlds):
            here = world(case, rng, scale)
            judged_fast(case, case.now, here.now, plain, before)
            known = read_roof(case, here, rng).posterior()
            judged(case, replace(case.now, known=known), here.now, after)
        progress(number)
    return before, after


def judged_fast(case: RoofCase, cells: Cells, truth: FloatArray, first: Tally, tally: Tally) -> None:
    """Like judged, with the chances of an unread roof computed once."""
    if not first.chance:
        judged(case, cells, truth, first)
    happened = received(truth[None, :], case.multiplex_of, case.multiplexes)[0]
    half = 1.6449 * cells.sigma_db
    tally.add(first.chance[0], happened, np.abs(truth - cells.median_db) <= half)


def low_mast(cases: Sequence[RoofCase], worlds: int, seed: int, low_db: float = 8.0) -> dict[str, float]:
    """Brier scores of the first mast's multiplexes when it is weaker than the model believes.

    Compared with a model that knows, unread and after two levels of that mast.
    """
    rng = np.random.default_rng(seed)
    tallies = {name: Tally() for name in ("told", "unread", "told_read", "read")}
    for case in cases:
        down = low_db * (np.arange(EMISSIONS) < EACH)
        owned = [case.multiplexes.index(case.multiplex_of[e]) for e in range(2, EACH)]
        chances: dict[str, FloatArray] = {}
        for name, offset in (("told", down), ("unread", 0 * down)):
            cells = replace(case.now, median_db=case.now.median_db - offset)
            chances[name] = received(cells.draws(), case.multiplex_of, case.multiplexes).mean(axis=0)
        for _ in range(worlds):
            here = world(case, rng, low_mast_db=low_db)
            happened = here.got(case, here.now)[owned]
            read, circumstances = Read(), {}
            for e in (0, 1):
                level_of(read, case, here, e, rng, circumstances)
            aware = Read(read.names, read.rows, [replace(s, value_db=s.value_db + low_db) for s in read.sites])
            for name, cells in (
                ("read", replace(case.now, known=read.posterior())),
                ("told_read", replace(case.now, median_db=case.now.median_db - down, known=aware.posterior())),
            ):
                chances[name] = received(cells.draws(), case.multiplex_of, case.multiplexes).mean(axis=0)
            for name, tally in tallies.items():
                tally.add(chances[name][owned], happened, happened)
    scores = {name: tally.brier() for name, tally in tallies.items()}
    excess = scores["unread"] - scores["told"]
    scores["removed"] = 1 - (scores["read"] - scores["told_read"]) / excess
    return scores


_CACHE: dict[int, tuple[Cells, Loadings]] = {}


def _loadings(cells: Cells) -> Loadings:
    kept = _CACHE.get(id(cells))
    if kept is None or kept[0] is not cells:
        _CACHE[id(cells)] = kept = (cells, cells.loadings())
    return kept[1]


def _row(cells: Cells, e: int) -> dict[str, float]:
    loadings = _loadings(cells)
    return {key: float(db) for key, db in zip(loadings.keys, loadings.db[e], strict=True) if db}
