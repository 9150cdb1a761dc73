"""The numbers of a source file: reals, `[re, im]` pairs and strings such as "0.3-0.1j"."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence

import numpy as np

from encoder_forge.source.complaints import LISTED, Place, Wrong, counted, shown
from encoder_forge.source.limits import MAGNITUDE

REAL = "a finite number"
COMPLEX = 'a finite number, a pair [re, im], or a string such as "0.3-0.1j" (decimal, no spaces)'

_DECIMAL = r"(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_TEXT = re.compile(
    rf"(?P<real>[+-]?{_DECIMAL})|(?P<imag>[+-]?{_DECIMAL})j|(?P<re>[+-]?{_DECIMAL})(?P<im>[+-]{_DECIMAL})j"
)
_TEXT_LENGTH = 100


def parse_real(value: object) -> float:
    """Return a TOML or JSON number as a float.

    Raises
    ------
    Wrong
        When it is none (true and false are none), or not finite, or beyond +-1e100.
    """
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise Wrong(shown(value), REAL)
    return _finite(value, value)


def parse_complex(value: object) -> complex:
    """Return a number, a pair or a string as a complex number.

    Raises
    ------
    Wrong
        When the value is none of these, or a part is not finite or beyond +-1e100.

    Examples
    --------
    >>> parse_complex("0.3-0.1j"), parse_complex([0, 1]), parse_complex("-.5e1j")
    ((0.3-0.1j), 1j, -5j)
    """
    if isinstance(value, str):
        return _parse_text(value)
    if isinstance(value, list):
        if len(value) == 2 and all(_is_number(part) for part in value):
            return complex(_finite(value[0], value), _finite(value[1], value))
        raise Wrong(shown(value), COMPLEX)
    if not _is_number(value):
        raise Wrong(shown(value), COMPLEX)
    return complex(_finite(value, value))


def read_real(value: object, place: Place) -> float | None:
    """Return a real number, or complain and return None."""
    try:
        return parse_real(value)
    except Wrong as wrong:
        place.complain(wrong.found, wrong.accepted)
        return None


def read_vector(value: object, place: Place) -> np.ndarray | None:
    """Return a list of complex numbers as an array of shape (d,), or complain and return None."""
    if not isinstance(value, list) or not value:
        place.complain(shown(value) if value != [] else "an empty list", f"a list of numbers, each {COMPLEX}")
        return None
    return _read_entries([((i,), item) for i, item in enumerate(value)], (len(value),), place)


def read_matrix(value: object, place: Place) -> np.ndarray | None:
    """Return a list of rows as an array of shape (d, d), or complain and return None."""
    accepted = f"a square matrix as a list of rows, each entry {COMPLEX}"
    if not isinstance(value, list) or not value or not all(isinstance(row, list) for row in value):
        place.complain(shown(value) if value != [] else "an empty list", accepted)
        return None
    size = len(value)
    lengths = {i: len(row) for i, row in enumerate(value) if len(row) != size}
    if lengths:
        row, length = next(iter(lengths.items()))
        place.complain(f"{counted(size, 'row')}, of which row {row} has {counted(length, 'entry')}", accepted)
        return None
    entries = [((i, j), entry) for i, row in enumerate(value) for j, entry in enumerate(row)]
    return _read_entries(entries, (size, size), place)


def _read_entries(
    entries: Sequence[tuple[tuple[int, ...], object]], shape: tuple[int, ...], place: Place
) -> np.ndarray | None:
    result = np.zeros(shape, dtype=complex)
    bad = 0
    for indices, value in entries:
        try:
            result[indices] = parse_complex(value)
        except Wrong as wrong:
            bad += 1
            if bad <= LISTED:
                place.item(*indices).complain(wrong.found, wrong.accepted)
    if bad > LISTED:
        place.complain(f"{bad - LISTED} more such entries", COMPLEX)
    return None if bad else result


def _is_number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _finite(value: object, whole: object) -> float:
    assert isinstance(value, int | float)
    try:
        number = float(value)
    except OverflowError:
        number = math.inf
    if not math.isfinite(number) or abs(number) > MAGNITUDE:
        raise Wrong(shown(whole), f"finite numbers between {-MAGNITUDE:g} and {MAGNITUDE:g}")
    return number


def _parse_text(text: str) -> complex:
    match = _TEXT.fullmatch(text) if len(text) <= _TEXT_LENGTH else None
    if match is None:
        raise Wrong(shown(text), COMPLEX)
    real = match["real"] or match["re"] or "0"
    imaginary = match["imag"] or match["im"] or "0"
    return complex(_finite(float(real), text), _finite(float(imaginary), text))
