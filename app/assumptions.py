"""Every value we chose ourselves, with the reason; shown to the user and changeable per request."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from app.errors import RequestError


@dataclass(frozen=True, slots=True)
class Assumption:
    """One value of ours."""

    id: str
    value: float
    unit: str
    lowest: float
    highest: float
    reason: str
    source: str  # published figure beside it, or "our choice"


def _table(*rows: Assumption) -> dict[str, Assumption]:
    return {row.id: row for row in rows}


OURS = "our choice, not measured by us"

MEASURED = (
    "our choice; published errors of such predictions at roof height, from memory: mean within 3 dB, "
    "standard deviation 6 to 9 dB at best"
)

ASSUMPTIONS: dict[str, Assumption] = _table(
    # round the roof
    Assumption(
        "cover_suburban_m",
        10.0,
        "m",
        0,
        60,
        "houses; counts only where above the aerial",
        "Rec. ITU-R P.1812, usual clutter heights, from memory",
    ),
    Assumption(
        "cover_urban_m",
        15.0,
        "m",
        0,
        60,
        "town houses; counts only where above the aerial",
        "Rec. ITU-R P.1812, usual clutter heights, from memory",
    ),
    Assumption(
        "cover_trees_m",
        15.0,
        "m",
        0,
        60,
        "trees; counts only where above the aerial",
        "Rec. ITU-R P.1812, usual clutter heights, from memory",
    ),
    # the receiving chain
    Assumption(
        "reserve_db",
        3.0,
        "dB",
        0,
        20,
        "ageing, weather and leaves between two visits",
        "common practice, no source",
    ),
    Assumption(
        "set_most_total_dbuv",
        100.75,
        "dB(µV)",
        60,
        130,
        "all signals together at the set, −8 dBm; above it the set's input is overloaded",
        "ATSC A/74, several strong signals, from memory",
    ),
    Assumption(
        "mobile_600_dbuv_m", 0.0, "dB(µV/m)", 0, 150, "field of mobile downlinks at 617 to 652 MHz; 0: none", OURS
    ),
    Assumption(
        "mobile_700_dbuv_m", 0.0, "dB(µV/m)", 0, 150, "field of mobile downlinks at 758 to 788 MHz; 0: none", OURS
    ),
    Assumption(
        "mobile_800_dbuv_m", 0.0, "dB(µV/m)", 0, 150, "field of mobile downlinks at 791 to 821 MHz; 0: none", OURS
    ),
    # errors, one normal each (standard deviations)
    Assumption("roof_sd_db", 2.0, "dB", 0, 15, "what one roof does to all signals alike", OURS),
    Assumption("path_clear_sd_db", 3.0, "dB", 0, 20, "clear by 0.6 of the first Fresnel zone or more", MEASURED),
    Assumption("path_grazing_sd_db", 5.0, "dB", 0, 20, "ray touching the ground", MEASURED),
    Assumption("path_obstructed_sd_db", 7.0, "dB", 0, 20, "ground one Fresnel radius into the line", MEASURED),
    Assumption("path_beyond_horizon_sd_db", 8.0, "dB", 0, 20, "beyond the horizon of the smooth Earth", MEASURED),
    Assumption(
        "path_bearing_correlation",
        0.5,
        "-",
        0,
        0.95,
        "share of the path error that neighbouring bearings have in common",
        OURS,
    ),
    Assumption(
        "path_bearing_scale_deg",
        20.0,
        "deg",
        1,
        180,
        "difference of bearing over which that share fades by e",
        OURS,
    ),
    Assumption("single_method_factor", 1.4, "-", 1, 3, "path error where only P.1546 answers", OURS),
    Assumption("disagreement_free_db", 6.0, "dB", 0, 30, "difference between the methods that adds no doubt", OURS),
    Assumption("disagreement_sd_max_db", 6.0, "dB", 0, 20, "most that a difference between the methods adds", OURS),
    Assumption("band_sd_db", 2.0, "dB", 0, 15, "one mast and band", OURS),
    Assumption("emission_sd_db", 2.5, "dB", 0, 15, "one channel", OURS),
    Assumption("fade_sd_share", 0.4, "-", 0, 1, "spread of the fade as a share of it", OURS),
    Assumption("aerial_gain_sd_db", 1.5, "dB", 0, 10, "catalogue gain and pointing", "common practice, no source"),
    Assumption("aerial_own_build_sd_db", 4.0, "dB", 0, 15, "own build without a measured gain", OURS),
    Assumption("off_axis_sd_db", 3.0, "dB", 0, 15, "gain beyond half the beamwidth", OURS),
    Assumption("cross_polar_sd_db", 4.0, "dB", 0, 15, "response to the other polarisation", OURS),
    Assumption("feeder_sd_db", 1.0, "dB", 0, 10, "feeder and joints", OURS),
    Assumption("erp_unknown_sd_db", 4.0, "dB", 0, 15, "power or pattern not stated by the register", OURS),
    Assumption("erp_unknown_mean_db", -3.0, "dB", -20, 0, "wanted power where only the maximum is stated", OURS),
    # readings
    Assumption("position_sd_db", 1.5, "dB", 0, 10, "field a step away from where the aerial stands", OURS),
    Assumption("sensitivity_sd_db", 1.5, "dB", 0, 10, "a set against the C/N its mode is planned with", OURS),
    Assumption(
        "breaks_up_db", 1.5, "dB", 0.2, 10, "breaking up: within so much of what the mode needs; perfect: above", OURS
    ),
    Assumption("seen_softness_db", 1.0, "dB", 0.1, 10, "words such as perfect mean more to one than to another", OURS),
    Assumption("count_sd", 0.7, "multiplexes", 0.1, 5, "people count programmes, or forget one", OURS),
    Assumption("order_softness_db", 3.0, "dB", 0.1, 20, "bars and per cent of a set, compared within a list", OURS),
    Assumption("order_wrong_share", 0.1, "-", 0, 0.5, "pairs of a set's list that stand in the wrong order", OURS),
    Assumption("neighbour_softness_db", 6.0, "dB", 0.1, 20, "another roof, another aerial, seen from below", OURS),
    Assumption(
        "neighbour_wrong_share", 0.3, "-", 0, 0.5, "an aerial up there may be unused or feed something else", OURS
    ),
    Assumption("other_height_sd_db", 2.0, "dB", 0, 10, "a reading at another height than the aerial's", OURS),
    Assumption("joint_fault_sd_db", 6.0, "dB", 1, 20, "a run read at two of its points, whatever its state", OURS),
    # the loft and the cross-polar answer
    Assumption(
        "loft_covering_db",
        5.0,
        "dB",
        0,
        40,
        "dry tile or slate over the aerial; foil and metal lose far more",
        "common practice, no source",
    ),
    Assumption(
        "cross_polar_db",
        16.0,
        "dB",
        0,
        40,
        "aerial and emission of different polarisation",
        "Rec. ITU-R BT.419-3 Note 3, from memory",
    ),
    # the aerial beyond its table and in its nulls
    Assumption(
        "aerial_out_of_range_db_per_octave",
        40.0,
        "dB",
        0,
        200,
        "gain beyond the frequencies of the aerial's table falls from its end",
        OURS,
    ),
    Assumption("dipole_null_db", 20.0, "dB", 3, 60, "deepest null of a dipole among roofs: reflections fill it", OURS),
    # fade
    Assumption("least_fade_99_db", 1.5, "dB", 0, 10, "every path fades a little", OURS),
    Assumption("sea_fade_99_db", 3.0, "dB", 0, 20, "line of sight over more than 20 km of sea: reflections", OURS),
    Assumption(
        "fade_share_90",
        0.55,
        "-",
        0,
        1,
        "fade to 90 % as a share of that to 99 %",
        "ratio of the normal quantiles 1.28 / 2.33",
    ),
    # single-frequency networks and interferers
    Assumption(
        "sfn_window",
        1.0,
        "-",
        1,
        2,
        "receiver's window: 1 starts at the first signal above the threshold, 2 at the strongest",
        "EBU Tech 3348 and BPN 066, from memory",
    ),
    Assumption(
        "sfn_threshold_db",
        10.0,
        "dB",
        3,
        25,
        "how far below the strongest a first signal may be to start the window",
        "EBU Tech 3348: 10 to 15 dB, from memory",
    ),
    Assumption(
        "sfn_echo_range_db",
        10.0,
        "dB",
        1,
        30,
        "difference of echo and signal over which the rise of the required C/N for equal ones fades",
        OURS,
    ),
    Assumption("enhancement_sd_share", 0.4, "-", 0, 1, "spread of an interferer's rise as a share of it", OURS),
    # the decision
    Assumption(
        "worth_per_multiplex",
        50.0,
        "currency",
        0,
        1e6,
        "what one more wanted multiplex is worth",
        "yours to set",
    ),
    Assumption("reading_cost", 10.0, "currency", 0, 1e6, "what taking a reading costs", "yours to set"),
)


class Assumptions:
    """The values of one request: defaults with the changes that came with it."""

    def __init__(self, changes: Mapping[str, float] | None = None) -> None:
        """Take changes by id; unknown ids and impossible values are refused."""
        self.changes: dict[str, float] = {}
        for key, value in (changes or {}).items():
            known = ASSUMPTIONS.get(key)
            if known is None:
                raise RequestError(
                    f'assumption "{key}" is not known: use one of {", ".join(ASSUMPTIONS)}',
                    field=f"assumptions.{key}",
                    allowed=", ".join(ASSUMPTIONS),
                )
            if not (math.isfinite(value) and known.lowest <= value <= known.highest):
                raise RequestError(
                    f"assumption {key} is {value:g}: use {known.lowest:g} to {known.highest:g} {known.unit}",
                    field=f"assumptions.{key}",
                    allowed=f"{known.lowest:g} to {known.highest:g}",
                )
            self.changes[key] = float(value)

    def value(self, key: str) -> float:
        """Value in force for one assumption."""
        return self.changes.get(key, ASSUMPTIONS[key].value)

    def document(self) -> list[dict[str, object]]:
        """Return every assumption with the value in force, for the answer and the page."""
        return [
            {
                "id": row.id,
                "value": self.value(row.id),
                "default": row.value,
                "unit": row.unit,
                "lowest": row.lowest,
                "highest": row.highest,
                "reason": row.reason,
                "source": row.source,
            }
            for row in ASSUMPTIONS.values()
        ]
