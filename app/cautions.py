"""What stands beside an answer: dangers of the work, what is missing, what was reckoned roughly."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from datetime import date

from app.air import SAME_MAST_KM, Air
from app.chain.parts import Chain
from app.climate import SEASON
from app.fields import EmissionField, Found
from app.mobile import MOBILE
from app.request import AssessRequest
from app.site import Site
from app.transmitters.model import Emission
from app.transmitters.store import Store

CAUTIONS = (
    "Roofs, ladders and masts can kill: never alone, never in wind, ice or thunder; "
    "local codes and licensed practice decide.",
    "Keep mast, aerial and ladder farther from overhead lines than they could fall.",
    "Earth the mast and bond the feeder's screen as the local code asks; an earthed mast is no lightning protection.",
    "An amplifier's supply is mains equipment: leave its circuit to a licensed person.",
    "A prediction is not a guarantee: it is a chance, and the roof has the last word.",
)
SHOWN_NAMES = 5


def cautions_at(
    request: AssessRequest, site: Site, store: Store, fields: Sequence[EmissionField], air: Air, chains: Sequence[Chain]
) -> list[str]:
    """What an answer must be read with, of this roof and request."""
    cautions = [*site.cautions, *([site.compass] if site.compass else [])]
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
    if any(
        field.path is not None and (field.path.sea_km > 0 or field.path.kind == "beyond the horizon")
        for field in fields
    ):
        cautions.append(SEASON)
    warm = [field for field in fields if field.path is not None and field.path.sea_km > 0 and field.sea_is_warm]
    if warm:
        cautions.append(
            f"The sea under {len(warm)} of the channels counts as warm for P.1546 (our choice by latitude and region)."
        )
    by_source: dict[str, list[EmissionField]] = {}
    for field in fields:
        by_source.setdefault(field.transmitter.source, []).append(field)
    twice = sorted(
        {
            pair
            for first, second in itertools.combinations(sorted(by_source), 2)
            for field in by_source[first]
            for pair in _same_emission(field, by_source[second])
        }
    )
    if twice:
        cautions.append(
            f"The same transmitter may be stored twice: {'; '.join(twice[:5])}. "
            "Take one import out with `gainworth transmitters remove SOURCE`."
        )
    cautions += air.company.cautions
    double = [chain.title or chain.name for chain in chains if len(chain.aerials) > 1]
    if double and air.company.pairs.disturber.size:
        cautions.append(
            f"Interference through {', '.join(double)} is reckoned with the pattern and pointing of the first aerial, "
            "also for what another aerial receives."
        )
    rough = sorted({one.transmitter.name for one in air.company.interferers if not one.over_ground})
    if rough:
        names = ", ".join(rough[:SHOWN_NAMES]) + (
            f" and {len(rough) - SHOWN_NAMES} more" if len(rough) > SHOWN_NAMES else ""
        )
        cautions.append(f"Interference from {names} is reckoned without the ground on its way.")
    return cautions


def off_air_notes(request: AssessRequest, store: Store, on_the_air: Sequence[Found], day: date) -> list[str]:
    """Say which channels in reach closed, or are not yet on the air, and so take no part.

    Nothing is said of one that another row of the same mast, multiplex and frequency has followed.
    """
    roof = request.roof
    present = {_slot(one) for one, *_ in on_the_air}
    found = [
        (emission, mast)
        for emission, mast, *_ in store.off_air_within(roof.latitude_deg, roof.longitude_deg, request.reach_km, day)
        if emission.system != MOBILE and _slot(emission) not in present
    ]
    if not found:
        return []
    names = store.multiplexes()
    told = []
    for emission, mast in found[:SHOWN_NAMES]:
        name = names[emission.multiplex_id].name if emission.multiplex_id in names else emission.multiplex_id
        closed = emission.valid_to is not None and emission.valid_to < day
        when = f"closed on {emission.valid_to}" if closed else f"not on the air before {emission.valid_from}"
        on = f"channel {emission.channel}" if emission.channel else f"{emission.frequency_mhz:g} MHz"
        told.append(f"{name} on {on} from {mast.name} ({when})")
    more = f" and {len(found) - SHOWN_NAMES} more" if len(found) > SHOWN_NAMES else ""
    return [f"Not on the air on {day} and left out: {', '.join(told)}{more}."]


def _slot(emission: Emission) -> tuple[str, str, float]:
    return emission.transmitter_id, emission.multiplex_id, emission.frequency_mhz


def _same_emission(field: EmissionField, fields: Sequence[EmissionField]) -> list[str]:
    """Emissions of sources later by name that are likely this one: same system, within 200 kHz and 1 km."""
    mine = field.emission
    return [
        f"{field.transmitter.name} in {field.transmitter.source} and "
        f"{other.transmitter.name} in {other.transmitter.source}"
        for other in fields
        if other.emission.system == mine.system
        and abs(other.emission.frequency_mhz - mine.frequency_mhz) <= 0.2
        and abs(other.distance_km - field.distance_km) <= SAME_MAST_KM
        and abs(other.transmitter.latitude_deg - field.transmitter.latitude_deg) * 111 <= SAME_MAST_KM
    ]
