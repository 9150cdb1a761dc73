"""The letters of a source file: labels, states, priors, and whether they fit each other and the model."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from encoder_forge.source.arrays import ArrayStore
from encoder_forge.source.complaints import Place, check_keys, counted, one_line, shown
from encoder_forge.source.forms import FORMS, read_form
from encoder_forge.source.limits import LETTERS, STATE_ENTRIES, TEXT_LENGTH
from encoder_forge.source.model import Letter
from encoder_forge.source.priors import read_priors
from encoder_forge.source.states import State, state_of_matrix, state_of_vector

TABLES = "one table [[letters]] for each letter, with the keys label, prior and a state"


def read_letters(
    value: object, place: Place, dimensions: range, normalise: bool, arrays: ArrayStore
) -> tuple[Letter, ...]:
    """Return the letters of a source; what is complained of is left out.

    Parameters
    ----------
    value : object
        What stands under the key `letters`.
    place : Place
        Where it stands.
    dimensions : range
        The dimensions that the model admits.
    normalise : bool
        Whether states and priors of any positive norm are accepted.
    arrays : ArrayStore
        The source's array files.
    """
    if not isinstance(value, list) or not value or not all(isinstance(item, dict) for item in value):
        place.complain("an empty list" if value == [] else shown(value), TABLES)
        return ()
    if len(value) > LETTERS:
        place.complain(counted(len(value), "letter"), f"up to {LETTERS}")
        return ()
    labels = _labels(value, place)
    places = [Place(place.report, f'letter {i} ("{one_line(label)}")') for i, label in enumerate(labels)]
    for table, where in zip(value, places, strict=True):
        check_keys(table, ("label", "prior", "count", *FORMS), where)
    states = _states(value, places, dimensions, normalise, arrays)
    _check_same_dimension(states, labels, place)
    priors = read_priors(value, places, place, normalise)
    return tuple(
        Letter(label, prior, *state)
        for label, prior, state in zip(labels, priors or [], states, strict=False)
        if state is not None
    )


def read_text(value: object, place: Place) -> str | None:
    """Return a printable text of one line, or complain and return None."""
    if isinstance(value, str) and value.strip() and value.isprintable() and len(value) <= TEXT_LENGTH:
        return value
    place.complain(shown(value), f"printable text on one line, 1 to {TEXT_LENGTH} characters")
    return None


def _labels(tables: Sequence[dict[str, object]], place: Place) -> list[str]:
    """Return a label for each letter, the given one or "letter-<i>"; complain of bad and repeated ones."""
    labels: list[str] = []
    first: dict[str, int] = {}
    for i, table in enumerate(tables):
        label = f"letter-{i}"
        if "label" in table:
            where = Place(place.report, f"letter {i}, label")
            label = read_text(table["label"], where) or label
        if label in first:
            where = Place(place.report, f'letter {i} ("{label}"), label')
            where.complain(f"{shown(label)}, which letter {first[label]} has too", "a label of its own")
        first.setdefault(label, i)
        labels.append(label)
    return labels


def _states(
    tables: Sequence[dict[str, object]],
    places: Sequence[Place],
    dimensions: range,
    normalise: bool,
    arrays: ArrayStore,
) -> list[State | None]:
    states: list[State | None] = []
    entries = 0
    for table, place in zip(tables, places, strict=True):
        form = read_form(table, place, arrays)
        state: State | None = None
        if form is not None and _fits(form[0], form[1], dimensions):
            entries += form[0].size
            if entries > STATE_ENTRIES:
                form[1].complain(
                    f"more than {STATE_ENTRIES} numbers in the states so far", "smaller or fewer states"
                )
                return [*states, *[None] * (len(tables) - len(states))]
            of = state_of_vector if form[0].ndim == 1 else state_of_matrix
            state = of(form[0], normalise, form[1])
        states.append(state)
    return states


def _fits(state: np.ndarray, place: Place, dimensions: range) -> bool:
    """Whether a state's dimension is one that the model has; complain if not."""
    dimension = state.shape[0]
    if dimension in dimensions:
        return True
    least, most = dimensions[0], dimensions[-1]
    accepted = f"dimension {least}, as block_qubits says" if least == most else f"dimension {least} to {most}"
    place.complain(f"a state of dimension {dimension}", accepted)
    return False


def _check_same_dimension(states: Sequence[State | None], labels: Sequence[str], place: Place) -> None:
    by_dimension: dict[int, list[str]] = {}
    for i, state in enumerate(states):
        if state is not None:
            by_dimension.setdefault(state[1].shape[1], []).append(f'{i} ("{labels[i]}")')
    if len(by_dimension) > 1:
        groups = [
            f"dimension {dimension} in letter {', '.join(names[:4])}{' and more' if len(names) > 4 else ''}"
            for dimension, names in sorted(by_dimension.items())
        ]
        place.complain("; ".join(groups), "the same dimension in all letters")
