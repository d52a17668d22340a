"""Published worked examples as one kind of object, from the package or from a folder."""

from __future__ import annotations

import csv
import json
import math
from collections.abc import Mapping
from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from app.errors import RequestError

FloatArray = NDArray[np.float64]
Method = Literal["p1546", "p1812"]

RECOMMENDATIONS: dict[Method, str] = {"p1546": "ITU-R P.1546-6", "p1812": "ITU-R P.1812"}
LAYOUT = "index.csv, cases/NAME.json and profiles/NAME.csv"

# A folder's names for a quantity, and ours.
_RENAMED = (
    ("_m_agl", "_agl_m"),
    ("_m_amsl", "_amsl_m"),
    ("_lat_", "_latitude_"),
    ("_lon_", "_longitude_"),
    ("basic_transmission_loss", "basic_loss"),
)


@dataclass(frozen=True, slots=True)
class WorkedExample:
    """One published case, transmitter first, quantities by our names."""

    name: str
    method: Method
    profile: Mapping[str, FloatArray]  # distance_km, terrain_amsl_m, clutter_height_m, zone; each (n,)
    inputs: Mapping[str, Any]
    derived: Mapping[str, float | None]  # inputs that come from the profile, full precision; None: not known
    steps: Mapping[str, float | None]  # as printed; None where a step does not apply
    expected: Mapping[str, float]  # field_dbuv_m, field_1kw_dbuv_m, basic_loss_db


@dataclass(frozen=True, slots=True)
class ExampleSet:
    """Worked examples of one folder or method."""

    name: str
    examples: tuple[WorkedExample, ...]


def packaged_sets() -> list[ExampleSet]:
    """Both sets that the package carries."""
    folder = files("propagation").joinpath("data/examples")
    stored = json.loads(folder.joinpath("profiles.json").read_text(encoding="utf-8"))
    columns = {key: _unrolled(column) for key, column in stored["columns"].items()}
    sets = []
    for method in RECOMMENDATIONS:
        rows = csv.DictReader(folder.joinpath(f"{method}.csv").read_text(encoding="utf-8").splitlines())
        examples = []
        for row in rows:
            profile = {name: columns[key] for name, key in stored["profiles"][row["profile"]].items()}
            groups: dict[str, dict[str, Any]] = {"input": {}, "derived": {}, "step": {}, "expected": {}}
            for key, cell in row.items():
                group, _, name = key.partition(".")
                if name:
                    groups[group][name] = _value(cell)
            examples.append(
                _example(
                    row["case"],
                    method,
                    profile,
                    row["profile_first_point"] == "rx",
                    groups["input"],
                    groups["derived"],
                    groups["step"],
                    groups["expected"],
                )
            )
        sets.append(ExampleSet(method, tuple(examples)))
    return sets


def sets_in(directory: Path) -> list[ExampleSet]:
    """Read the folder, or each folder in it, that holds worked examples (RequestError says what is wrong)."""
    if not directory.is_dir():
        raise RequestError(f"{directory} is no folder: give one that holds {LAYOUT}", field="directory")
    if (directory / "index.csv").is_file():
        return [_set_in(directory)]
    inner = [path for path in sorted(directory.iterdir()) if (path / "index.csv").is_file()]
    if not inner:
        raise RequestError(
            f"{directory} holds no worked examples: give a folder with {LAYOUT}, or the one above such",
            field="directory",
        )
    return [_set_in(path) for path in inner]


def _set_in(folder: Path) -> ExampleSet:
    try:
        with (folder / "index.csv").open(encoding="utf-8-sig", newline="") as file:
            listed = [row.get("case") or "" for row in csv.DictReader(file)]
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise RequestError(f"{folder / 'index.csv'} cannot be read ({error}): mend or replace it") from error
    present = {path.stem for path in (folder / "cases").glob("*.json")}
    missing = [name for name in listed if name not in present]
    unlisted = sorted(present - set(listed))
    if not listed or missing or unlisted:
        raise RequestError(
            f"{folder / 'index.csv'} lists {len(listed)} cases, {folder / 'cases'} holds {len(present)}"
            + (f"; missing there: {', '.join(name or '(no name)' for name in missing[:5])}" if missing else "")
            + (f"; not in the list: {', '.join(unlisted[:5])}" if unlisted else "")
            + ": make both agree, one cases/NAME.json for each line of the list"
        )
    profiles: dict[str, dict[str, FloatArray]] = {}
    return ExampleSet(folder.resolve().name, tuple(_case(folder, name, profiles) for name in listed))


