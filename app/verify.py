"""Worked examples of the Recommendations through our own models."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from app.errors import RequestError
from app.worked_examples import RECOMMENDATIONS, ExampleSet, WorkedExample, packaged_sets, sets_in
from propagation import p1546, p1812
from propagation.errors import PropagationError
from propagation.p1546.path import path_inputs

TOLERANCE_DB = 1e-6  # for field and loss
DERIVED_RELATIVE = 1e-9  # inputs from a profile are published in full precision
PRINTED_DIGITS = {"p1546": 6, "p1812": 10}  # of intermediate values


@dataclass(frozen=True, slots=True)
class SetReport:
    """What one set of worked examples showed."""

    name: str
    recommendation: str
    cases: int
    failed: int
    largest_difference_db: float  # of field and loss over all cases
    values_compared: int  # derived inputs and intermediate values
    values_failed: int  # of these, not within their printed digits
    failures: tuple[str, ...]  # one line per failed case


@dataclass(frozen=True, slots=True)
class VerifyReport:
    """All sets."""

    sets: tuple[SetReport, ...]

    @property
    def failed(self) -> int:
        """Failed cases of all sets."""
        return sum(report.failed for report in self.sets)

    def text(self) -> str:
        """Return the report as lines for a person."""
        return "\n".join(line for report in self.sets for line in (_headline(report), *report.failures))

    def document(self) -> dict[str, Any]:
        """Return the report as the command line's JSON."""
        return {
            "sets": [
                {
                    "name": report.name,
                    "recommendation": report.recommendation,
                    "cases": report.cases,
                    "failed": report.failed,
                    "largest_difference_db": report.largest_difference_db,
                    "values_compared": report.values_compared,
                    "values_failed": report.values_failed,
                    "failures": list(report.failures),
                }
                for report in self.sets
            ]
        }


def verify(directory: Path | None = None) -> VerifyReport:
    """Replay worked examples: those of the package, or those of a folder.

    A case fails if field or loss is off by more than 1e-6 dB, or an intermediate value by more than half
    a unit of its last printed digit.

    Parameters
    ----------
    directory : Path, optional
        A folder with index.csv, cases/ and profiles/, or one that holds such folders.

    Raises
    ------
    RequestError
        A folder, case or profile that cannot be read or computed, naming it.
    """
    sets = packaged_sets() if directory is None else sets_in(directory)
    return VerifyReport(tuple(_replayed(examples) for examples in sets))


@dataclass(frozen=True, slots=True)
class _Outcome:
    largest_db: float
    compared: int
    wrong: tuple[str, ...]  # values beyond their digits
    failure: str | None


def _replayed(examples: ExampleSet) -> SetReport:
    outcomes = [_outcome(example) for example in examples.examples]
    failures = tuple(outcome.failure for outcome in outcomes if outcome.failure)
    return SetReport(
        name=examples.name,
        recommendation=RECOMMENDATIONS[examples.examples[0].method],
        cases=len(outcomes),
        failed=len(failures),
        largest_difference_db=max(outcome.largest_db for outcome in outcomes),
        values_compared=sum(outcome.compared for outcome in outcomes),
        values_failed=sum(len(outcome.wrong) for outcome in outcomes),
        failures=failures,
    )


def _outcome(example: WorkedExample) -> _Outcome:
    try:
        derived, result = _computed(example)
    except KeyError as error:
        raise RequestError(f"case {example.name} lacks the input {error}: add it") from error
    except (PropagationError, TypeError, ValueError) as error:
        raise RequestError(f"case {example.name} cannot be computed: {error}; mend its inputs or profile") from error

    wrong = [
        _difference(name, value, derived[name])
        for name, value in example.derived.items()
        if value is not None and not abs(derived[name] - value) <= DERIVED_RELATIVE * max(1.0, abs(value))
    ]
    for name, printed in example.steps.items():
        ours = _term(result, name, example)
        if printed is None:
            agrees = bool(np.isnan(ours))
        else:
            agrees = abs(ours - printed) <= half_of_last_digit(printed, PRINTED_DIGITS[example.method])
        if not agrees:
            wrong.append(_difference(name, printed, ours))

    off = {name: abs(_term(result, name, example) - value) for name, value in example.expected.items()}
    largest = max(off.values(), key=lambda db: np.inf if np.isnan(db) else db)
    beyond = [f"{name} off by {db:.3g} dB" for name, db in off.items() if not db <= TOLERANCE_DB]
    failure = f"{example.name}: {'; '.join([*beyond, *wrong])}" if beyond or wrong else None
    return _Outcome(largest, len(example.derived) + len(example.steps), tuple(wrong), failure)


def half_of_last_digit(printed: float, digits: int) -> float:
    """Half a unit of the last significant digit of a printed value, which may have lost zeros at its end.

    A value that shows more digits than its log usually prints is taken at its own digits.
    """
    mantissa, _, exponent = f"{printed:.16e}".partition("e")
    shown = len(repr(float(printed)).partition("e")[0].replace(".", "").replace("-", "").strip("0"))
    last = int(exponent) - max(digits, shown) + 1
    return 0.5 * 10.0**last * (1 + 1e-6) + 1e-12 if float(mantissa) else 1e-12


def _computed(
    example: WorkedExample,
) -> tuple[Mapping[str, Any], p1546.P1546Result | p1812.P1812Result]:
    profile, inputs = example.profile, example.inputs
    if example.method == "p1812":
        return {}, p1812.basic_loss(**profile, **inputs)
    environment = str(inputs["rx_environment"]).lower().replace(" ", "_")
    if not inputs.get("terrain_information", True):  # then the inputs are a planner's, not the profile's
        return example.derived, p1546.field_strength(**{**inputs, **example.derived, "rx_environment": environment})
    ground = path_inputs(
        profile["distance_km"],
        profile["terrain_amsl_m"],
        profile["zone"],
        inputs["tx_height_agl_m"],
        inputs["rx_height_agl_m"],
        coastal_land_is_sea=True,
    )
    warm_sea_km = example.derived.get("warm_sea_km") or 0.0  # a profile does not tell warm from cold
    derived = {
        "path_length_km": float(ground.path_length_km),
        "land_km": float(ground.land_km),
        "cold_sea_km": float(ground.sea_km) - warm_sea_km,
        "warm_sea_km": warm_sea_km,
        "h1_source_height_m": float(ground.h1_source_height_m),
        "tx_ground_amsl_m": float(ground.tx_ground_amsl_m),
        "rx_ground_amsl_m": float(ground.rx_ground_amsl_m),
        "tx_clearance_angle_deg": float(ground.tx_clearance_angle_deg),
        "rx_clearance_angle_deg": float(ground.rx_clearance_angle_deg),
    }
    return derived, p1546.field_strength(**{**inputs, **derived, "rx_environment": environment})


def _term(result: object, name: str, example: WorkedExample) -> float:
    value = getattr(result, name, None)
    if value is None:
        raise RequestError(f"case {example.name}: {name} is no term of {RECOMMENDATIONS[example.method]} here")
    return float(value)


def _headline(report: SetReport) -> str:
    return (
        f"{report.recommendation} ({report.name}): {report.cases} case{'s' * (report.cases != 1)}, "
        f"{report.failed or 'none'} failed; "
        f"largest difference in field and loss {report.largest_difference_db:.1e} dB; "
        f"{report.values_compared - report.values_failed} of {report.values_compared} other values "
        "within their printed digits"
    )


def _difference(name: str, printed: float | None, ours: float) -> str:
    return f"{name} is {ours:.10g}, published {'nothing' if printed is None else format(printed, '.10g')}"
