"""Search the minima again without the table: `python -m encoder_forge.synthesis.stringset.prove`.

Two searches run towards each other, one from the sets that an optimal encoder may keep, one from the subcube,
and the smaller always moves. Once they have settled every class up to costs a and b, each path of total cost
L <= a + b - 5 passes through a class that both know: its last class within a lies at a - 5 or further out,
since no gate costs more than 6, and so within b of the other end. The least sum over common classes is the
minimum as soon as a + b - 5 reaches it.
"""

from __future__ import annotations

import sys
import time
from dataclasses import dataclass

import numpy as np

from encoder_forge.synthesis.stringset.choose import subsets
from encoder_forge.synthesis.stringset.layers import HEAVIEST, LayeredSearch
from encoder_forge.synthesis.stringset.masks import subcube
from encoder_forge.synthesis.stringset.method import known_gates, rank_optimal

CASES = ((3, 2), (4, 3), (4, 2), (5, 3), (5, 4))
"""Blocks and kept qubits that `main` proves."""


@dataclass(frozen=True, slots=True)
class Proof:
    """What a search without the table found.

    Attributes
    ----------
    wires, kept : int
    minimum : int
        Least two-qubit gates from any rank-optimal set to a subcube.
    typical_layers, subcube_layers : tuple of int
        Classes at each cost from 0, settled from either end; empty layers are zeros.
    """

    wires: int
    kept: int
    minimum: int
    typical_layers: tuple[int, ...]
    subcube_layers: tuple[int, ...]

    def lines(self) -> list[str]:
        """Return the proof as a small table."""
        depth = max(len(self.typical_layers), len(self.subcube_layers))
        rows = [f"{self.wires} -> {self.kept}: {self.minimum} two-qubit gates", "  cost  typical  subcube"]
        for cost in range(depth):
            columns = [
                str(layers[cost]) if cost < len(layers) else "-"
                for layers in (self.typical_layers, self.subcube_layers)
            ]
            rows.append(f"  {cost:4d}  {columns[0]:>7}  {columns[1]:>7}")
        return rows


def prove(wires: int, kept: int) -> Proof:
    """Find the least cost of an optimal encoder of two-level iid letters by search alone.

    Parameters
    ----------
    wires, kept : int
        Block length, at most five, and kept qubits.

    Returns
    -------
    Proof

    Notes
    -----
    About a second for (5, 4), milliseconds for the others.

    Examples
    --------
    >>> prove(3, 2).minimum
    5
    """
    required, free = rank_optimal(wires, kept)
    starts = subsets(free, (1 << kept) - required.bit_count()) | np.uint32(required)
    outward = LayeredSearch(starts, wires)
    inward = LayeredSearch(np.array([subcube(kept)], dtype=np.uint32), wires)
    best = least_cost(outward, inward)
    if best is None:
        raise RuntimeError(f"no gates carry a typical set of {wires} wires onto {kept} wires")
    return Proof(
        wires,
        kept,
        best,
        tuple(len(layer) for layer in outward.layers),
        tuple(len(layer) for layer in inward.layers),
    )


def least_cost(outward: LayeredSearch, inward: LayeredSearch) -> int | None:
    """Run two searches towards each other until the least cost between their starts is certain."""
    best = _least_sum(outward, inward)
    while best is None or _reach(outward) + _reach(inward) - (HEAVIEST - 1) < best:
        if outward.exhausted and inward.exhausted:
            break
        moving = min((outward, inward), key=lambda search: (search.exhausted, len(search.layers[-1])))
        moving.advance()
        best = _least_sum(outward, inward)
    return best


def _reach(search: LayeredSearch) -> int:
    """Return the cost up to which every class is settled."""
    return len(search.layers) - 1


def _least_sum(outward: LayeredSearch, inward: LayeredSearch) -> int | None:
    """Return the least total cost over classes that both searches have settled."""
    common, here, there = np.intersect1d(outward.settled, inward.settled, return_indices=True)
    if not len(common):
        return None
    return int((outward.costs()[here] + inward.costs()[there]).min())  # two bytes of at most 19: no overflow


def main() -> int:
    """Prove the cases, print the layers and compare with the table; 1 when they differ."""
    differing = 0
    print("classes of string sets (up to wire order and X) settled at each cost, from either end")
    for wires, kept in CASES:
        start = time.perf_counter()
        proof = prove(wires, kept)
        seconds = time.perf_counter() - start
        expected = known_gates(wires, kept)
        agrees = proof.minimum == expected
        differing += not agrees
        print("\n".join(proof.lines()))
        print(f"  the table says {expected}: {'agrees' if agrees else 'DIFFERS'}  ({seconds:.2f} s)\n")
    return 1 if differing else 0


if __name__ == "__main__":
    sys.exit(main())
