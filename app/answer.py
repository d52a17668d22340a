"""The answer as one document, the same for API and command line."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from typing import Any

import numpy as np

from app.assumptions import Assumptions
from app.chain.parts import Chain
from app.chance import GRADES, exceedance, grade
from app.declination import declination_at, declination_document
from app.evidence import Evidence
from app.fields import EmissionField
from app.link_budget import ledger_steps
from app.margins import Air, Turned
from app.reading_value import MeasureNext
from app.readings_document import readings_document
from app.request import AssessRequest
from app.site import Site
from app.sources import SOURCES
from app.transmitters.store import Store
from app.turning import turning_document
from app.verdict import HAVE, Outcome, Verdict

CAUTIONS = (
    "Roofs, ladders and masts can kill: never alone, never in wind, ice or thunder; "
    "local codes and licensed practice decide.",
    "Keep mast, aerial and ladder farther from overhead lines than they could fall.",
    "Earth the mast and bond the feeder's screen as the local code asks; an earthed mast is no lightning protection.",
    "An amplifier's supply is mains equipment: leave its circuit to a licensed person.",
    "A prediction is not a guarantee: it is a chance, and the roof has the last word.",
)
QUANTILE_95 = 1.6449  # of the standard normal
METHOD_SOURCES = {"p1812": "Rec. ITU-R P.1812-7, 50 % of time", "p1546": "Rec. ITU-R P.1546-6, 50 % of time"}
NOT_YET = (
    "Interference from other transmitters is not counted yet: a chance can be lower than shown.",
    "Overload by strong signals is not counted yet.",
)


def answer_document(
    request: AssessRequest,
    assumptions: Assumptions,
    site: Site,
    store: Store,
    fields: Sequence[EmissionField],
    air: Air,
    multiplexes: Sequence[str],
    chains: Sequence[Chain],
    turned: Mapping[str, Turned],
    outcomes: Mapping[str, Outcome],
    verdicts: Sequence[Verdict],
    evidence: Evidence,
) -> dict[str, Any]:
    """Return the document of the interface; figures that do not exist yet are null, with a caution."""
    names = {key: multiplex.name for key, multiplex in store.multiplexes().items()}
    place = {field.emission.id: e for e, field in enumerate(air.fields)}
    return {
        "roof": {
            "latitude_deg": request.roof.latitude_deg,
            "longitude_deg": request.roof.longitude_deg,
            "aerial_agl_m": request.roof.aerial_agl_m,
            "ground_amsl_m": round(site.ground_amsl_m, 2),
            "surroundings": request.roof.surroundings,
            "declination": declination_document(
                declination_at(
                    request.roof.latitude_deg, request.roof.longitude_deg, site.ground_amsl_m, date.today()
                )
            ),
        },
        "multiplexes": [
            {
                "id": name,
                "name": names.get(name, name),
                "emissions": [f.emission.id for f in fields if f.emission.multiplex_id == name],
                "chains": {key: _multiplex_cell(name, m, outcomes[key], turned[key], air) for key in turned},
            }
            for m, name in enumerate(multiplexes)
        ],
        "emissions": [_emission(request, field, fields, place, turned, air, assumptions) for field in fields],
        "chains": {
            chain.name: _chain(chain, turned.get(chain.name), outcomes.get(chain.name), air) for chain in chains
        },
        "verdicts": [_verdict(verdict) for verdict in verdicts],
        "readings": readings_document(evidence),
        "assumptions": assumptions.document(),
        "cautions": [*_cautions(request, site, store, fields), *NOT_YET, *CAUTIONS],
        "sources": [*SOURCES, *(_register(source) for source in store.sources())],
    }


def _multiplex_cell(name: str, m: int, outcome: Outcome, turned: Turned, air: Air) -> dict[str, Any]:
    owned = [e for e, owner in enumerate(air.multiplex_of) if owner == name]
    best = max(owned, key=lambda e: turned.chance[e])
    return {
        "chance": _probability(outcome.chance[m]),
        "grade": grade(outcome.chance[m]),
        "held_back_by": _limit(turned, best),
        "emission": air.fields[best].emission.id,
        "pointing_deg": turned.pointing_deg,
    }


def _emission(
    request: AssessRequest,
    field: EmissionField,
    fields: Sequence[EmissionField],
    place: Mapping[str, int],
    turned: Mapping[str, Turned],
    air: Air,
    assumptions: Assumptions,
) -> dict[str, Any]:
    emission, path = field.emission, field.path
    e = place.get(emission.id)
    return {
        "id": emission.id,
        "transmitter": field.transmitter.id,
        "transmitter_name": field.transmitter.name,
        "multiplex": emission.multiplex_id,
        "channel": emission.channel,
        "frequency_mhz": emission.frequency_mhz,
        "system": emission.system,
        "mode": emission.mode,
        "erp_kw": emission.erp_kw,
        "polarisation": emission.polarisation,
        "antenna_agl_m": emission.antenna_agl_m,
        "latitude_deg": field.transmitter.latitude_deg,
        "longitude_deg": field.transmitter.longitude_deg,
        "bearing_deg": round(field.bearing_deg, 2),
        "distance_km": round(field.distance_km, 3),
        "valid_to": emission.valid_to.isoformat() if emission.valid_to else None,
        "flags": list(emission.flags),
        "reason": field.reason,
        "cautions": _shared_channel(field, fields),
        "path": None
        if path is None
        else {
            "sentence": path.sentence,
            "line_of_sight": path.line_of_sight,
            "clearance_ratio": round(path.clearance_ratio, 3),
            "terrain_clearance_angle_deg": round(path.terrain_clearance_angle_deg, 4),
            "effective_height_m": round(path.effective_height_m, 1),
            "diffraction_loss_db": round(path.diffraction_loss_db, 2),
            "zones": {"land_km": round(path.land_km, 3), "sea_km": round(path.sea_km, 3)},
            "kind": path.kind,
            "ground_kinds": list(path.ground_kinds),
        },
        "field": {
            "free_space_dbuv_m": round(field.free_space_dbuv_m, 2),
            "p1546_dbuv_m": _rounded(field.p1546_dbuv_m),
            "p1812_dbuv_m": _rounded(field.p1812_dbuv_m),
            "used_dbuv_m": None if path is None else round(field.used_dbuv_m, 2),
            "difference_db": _rounded(field.difference_db),
            "apart": field.apart,
            "method": field.method,
            "method_reason": field.method_reason,
            "sigma_db": None if path is None else round(path.sd_db, 2),
            "fade_db": None if path is None else round(field.fade_db, 2),
            "enhancement_db": None if path is None else round(field.enhancement_db, 2),
        },
        "chains": {}
        if e is None
        else {name: _cell(request, one, e, field, air, assumptions) for name, one in turned.items()},
    }


def _cell(
    request: AssessRequest, turned: Turned, e: int, field: EmissionField, air: Air, assumptions: Assumptions
) -> dict[str, Any]:
    sigma_db = float(turned.cells.sigma_db[e])
    read_db = float(turned.cells.mean_db[e] - turned.cells.median_db[e])  # what readings moved it by
    limit = _limit(turned, e)
    told = request.ledgers is None or field.emission.id in request.ledgers
    before = _ledger_to_field(field, request.availability_percent) if told else []
    outlets = []
    for outlet, median in zip(turned.faded.outlets, turned.median.outlets, strict=True):
        margin_db = float(outlet.margin_db[e]) + read_db
        steps = ledger_steps(
            turned.chain,
            air.signals,
            e,
            field.used_dbuv_m - field.fade_db,
            turned.pointing_deg,
            turned.polarisation,
            assumptions,
            request.roof.surroundings,
            outlet.name,
        )
        outlets.append(
            {
                "name": outlet.name,
                "level_dbuv": round(float(outlet.level_dbuv[e]), 2),
                "level_median_dbuv": round(float(median.level_dbuv[e]), 2),
                "cn_db": round(float(outlet.cn_db[e]), 2),
                "required_cn_db": round(float(air.signals.required_cn_db[e]), 2),
                "margin_db": round(margin_db, 2),
                "headroom_db": None,
                "chance": _probability(float(exceedance(np.array(margin_db), np.array(sigma_db)))),
                "held_back_by": limit,
                "ledger": []
                if not told
                else [
                    *before,
                    *(
                        {
                            "step": step.step,
                            "value_db": round(step.value_db, 2),
                            "total": round(step.total, 2),
                            "source": step.source,
                            "state": "a",
                        }
                        for step in steps[1:]  # the first is the field, which the steps before end with
                    ),
                    *_ledger_of_readings(turned, read_db, margin_db),
                ],
            }
        )
    return {
        "margin_db": round(float(turned.faded.margin_db[e]) + read_db, 2),
        "margin_p05_db": round(float(turned.faded.margin_db[e]) + read_db - QUANTILE_95 * sigma_db, 2),
        "margin_p95_db": round(float(turned.faded.margin_db[e]) + read_db + QUANTILE_95 * sigma_db, 2),
        "sigma_db": round(sigma_db, 2),
        "chance": _probability(turned.chance[e]),
        "held_back_by": limit,
        "outlets": outlets,
    }


def _ledger_of_readings(turned: Turned, read_db: float, margin_db: float) -> list[dict[str, Any]]:
    """The step by which readings of this roof moved the margin; none without readings."""
    if turned.cells.known is None:
        return []
    return [
        {
            "step": "readings of this roof",
            "value_db": round(read_db, 2),
            "total": round(margin_db, 2),
            "source": "conditioning of the error model on the readings listed",
            "state": "a",
        }
    ]


def _ledger_to_field(field: EmissionField, availability_percent: int) -> list[dict[str, Any]]:
    """Steps from the radiated power to the field at the aerial, faded to the availability."""
    power_db = 10 * float(np.log10(field.erp_kw))
    total = power_db
    rows: list[dict[str, Any]] = []

    def add(step: str, value_db: float, source: str) -> None:
        nonlocal total
        total = value_db if not rows else total + value_db
        rows.append(
            {
                "step": step,
                "value_db": round(value_db, 2),
                "total": round(total, 2),
                "source": source,
                "state": "a",
            }
        )

    assert field.path is not None  # only emissions with an answer have a ledger
    add(
        f"radiated power towards the roof, {field.erp_kw:.3g} kW ERP",
        power_db,
        f"register: {field.transmitter.source}",
    )
    add(
        f"free space over {field.distance_km:.1f} km",
        field.free_space_dbuv_m - power_db,
        "Rec. ITU-R P.525, from 1 kW ERP to dB(µV/m)",
    )
    modelled = field.used_dbuv_m - field.doubt_db - field.free_space_dbuv_m
    add(f"ground and atmosphere: {field.path.kind}", modelled, _method_source(field))
    if field.doubt_db:
        add("power or pattern not stated by the register", field.doubt_db, "assumption erp_unknown_mean_db")
    add(
        f"fade that {availability_percent} % of the time stays above",
        -field.fade_db,
        f"{METHOD_SOURCES[str(field.method)]} and 1 %; assumptions least_fade_99_db, sea_fade_99_db, fade_share_90; "
        f"where this emission disturbs, it rises by {field.enhancement_db:.1f} dB instead",
    )
    return rows


def _method_source(field: EmissionField) -> str:
    """Name the method of a field, what the other one says, and why this one."""
    source = METHOD_SOURCES[str(field.method)]
    if field.difference_db is None:
        return f"{source}: {field.method_reason}"
    return (
        f"{source}; P.1812 {field.p1812_dbuv_m:.1f}, P.1546 {field.p1546_dbuv_m:.1f} dB(µV/m), "
        f"difference {field.difference_db:+.1f} dB"
    )


def _limit(turned: Turned, e: int) -> dict[str, Any]:
    return {"limit": turned.limit(e), "state": "a", "emission": None, "bearing_deg": None, "next_db": None}


def _chain(chain: Chain, turned: Turned | None, outcome: Outcome | None, air: Air) -> dict[str, Any]:
    chances = outcome.chance if outcome else np.zeros(0)
    counts: dict[str, int] = {word: sum(grade(one) == word for one in chances) for _, word in GRADES}
    return {
        "title": chain.title or chain.name,
        "price": chain.price,
        "currency": chain.currency,
        "pointings": [] if turned is None or outcome is None else [_pointing(turned, outcome, air)],
        "expected_count": round(float(chances.sum()), 3),
        **counts,
    }


def _pointing(turned: Turned, outcome: Outcome, air: Air) -> dict[str, Any]:
    multiplexes = sorted(set(air.multiplex_of))
    return {
        "pointing_deg": turned.pointing_deg,
        "polarisation": turned.polarisation,
        "multiplexes": [name for name, chance in zip(multiplexes, outcome.chance, strict=True) if chance >= HAVE],
        "expected_by_degree": [round(float(count), 3) for count in turned.sweep_count],
        **turning_document(turned, air, multiplexes),
    }


def _verdict(verdict: Verdict) -> dict[str, Any]:
    return {
        "baseline": verdict.baseline,
        "candidate": verdict.candidate,
        "answer": verdict.answer,
        "expected_worth": _rounded(verdict.expected_worth),
        "chance_of_gain": _probability(verdict.chance_of_gain),
        "expected_extra": round(verdict.expected_extra, 3),
        "expected_extra_error": round(verdict.expected_extra_error, 4),
        "price_difference": _rounded(verdict.price_difference),
        "price_per_extra": _rounded(verdict.price_per_extra),
        "break_even_price": round(verdict.break_even_price, 2),
        "gained": list(verdict.gained),
        "lost": list(verdict.lost),
        "now_secure": list(verdict.now_secure),
        "cheapest_equal": verdict.cheapest_equal,
        "measure_next": None if verdict.measure_next is None else _measure_next(verdict.measure_next),
        "wanted": list(verdict.wanted),
        "reason": verdict.reason,
    }


def _measure_next(one: MeasureNext) -> dict[str, Any]:
    return {
        "emission": one.emission,
        "bearing_deg": round(one.bearing_deg, 2),
        "value": round(one.value, 2),
        "expected_dbuv": round(one.expected_dbuv, 1),
        "tipping": [
            {"from_dbuv": part.from_dbuv, "to_dbuv": part.to_dbuv, "answer": part.answer, "why": part.why}
            for part in one.tipping
        ],
    }


def _cautions(request: AssessRequest, site: Site, store: Store, fields: Sequence[EmissionField]) -> list[str]:
    cautions = list(site.cautions)
    if not fields:
        nearest = store.nearest_transmitter(request.roof.latitude_deg, request.roof.longitude_deg)
        cautions.append(
            f"Nothing is on the air within {request.reach_km:g} km: "
            + (
                f"the nearest transmitter is {nearest[0].name}, {nearest[1]:.0f} km away."
                if nearest
                else "no transmitter is stored; import some first."
            )
        )
    without = sorted({field.transmitter.name for field in fields if field.path is None})
    if without:
        cautions.append(
            f"No prediction for {', '.join(without)}: see the reason beside each channel; "
            "they take no part in the verdict."
        )
    shared = [field for field in fields if _shared_channel(field, fields)]
    if shared:
        channels = ", ".join(
            sorted({field.emission.channel or f"{field.emission.frequency_mhz:g} MHz" for field in shared})
        )
        cautions.append(
            f"More than one transmitter in reach uses channel {channels}: interference between them is not yet counted."
        )
    return cautions


def _shared_channel(field: EmissionField, fields: Sequence[EmissionField]) -> list[str]:
    """Other multiplexes on an overlapping channel, which will disturb this one."""
    mine = field.emission
    return [
        f"{other.transmitter.name} at {other.bearing_deg:.0f}° uses this channel too: interference not yet counted"
        for other in fields
        if other.emission.multiplex_id != mine.multiplex_id
        and abs(other.emission.frequency_mhz - mine.frequency_mhz)
        < (other.emission.bandwidth_mhz + mine.bandwidth_mhz) / 2 - 1e-6
    ]


def _register(source: Any) -> dict[str, str]:
    return {"id": source.id, "title": source.name, "document": source.attribution, "licence": source.licence}


def _probability(value: float) -> float:
    return round(float(np.clip(value, 0, 1)), 4)


def _rounded(value: float | None) -> float | None:
    return None if value is None else round(value, 2)
