"""From a set to gates: walk down the table of costs, then write the moves as gates on wires."""

from __future__ import annotations

import numpy as np

from encoder_forge.gates import Gate
from encoder_forge.synthesis.stringset.masks import Move, delta_swap, moves
from encoder_forge.synthesis.stringset.table import class_table

_NAMES = {1: "cx", 2: "rccx", 3: "rcccx"}


def descend(mask: int, wires: int, kept: int) -> tuple[Move, ...]:
    """Return moves of least total cost that carry a set onto a subcube, any wires kept, any bits on the rest.

    Every class that is no subcube has a neighbour cheaper by just the gate's own weight: that is what least
    cost means. The first such move in the order of `masks.moves` is taken.

    Examples
    --------
    >>> [move.weight for move in descend(0b00010111, 3, 2)]
    [1, 1, 3]
    """
    table = class_table(wires, kept)
    choices = moves(wires)
    weights = np.array([move.weight for move in choices], dtype=np.int64)
    cost = int(table.costs_of(np.array([mask], dtype=np.uint32))[0])
    path = []
    while cost:
        here = np.array([mask], dtype=np.uint32)
        images = np.concatenate([delta_swap(here, move.shift, move.mask) for move in choices])
        cheaper = np.flatnonzero(table.costs_of(images) == cost - weights)
        if not len(cheaper):
            raise RuntimeError(f"the table holds cost {cost} for {mask:#x}, but no move leads down from it")
        taken = int(cheaper[0])
        path.append(choices[taken])
        mask, cost = int(images[taken]), cost - int(weights[taken])
    return tuple(path)


def write_gates(path: tuple[Move, ...], wires: int, origin: int) -> tuple[Gate, ...]:
    """Write moves as gates, with X gates so that string `origin` ends on all zeros.

    X on a wire is free in a search over sets, so a negative control is turned positive by one X before the
    gate and none after: later polarities are read relative to the flips made so far. The last X gates
    put the origin on zero, which clears the trash for the whole set once it is a subcube.
    """
    gates: list[Gate] = []
    flipped = [0] * wires
    for move in path:
        if len(move.controls) == 1:
            flipped[move.target] ^= flipped[move.controls[0]]
        for control, polarity in zip(move.controls, move.polarities, strict=True):
            if len(move.controls) > 1 and polarity == flipped[control]:
                gates.append(Gate("x", (control,)))
                flipped[control] ^= 1
        gates.append(Gate(_NAMES[len(move.controls)], (*move.controls, move.target)))
    last = run_strings(gates, np.array([origin]), wires)[0]
    gates.extend(Gate("x", (wire,)) for wire in range(wires) if (last >> (wires - 1 - wire)) & 1)
    return tuple(gates)


def run_strings(gates: list[Gate] | tuple[Gate, ...], strings: np.ndarray, wires: int) -> np.ndarray:
    """Return where gates that permute basis strings take each of `strings` (phases left aside)."""
    strings = np.array(strings)
    for gate in gates:
        *controls, target = gate.wires
        acts = np.ones_like(strings)
        for control in controls:
            acts &= strings >> (wires - 1 - control)
        strings ^= acts << (wires - 1 - target)
    return strings