def _case(folder: Path, name: str, profiles: dict[str, dict[str, FloatArray]]) -> WorkedExample:
    path = folder / "cases" / f"{name}.json"
    try:
        case = json.loads(path.read_text(encoding="utf-8"))
        method = _method(case["recommendation"])
        profile = case["profile"]
        if profile not in profiles:
            profiles[profile] = _profile(folder / profile)
        derived = dict(case.get("derived_inputs", {}))
        steps = _ours(case["intermediate"])
        derived.pop("h1_source", None)  # says in words which mean the height is over
        if "h1_m_logged" in derived:
            steps["h1_m"] = derived.pop("h1_m_logged")
        for section in derived.pop("sections", ()):
            key = f"{section['surface']}_km"
            derived[key] = derived.get(key, 0.0) + section["length_km"]
        return _example(
            name,
            method,
            profiles[profile],
            case.get("profile_first_point") == "rx",
            _ours(case["inputs"]),
            _ours(derived),
            steps,
            {key: value for key, value in _ours(case["expected"]).items() if not key.startswith("published_")},
        )
    except RequestError:
        raise
    except json.JSONDecodeError as error:
        raise RequestError(f"{path} is no JSON (line {error.lineno}: {error.msg}): mend or replace it") from error
    except KeyError as error:
        raise RequestError(f"{path} lacks {error}: give every field of a worked example") from error
    except (OSError, UnicodeDecodeError, TypeError, ValueError, AttributeError) as error:
        raise RequestError(f"{path} cannot be read ({error}): mend or replace it") from error


def _example(
    name: str,
    method: Method,
    profile: Mapping[str, FloatArray],
    receiver_first: bool,
    inputs: Mapping[str, Any],
    derived: Mapping[str, Any],
    steps: Mapping[str, Any],
    expected: Mapping[str, Any],
) -> WorkedExample:
    if receiver_first:
        profile = {key: column[::-1] for key, column in profile.items()}
        profile = {**profile, "distance_km": profile["distance_km"][0] - profile["distance_km"]}
    for group, values in (("derived_inputs", derived), ("intermediate", steps), ("expected", expected)):
        for key, value in values.items():
            absent = value is None and group != "expected"
            number = isinstance(value, int | float) and math.isfinite(value)
            if not (absent or number):
                raise ValueError(f"{group} {key} is {value!r}, a number is needed")
    for key in ("field_dbuv_m", "basic_loss_db"):
        if key not in expected:
            raise ValueError(f"expected holds no {key}")
    return WorkedExample(name, method, profile, inputs, derived, steps, expected)


def _profile(path: Path) -> dict[str, FloatArray]:
    with path.open(encoding="utf-8-sig", newline="") as file:
        rows = list(csv.DictReader(file))
    columns = _ours({key: key for key in rows[0]}) if rows else {}
    needed = ("distance_km", "terrain_amsl_m", "clutter_height_m", "zone")
    absent = [key for key in needed if key not in columns]
    if absent:
        raise ValueError(f"profile {path.name} lacks the column {absent[0]}")
    return {key: np.array([float(row[columns[key]] or "nan") for row in rows]) for key in needed}


def _method(recommendation: str) -> Method:
    for method, title in RECOMMENDATIONS.items():
        if recommendation.startswith(title):
            return method
    raise ValueError(f'recommendation "{recommendation}" is not {" or ".join(RECOMMENDATIONS.values())}')


def _ours(values: Mapping[str, Any]) -> dict[str, Any]:
    renamed = {}
    for key, value in values.items():
        for theirs, ours in _RENAMED:
            key = key.replace(theirs, ours)
        renamed[key] = value
    return renamed


def _unrolled(column: Any) -> FloatArray:
    if isinstance(column, dict):
        values, counts = zip(*column["runs"], strict=True)
        return np.repeat(np.array(values, dtype=float), counts)
    return np.array(column, dtype=float)


def _value(cell: str) -> Any:
    if cell in ("", "True", "False"):
        return {"": None, "True": True, "False": False}[cell]
    try:
        return float(cell)
    except ValueError:
        return cell
