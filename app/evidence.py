"""From readings to what they say of the errors: each compared with its prediction, weighed, used or set aside.

A reading y of a quantity with the prediction p is y = p + (errors of the model) + position + weather + meter:

    position  N(0, position_sd²), one per aerial, height and emission: two points of one chain share it
    weather   N(0, ((E1 - E50) / 2.33)²) if y > p, N(0, (fade99 / 2.33)²) if below, one per mast and day
    meter     its calibration, one per instrument, and its repeatability, anew each time

The first three are named normals like those of the model, so what two readings share cancels in their difference:
two points of a chain measure the run between them, two aerials on one mast their difference of gain. A run read at
two points is known by those readings and not by what such runs usually are; its prior is widened to say so.

A reading farther than 3.5 standard deviations from its prediction, or from what all others together leave of it,
is kept and waits until it is confirmed.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.causes import candidates
from app.chance import Loadings
from app.conditioning import FAR_SD, Plain, Posterior, condition, match, surprise, without
from app.findings import findings
from app.readings import AT_THE_AERIAL, Reading
from app.statements import Rows, Situation, Statement, statement_of

FloatArray = NDArray[np.float64]

LARGEST_ROUNDS = 200  # of setting readings aside


@dataclass(frozen=True, slots=True)
class Weighed:
    """One reading after comparison."""

    reading: Reading
    used: bool
    reason: str  # why not, or how
    emission: str | None = None
    predicted_db: float | None = None  # before any reading
    read_db: float | None = None  # what is compared with it; of a MER the C/N behind it
    spread_db: float | None = None  # of prediction and reading together
    surprise_sd: float | None = None
    candidates: tuple[str, ...] = ()  # for the cause of a surprise


@dataclass(frozen=True, slots=True)
class Evidence:
    """All readings of a roof and what they leave of the model's errors."""

    weighed: tuple[Weighed, ...]
    posterior: Posterior | None  # None: nothing was used
    findings: tuple[str, ...] = ()


def weigh(readings: Sequence[Reading], situation: Situation) -> Evidence:
    """Return what is known of the errors after the readings, and what became of each reading."""
    rows = Rows()
    weighed: dict[int, Weighed] = {}
    statements: dict[int, Statement] = {}
    for number, reading in enumerate(readings):
        try:
            statements[number] = statement_of(reading, situation, rows)
        except LookupError as error:
            weighed[number] = Weighed(reading, False, str(error.args[0]))
    if not statements:
        return Evidence(tuple(weighed[n] for n in range(len(readings))), None)
    loadings = rows.loadings()
    wide = _runs_read_at_two_points(list(statements.values()), situation.assumptions)
    aside = _set_aside(statements, loadings, wide)
    kept = {number: one for number, one in statements.items() if number not in aside}
    for number, one in statements.items():
        spread = _spread(one, loadings, wide)
        far, why = aside.get(number, (None, "used"))
        value = one.read_db
        weighed[number] = Weighed(
            one.reading,
            number in kept,
            why,
            one.emission,
            one.predicted_db,
            value,
            spread,
            far if far is not None else _prior_surprise(one, loadings, wide),
            ()
            if number in kept
            else candidates(
                one.reading, one.vantage, one.emission, None if value is None else value - (one.predicted_db or 0.0)
            ),
        )
    if not kept:
        return Evidence(tuple(weighed[n] for n in range(len(readings))), None)
    posterior = condition(
        loadings,
        [site for one in kept.values() for site in one.sites],
        [one.joint for one in kept.values() if one.joint],
        wide,
        rows.names,
    )
    chains = {one.vantage.chain.name: one.vantage.chain for one in kept.values()}
    told = findings(posterior, list(chains.values()), situation.assumptions)
    return Evidence(tuple(weighed[n] for n in range(len(readings))), posterior, told)


# Which of them count


def _set_aside(
    statements: Mapping[int, Statement], loadings: Loadings, wide: Mapping[str, float]
) -> dict[int, tuple[float, str]]:
    """Readings that wait to be confirmed, with their surprise and the reason."""
    aside: dict[int, tuple[float, str]] = {}
    for number, one in statements.items():
        far = _prior_surprise(one, loadings, wide)
        if far > FAR_SD and not one.reading.confirmed:
            how = f"{far:.1f} standard deviations from" if one.read_db is not None else "all but impossible by"
            aside[number] = (far, f"{how} the prediction: not used until confirmed")
    prior = _covariance(loadings, wide)
    for _ in range(LARGEST_ROUNDS):
        sites = [(number, site) for number, one in statements.items() if number not in aside for site in one.sites]
        plain = [site for _, site in sites]
        if len(plain) < 2:
            break
        matched = match(prior, plain)
        worst: dict[int, float] = {}
        for s, (number, site) in enumerate(sites):
            if not statements[number].reading.confirmed:
                far = surprise(site, *without(matched, plain, s))
                worst[number] = max(worst.get(number, 0.0), far)
        wrong = sorted(
            (n for n in worst if worst[n] > FAR_SD), key=lambda n: (-round(worst[n], 1), _age(statements[n]))
        )
        if not wrong:
            break
        for number in wrong[: max(1, len(worst) // 50)]:
            aside[number] = (
                worst[number],
                f"contradicts the other readings by {worst[number]:.1f} standard deviations: not used until confirmed",
            )
    return aside


def _age(one: Statement) -> str:
    return one.reading.day.isoformat() if one.reading.day else ""


def _covariance(loadings: Loadings, wide: Mapping[str, float]) -> FloatArray:
    scaled = loadings.db * np.array([wide.get(key, 1.0) for key in loadings.keys])
    result: FloatArray = scaled @ scaled.T
    return result


def _prior_surprise(one: Statement, loadings: Loadings, wide: Mapping[str, float]) -> float:
    if one.joint:
        stand_in = one.joint.stand_in
        if stand_in is None:
            return 0.0
        return surprise(stand_in, 0.0, _variance(stand_in.row, loadings, wide))
    return max(surprise(site, 0.0, _variance(site.row, loadings, wide)) for site in one.sites)


def _spread(one: Statement, loadings: Loadings, wide: Mapping[str, float]) -> float | None:
    if one.read_db is None or not isinstance(one.sites[0], Plain):
        return None
    return float(np.hypot(np.sqrt(_variance(one.sites[0].row, loadings, wide)), one.sites[0].sd_db))


def _variance(row: int, loadings: Loadings, wide: Mapping[str, float]) -> float:
    sd = np.array([wide.get(key, 1.0) for key in loadings.keys])
    return float(((loadings.db[row] * sd) ** 2).sum())


def _runs_read_at_two_points(statements: Sequence[Statement], assumptions: Assumptions) -> dict[str, float]:
    """Feeder runs whose two ends were read of the same emission: their readings, not their kind, tell of them."""
    points: dict[tuple[str, str], set[bool]] = {}
    for one in statements:
        if one.emission and one.reading.kind == "level":
            run = "feeder:" + "+".join(one.vantage.chain.part_ids_of_feeders)
            points.setdefault((run, one.emission), set()).add(one.vantage.point == AT_THE_AERIAL)
    factor = assumptions.value("joint_fault_sd_db") / max(assumptions.value("feeder_sd_db"), 0.1)
    return {run: max(1.0, factor) for (run, _), found in points.items() if len(found) == 2}
