"""The answer as one document, the same for API and command line."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from typing import Any

import numpy as np

from app.air import Air
from app.answer_cells import cells_of, ledger_of_readings, probability
from app.assumptions import Assumptions
from app.bill import bill_document
from app.cautions import CAUTIONS, SHOWN_NAMES, cautions_at
from app.chain.parts import Chain
from app.chance import GRADES, grade, rows_of
from app.declination import compass_document
from app.evidence import Evidence
from app.fields import EmissionField
from app.interference import SPECTRAL
from app.ledger import Books, books_of, ledger, to_the_field
from app.margins import Turned
from app.reading_value import MeasureNext
from app.readings_document import readings_document
from app.request import AssessRequest
from app.site import Site
from app.sources import SOURCES
from app.transmitters.store import Store
from app.turning import turning_document
from app.verdict import HAVE, Outcome, Verdict


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
    rows = rows_of(air.multiplex_of)
    ids: dict[str, list[str]] = {}
    for field in fields:
        ids.setdefault(field.emission.multiplex_id, []).append(field.emission.id)
    place = {field.emission.id: e for e, field in enumerate(air.fields)}
    cells = {key: cells_of(one, air) for key, one in turned.items()}
    with_ledgers = request.ledgers is None or len(request.ledgers) > 0
    books = {key: books_of(one, air, request, assumptions) for key, one in turned.items() if with_ledgers}
    return {
        "roof": {
            "latitude_deg": request.roof.latitude_deg,
            "longitude_deg": request.roof.longitude_deg,
            "aerial_agl_m": request.roof.aerial_agl_m,
            "ground_amsl_m": round(site.ground_amsl_m, 2),
            "surroundings": request.roof.surroundings,
            "leaves_m": request.roof.leaves_m,
            "compass": site.compass,
            "declination": compass_document(
                request.roof.latitude_deg, request.roof.longitude_deg, date.today(), site.ground_amsl_m
            ),
        },
        "multiplexes": [
            {
                "id": name,
                "name": names.get(name, name),
                "emissions": ids[name],
                "chains": {
                    key: _multiplex_cell(rows[name], m, outcomes[key], one, cells[key], air)
                    for key, one in turned.items()
                },
            }
            for m, name in enumerate(multiplexes)
        ],
        "emissions": [_emission(request, field, place, turned, cells, air, books) for field in fields],
        "chains": {
            chain.name: _chain(chain, turned.get(chain.name), outcomes.get(chain.name), air) for chain in chains
        },
        "verdicts": [_verdict(verdict) for verdict in verdicts],
        "readings": readings_document(evidence),
        "assumptions": assumptions.document(),
        "cautions": [*cautions_at(request, site, store, fields, air, chains), *CAUTIONS],
        "sources": [*SOURCES, *(_register(source) for source in store.sources())],
    }


def _multiplex_cell(
    rows: Sequence[int], m: int, outcome: Outcome, turned: Turned, cells: Sequence[dict[str, Any]], air: Air
) -> dict[str, Any]:
    best = max(rows, key=lambda e: turned.chance[e])
    chance = probability(outcome.chance[m])
    return {
        "chance": chance,
        "grade": grade(chance),  # of the figure that is shown
        "held_back_by": cells[best]["held_back_by"],
        "emission": air.fields[best].emission.id,
        "pointing_deg": turned.pointing_deg,
    }


def _emission(
    request: AssessRequest,
    field: EmissionField,
    place: Mapping[str, int],
    turned: Mapping[str, Turned],
    cells: Mapping[str, Sequence[dict[str, Any]]],
    air: Air,
    books: Mapping[str, Books],
) -> dict[str, Any]:
    emission, path = field.emission, field.path
    e = place.get(emission.id)
    chains = {} if e is None else {name: cells[name][e] for name in turned}
    if e is not None and (request.ledgers is None or emission.id in request.ledgers):
        before = to_the_field(field, request.availability_percent)
        for name, cell in chains.items():
            for outlet in cell["outlets"]:
                outlet["ledger"] = ledger(turned[name], e, field, air, books[name], outlet["name"], before)
                outlet["ledger"] += ledger_of_readings(turned[name], e, outlet["margin_db"])
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
        "cautions": [] if e is None else _disturbed_by(e, air),
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
        "chains": chains,
    }


def _chain(chain: Chain, turned: Turned | None, outcome: Outcome | None, air: Air) -> dict[str, Any]:
    chances = outcome.chance if outcome else np.zeros(0)
    counts: dict[str, int] = {word: sum(grade(probability(one)) == word for one in chances) for _, word in GRADES}
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
        "chance_of_gain": probability(verdict.chance_of_gain),
        "expected_extra": round(verdict.expected_extra, 3),
        "expected_extra_error": round(verdict.expected_extra_error, 4),
        "price_difference": _rounded(verdict.price_difference),
        "bill": bill_document(verdict.bill),
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
        "through": one.through,
        "point": one.point,
        "tipping": [
            {"from_dbuv": part.from_dbuv, "to_dbuv": part.to_dbuv, "answer": part.answer, "why": part.why}
            for part in one.tipping
        ],
    }


def _disturbed_by(e: int, air: Air) -> list[str]:
    """Other masts on the same or an overlapping channel."""
    pairs = air.company.pairs
    ones = [air.company.interferers[pairs.disturber[k]] for k in pairs.of_wanted(e) if pairs.rule[k] == SPECTRAL]
    return [f"{one.transmitter.name} at {one.bearing_deg:.0f}° uses this channel too" for one in ones[:SHOWN_NAMES]]


def _register(source: Any) -> dict[str, str]:
    return {"id": source.id, "title": source.name, "document": source.attribution, "licence": source.licence}


def _rounded(value: float | None) -> float | None:
    return None if value is None else round(value, 2)
