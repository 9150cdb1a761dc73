"""Dijkstra's search over classes of sets, one cost layer at a time.

All costs are 1, 3 and 6, so the frontier is a row of layers: the classes at cost c are the neighbours by CX
of layer c - 1, by Toffoli of layer c - 3 and by three-control gate of layer c - 6, less what is known.
Pulling a layer from those before it, in place of pushing all moves from every class, spares the search the
280 dear moves of the last layers, which are the large ones.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from encoder_forge.synthesis.stringset.canonical import canonical
from encoder_forge.synthesis.stringset.masks import WEIGHTS, delta_swap, moves

HEAVIEST = max(WEIGHTS.values())
"""Cost of the dearest gate: a path may jump over this many layers less one."""

_BATCH = 1 << 12
"""Classes whose neighbours are held at once (160 neighbours each, 4 bytes)."""


class LayeredSearch:
    """Classes of sets by cost from given sets, settled layer after layer.

    Attributes
    ----------
    wires : int
    layers : list of ndarray of uint32
        Canonical forms at each cost from 0, sorted; some layers may be empty.
    settled : ndarray of uint32
        All of them, sorted.
    """

    def __init__(self, starts: np.ndarray, wires: int) -> None:
        self.wires = wires
        self.settled = np.unique(canonical(starts, wires))
        self.layers: list[np.ndarray] = [self.settled]

    @property
    def exhausted(self) -> bool:
        """True when no further layer can hold a class."""
        return not any(len(layer) for layer in self.layers[-HEAVIEST:])

    def advance(self) -> np.ndarray:
        """Settle and return the next layer."""
        cost = len(self.layers)
        found = [np.empty(0, dtype=np.uint32)]
        for controls, weight in WEIGHTS.items():
            if weight <= cost:
                found.extend(self._neighbours(self.layers[cost - weight], controls))
        layer = _missing(np.unique(np.concatenate(found)), self.settled)
        self.layers.append(layer)
        self.settled = np.union1d(self.settled, layer)
        return layer

    def run(self) -> None:
        """Settle every class that can be reached."""
        while not self.exhausted:
            self.advance()
        while len(self.layers) > 1 and not len(self.layers[-1]):
            self.layers.pop()

    def costs(self) -> np.ndarray:
        """Return the cost of each settled class, in the order of `settled`."""
        costs = np.zeros(len(self.settled), dtype=np.uint8)
        for cost, layer in enumerate(self.layers):
            costs[np.searchsorted(self.settled, layer)] = cost
        return costs

    def _neighbours(self, classes: np.ndarray, controls: int) -> Iterator[np.ndarray]:
        chosen = [move for move in moves(self.wires) if len(move.controls) == controls]
        if not chosen:
            return
        for start in range(0, len(classes), _BATCH):
            batch = classes[start : start + _BATCH]
            images = np.concatenate([delta_swap(batch, move.shift, move.mask) for move in chosen])
            yield np.unique(canonical(images, self.wires))


def _missing(candidates: np.ndarray, known: np.ndarray) -> np.ndarray:
    """Return the members of one sorted array that another does not hold."""
    places = np.minimum(np.searchsorted(known, candidates), len(known) - 1)
    return candidates[known[places] != candidates]
