"""Reflections and two-ports from Touchstone files, .s1p and .s2p.

The rows are turned into numbers by scikit-rf's reader, imported when the first file is read; what a file may be
is checked here, line by line, so that a refusal names the file, the line and the mend.
"""

from __future__ import annotations

import io
import math
from dataclasses import dataclass
from pathlib import Path
from typing import NoReturn

import numpy as np
from numpy.typing import NDArray

from app.chain import files
from app.chain.files import content_of, text_of
from app.errors import ChainError

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

FIELD = "match"  # of the part, where the page shows a refusal
FEWEST_POINTS = 2
_UNITS = ("HZ", "KHZ", "MHZ", "GHZ")
_PARAMETERS = ("S", "Y", "Z", "G", "H")
_FORMATS = ("MA", "DB", "RI")
_PORTS = {".s1p": 1, ".s2p": 2}


@dataclass(frozen=True, slots=True)
class Touchstone:
    """S-parameters of one file, checked: finite, by rising frequency."""

    name: str
    frequency_mhz: FloatArray  # (n,) rising
    s: ComplexArray  # (n, ports, ports)
    reference_ohm: FloatArray  # (ports,)


def read_touchstone(path: Path) -> Touchstone:
    """Read a .s1p or .s2p file.

    Raises
    ------
    ChainError
        No such file, one that is too large (its size is looked at before it is read), or not of the format.
    """
    return touchstone_from_bytes(path.name, content_of(path, FIELD))


def touchstone_from_bytes(name: str, content: bytes) -> Touchstone:
    """S-parameters of a file's content, as it was uploaded; `name` ends in .s1p or .s2p.

    Raises
    ------
    ChainError
        The file, its line, what came and what to do.

    References
    ----------
    Touchstone File Format Specification, IBIS Open Forum, versions 1.1 and 2.0.
    """
    suffix = Path(name).suffix.casefold()
    if suffix not in _PORTS:
        listed = " or ".join(_PORTS)
        raise ChainError(f'{name}: is no {listed} file: export it as "Touchstone, 1 port"', field=FIELD)
    ports = _PORTS[suffix]
    text = _clean(name, text_of(name, content, FIELD), ports)
    frequency_hz, s, reference = _read(name, text, ports)
    _check(name, frequency_hz, s, reference)
    return Touchstone(name, frequency_hz / 1e6, s, reference)


def _clean(name: str, text: str, ports: int) -> str:
    """Lines that count, without comments, the option line in the order that every reader knows."""
    kept: list[str] = []
    option_seen = False
    points = 0
    is_data = True
    for number, raw in enumerate(text.splitlines(), 1):
        line = raw.partition("!")[0].strip()
        if not line:
            continue
        if line.startswith("#"):
            if not option_seen:  # by the specification later ones are ignored
                kept.append(_option_line(name, number, line))
            option_seen = True
        elif line.startswith("["):
            is_data = not line.casefold().startswith(("[noise", "[end"))
            kept.append(line)
        else:
            if not option_seen:
                refuse(name, f"line {number}: data before the option line", 'begin it with "# MHz S RI R 50"')
            if is_data:
                points += _is_point(name, number, line, ports)
            kept.append(line)
    if points < FEWEST_POINTS:
        refuse(name, f"has {points} points", f"measure the band with at least {FEWEST_POINTS}, better 201")
    return "\n".join(kept) + "\n"


def _option_line(name: str, number: int, line: str) -> str:
    """Option line with its parts in order; by the specification they may stand in any order, or be left out."""
    unit, form, resistance = "GHZ", "MA", ["50"]
    tokens = line[1:].upper().split()
    mend = 'write it as "# MHz S RI R 50"'
    while tokens:
        token = tokens.pop(0)
        if token in _UNITS:
            unit = token
        elif token in _FORMATS:
            form = token
        elif token == "S":
            continue
        elif token in _PARAMETERS:
            refuse(name, f'line {number}: holds {token}-parameters ("{line}")', "export S-parameters")
        elif token == "R" and tokens:
            resistance = []
            while tokens and _number(tokens[0]) is not None:
                resistance.append(tokens.pop(0))
            if not resistance:
                refuse(name, f'line {number}: "{tokens[0]}" is no resistance ("{line}")', mend)
        else:
            refuse(name, f'line {number}: option line "{line}" with "{token}" is wrong', mend)
    return f"# {unit} S {form} R {' '.join(resistance)}"


def _is_point(name: str, number: int, line: str, ports: int) -> bool:
    """Whether the line is a point of the sweep; noise figures behind a two-port's sweep are not."""
    values = [_number(token) for token in line.split()]
    wanted = 1 + 2 * ports * ports
    if ports == 2 and len(values) == 5 and None not in values:
        return False
    if None in values or len(values) != wanted:
        refuse(
            name,
            f'line {number}: "{line[:60]}" is not a point',
            f"give {wanted} finite numbers a line: the frequency and {wanted - 1} of the S-parameters",
        )
    return True


def _number(token: str) -> float | None:
    try:
        value = float(token)
    except ValueError:
        return None
    return value if math.isfinite(value) else None


def _read(name: str, text: str, ports: int) -> tuple[FloatArray, ComplexArray, FloatArray]:
    from skrf.io.touchstone import Touchstone as Reader  # type: ignore[import-untyped]

    stream = io.StringIO(text)
    stream.name = f"sweep.s{ports}p"
    try:
        read = Reader(stream)
        frequency_hz, s = read.get_sparameter_arrays()
        reference = np.asarray(read.z0)[0]
    except Exception as error:  # the reader's own errors have no root; whatever it is, the file is not of the format
        raise ChainError(
            f"{name}: is not a Touchstone file of {ports} port(s) ({type(error).__name__}: {str(error).strip()[:80]}): "
            "export it again, or save it as version 1",
            field=FIELD,
        ) from error
    if np.any(np.imag(reference) != 0):
        refuse(name, "has a complex reference impedance", "export it with a resistance such as R 50")
    return (
        np.asarray(frequency_hz, dtype=float),
        np.asarray(s, dtype=np.complex128),
        np.broadcast_to(np.real(reference), (ports,)).astype(float),
    )


def _check(name: str, frequency_hz: FloatArray, s: ComplexArray, reference: FloatArray) -> None:
    if not (np.isfinite(s).all() and np.isfinite(frequency_hz).all()):
        refuse(name, "holds values that are no numbers", "measure it again")
    steps = np.diff(frequency_hz)
    if (steps <= 0).any():
        at = int(np.argmax(steps <= 0))
        refuse(
            name,
            f"{frequency_hz[at + 1] / 1e6:g} MHz follows {frequency_hz[at] / 1e6:g} MHz",
            "sort it by rising frequency, each frequency once",
        )
    if (reference <= 0).any():
        refuse(name, f"has a reference of {reference.min():g} ohms", "write the analyser's impedance, such as R 50")


def refuse(name: str, came: str, mend: str) -> NoReturn:
    """Raise the ChainError that names a measured file, what is wrong with it and the mend."""
    files.refuse(name, came, mend, FIELD)
