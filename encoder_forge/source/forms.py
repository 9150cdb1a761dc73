"""The five forms in which a letter's state can be given; each becomes a vector or a density matrix."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from encoder_forge.source.arrays import ArrayStore
from encoder_forge.source.complaints import Place, check_keys, shown
from encoder_forge.source.numbers import read_matrix, read_real, read_vector
from encoder_forge.tolerances import NORM_INPUT, NORM_SILENT

FULL_TURN = 360.0

Reader = Callable[[object, Place, ArrayStore], "np.ndarray | None"]


def read_angles(value: object, place: Place, arrays: ArrayStore) -> np.ndarray | None:
    """Return cos(theta/2)|0> + e^{i phi} sin(theta/2)|1>, shape (2,), from degrees.

    Multiples of a right angle come out exact, so that they leave no dust in what follows.
    """
    accepted = "a table such as { theta = 90.0, phi = 0.0 }, in degrees"
    if not isinstance(value, dict):
        place.complain(shown(value), accepted)
        return None
    check_keys(value, ("theta", "phi"), place)
    angles = []
    for name in ("theta", "phi"):
        if name not in value:
            place.key(name).complain("nothing", accepted)
            continue
        angle = read_real(value[name], place.key(name))
        if angle is not None and abs(angle) > FULL_TURN:
            place.key(name).complain(shown(value[name]), f"degrees from {-FULL_TURN:g} to {FULL_TURN:g}")
        elif angle is not None:
            angles.append(angle)
    if len(angles) < 2:
        return None
    half, turn = turned(angles[0] / 2), turned(angles[1])
    return np.array([half.real, turn * half.imag])


def turned(degrees: float) -> complex:
    """Return e^{i angle}, exact at multiples of a right angle.

    Examples
    --------
    >>> turned(180.0), turned(-90.0)
    ((-1+0j), -1j)
    """
    quarters, rest = divmod(degrees, 90.0)
    angle = math.radians(rest)
    return complex(math.cos(angle), math.sin(angle)) * (1, 1j, -1, -1j)[int(quarters) % 4]


def read_bloch(value: object, place: Place, arrays: ArrayStore) -> np.ndarray | None:
    """Return (1 + x X + y Y + z Z) / 2, shape (2, 2)."""
    accepted = "three numbers [x, y, z] of length at most 1"
    if not isinstance(value, list) or len(value) != 3:
        place.complain(shown(value), accepted)
        return None
    parts = [read_real(part, place.item(i)) for i, part in enumerate(value)]
    if any(part is None for part in parts):
        return None
    vector = np.array(parts, dtype=float)
    length = float(np.linalg.norm(vector))
    if length > 1 + NORM_INPUT:
        place.complain(f"a vector of length {length:.10g}, outside the ball", accepted)
        return None
    if length > 1 + NORM_SILENT:
        place.note(f"the length, {length:.15g}, was scaled to 1")
    x, y, z = vector / max(length, 1.0)
    return np.array([[1 + z, x - 1j * y], [x + 1j * y, 1 - z]]) / 2


FORMS: dict[str, Reader] = {
    "amplitudes": lambda value, place, arrays: read_vector(value, place),
    "angles_deg": read_angles,
    "bloch": read_bloch,
    "density": lambda value, place, arrays: read_matrix(value, place),
    "array": lambda value, place, arrays: arrays.read_state(value, place),
}
"""Key of a form to the function that reads it: a vector of shape (d,), a matrix (d, d), or a complaint."""


def read_form(letter: dict[str, object], place: Place, arrays: ArrayStore) -> tuple[np.ndarray, Place] | None:
    """Return a letter's state as given, with the place of its key; or complain and return None."""
    given = [key for key in FORMS if key in letter]
    for key in given if len(given) > 1 else []:
        FORMS[key](letter[key], place.key(key), arrays)
    if len(given) != 1:
        place.complain(
            " and ".join(given) if given else "no state", f"exactly one of the keys {', '.join(FORMS)}"
        )
        return None
    state = FORMS[given[0]](letter[given[0]], place.key(given[0]), arrays)
    return None if state is None else (state, place.key(given[0]))
