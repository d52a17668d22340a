"""What the wind does to a mast with aerials: load, bending moment at the upper clamp, forces on the brackets.

Loads are static, by IEC 60728-11, section 12, from memory: W = c q A with c = 1.2. Ice is not in them; it can
double an area. A number here never replaces the local code or someone who may sign for it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from app.errors import ChainError
from app.tables import rows

CAUTION = (
    "Local building codes and a qualified person decide whether a mast, its brackets and the wall hold. These figures "
    "leave out ice, gusts at corners and ridges, age and rust. Never mount in wind, and stay clear of overhead lines."
)
DRAG = 1.2  # of the area that a catalogue states, IEC 60728-11, section 12 (MH)
LOW_PRESSURE_N_M2, HIGH_PRESSURE_N_M2 = 800.0, 1100.0  # some 130 and 150 km/h, IEC 60728-11, section 12 (MH)
LOW_UP_TO_M = 20.0  # height above the ground up to which the lower pressure holds
LONGEST_FREE_M, LARGEST_MOMENT_N_M = 6.0, 1650.0  # beyond either a structural proof is asked, IEC 60728-11 (MH)
LEAST_CLAMPED_SHARE = 1 / 6  # of the whole mast, IEC 60728-11 (MH)
STEEL_N_MM2 = 155.0  # permissible stress of plain structural steel, yield 235 over 1.5 and rounded down


@dataclass(frozen=True, slots=True)
class WindClass:
    """Typical wind load of a class of aerials at 800 N/m², where the maker states none."""

    id: str
    name: str
    lowest_n: float
    highest_n: float
    flag: str
    source: str


WIND_CLASSES: dict[str, WindClass] = {
    row["id"]: WindClass(
        row["id"], row["name"], float(row["lowest_n"]), float(row["highest_n"]), row["flag"], row["source"]
    )
    for row in rows("wind_loads")
}


@dataclass(frozen=True, slots=True)
class Mounted:
    """One aerial on the mast."""

    name: str
    wind_area_m2: float
    above_clamp_m: float  # of its centre over the upper clamp

    def __post_init__(self) -> None:
        """Refuse an aerial that no mast carries."""
        _within(f'aerial "{self.name}"', "wind_area_m2", self.wind_area_m2, 0, 10, "m²")
        _within(f'aerial "{self.name}"', "above_clamp_m", self.above_clamp_m, 0, 20, "m over the upper clamp")


@dataclass(frozen=True, slots=True)
class Mast:
    """A round tube held by two brackets."""

    diameter_mm: float  # outer
    wall_mm: float
    free_m: float  # from the upper clamp to the top
    clamped_m: float  # between the two clamps
    permissible_n_mm2: float = STEEL_N_MM2
    bracket_n: float | None = None  # what its maker lets one bracket carry; None: not stated

    def __post_init__(self) -> None:
        """Refuse a tube that is none."""
        _within("mast", "diameter_mm", self.diameter_mm, 10, 200, "mm")
        _within("mast", "wall_mm", self.wall_mm, 0.5, self.diameter_mm / 2, "mm")
        _within("mast", "free_m", self.free_m, 0, 20, "m")
        _within("mast", "clamped_m", self.clamped_m, 0.1, 10, "m between the clamps")
        _within("mast", "permissible_n_mm2", self.permissible_n_mm2, 10, 1000, "N/mm²")
        if self.bracket_n is not None:
            _within("mast", "bracket_n", self.bracket_n, 1, 1e6, "N")


@dataclass(frozen=True, slots=True)
class WindCheck:
    """Loads and moments of a mast in the wind; `findings` is empty where all limits hold."""

    pressure_n_m2: float
    loads_n: tuple[float, ...]  # of each aerial
    mast_load_n: float  # of the tube itself
    moment_n_m: float  # at the upper clamp
    section_modulus_cm3: float
    tube_moment_n_m: float  # what the tube bears
    upper_bracket_n: float
    lower_bracket_n: float
    findings: tuple[str, ...]  # each with what to do
    caution: str = CAUTION


def wind_pressure_n_m2(height_agl_m: float) -> float:
    """Wind pressure for a mast whose top is so high above the ground; IEC 60728-11, section 12."""
    return LOW_PRESSURE_N_M2 if height_agl_m <= LOW_UP_TO_M else HIGH_PRESSURE_N_M2


def wind_load_n(area_m2: float, pressure_n_m2: float) -> float:
    """W = c q A; IEC 60728-11, section 12."""
    return DRAG * pressure_n_m2 * area_m2


def area_from_load_m2(load_n: float, pressure_n_m2: float = LOW_PRESSURE_N_M2) -> float:
    """Wind area of an aerial whose catalogue states its load [N], usually at 800 N/m²."""
    return load_n / (DRAG * pressure_n_m2)


def section_modulus_cm3(diameter_mm: float, wall_mm: float) -> float:
    """Section modulus of a round tube, π (D⁴ − d⁴) / (32 D)."""
    inner = diameter_mm - 2 * wall_mm
    return math.pi * (diameter_mm**4 - inner**4) / (32 * diameter_mm) / 1000


def check_mast(mast: Mast, aerials: Sequence[Mounted], top_agl_m: float) -> WindCheck:
    """Return loads, moment and bracket forces of a mast, and what of it goes beyond a limit.

    The moment counts about the upper clamp, the tube with half its free length as lever. The brackets carry it as a
    couple: the lower one M / s, the upper one the whole load and M / s, with s between the clamps.

    Raises
    ------
    ChainError
        An aerial above the top of the mast, or a height that is none.
    """
    _within("mast", "top_agl_m", top_agl_m, 0, 300, "m above the ground")
    for aerial in aerials:
        if aerial.above_clamp_m > mast.free_m:
            raise ChainError(
                f'aerial "{aerial.name}": {aerial.above_clamp_m:g} m over the clamp is above the mast of '
                f"{mast.free_m:g} m: lower it or take a longer mast",
                field="above_clamp_m",
            )
    pressure = wind_pressure_n_m2(top_agl_m)
    loads = tuple(wind_load_n(aerial.wind_area_m2, pressure) for aerial in aerials)
    mast_load = wind_load_n(mast.diameter_mm / 1000 * mast.free_m, pressure)
    levers = [aerial.above_clamp_m for aerial in aerials]
    moment = sum(load * lever for load, lever in zip(loads, levers, strict=True)) + mast_load * mast.free_m / 2
    modulus = section_modulus_cm3(mast.diameter_mm, mast.wall_mm)
    lower = moment / mast.clamped_m
    check = WindCheck(
        pressure_n_m2=pressure,
        loads_n=loads,
        mast_load_n=mast_load,
        moment_n_m=moment,
        section_modulus_cm3=modulus,
        tube_moment_n_m=modulus * mast.permissible_n_mm2,  # cm³ · N/mm² = N m
        upper_bracket_n=sum(loads) + mast_load + lower,
        lower_bracket_n=lower,
        findings=(),
    )
    return replace(check, findings=tuple(_findings(mast, check)))


def _findings(mast: Mast, check: WindCheck) -> list[str]:
    found = []
    if check.moment_n_m > check.tube_moment_n_m:
        found.append(
            f"the tube bears {check.tube_moment_n_m:.0f} N·m, the wind bends it with {check.moment_n_m:.0f} N·m: "
            "take a stronger tube, mount lower or take a smaller aerial"
        )
    if check.moment_n_m > LARGEST_MOMENT_N_M:
        found.append(
            f"the moment of {check.moment_n_m:.0f} N·m is above {LARGEST_MOMENT_N_M:g} N·m: "
            "have the structure proved by an engineer"
        )
    if mast.free_m > LONGEST_FREE_M:
        found.append(
            f"{mast.free_m:g} m of free mast are above {LONGEST_FREE_M:g} m: shorten or guy it, or have it proved"
        )
    least_m = mast.free_m * LEAST_CLAMPED_SHARE / (1 - LEAST_CLAMPED_SHARE)
    if mast.clamped_m < least_m:
        found.append(
            f"{mast.clamped_m:g} m between the clamps are less than a sixth of the mast: set them {least_m:.2f} m apart"
        )
    if mast.bracket_n is not None and check.upper_bracket_n > mast.bracket_n:
        found.append(
            f"the upper bracket takes {check.upper_bracket_n:.0f} N, its maker allows {mast.bracket_n:g} N: "
            "set the brackets further apart or take stronger ones"
        )
    return found


def _within(what: str, key: str, value: float, lowest: float, highest: float, unit: str) -> None:
    if not (math.isfinite(value) and lowest <= value <= highest):
        raise ChainError(
            f"{what}: {key} {value:g} is not possible: use {lowest:g} to {highest:g} {unit}",
            field=key,
            allowed=f"{lowest:g} to {highest:g}",
        )
