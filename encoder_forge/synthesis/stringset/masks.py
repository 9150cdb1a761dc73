"""Sets of basis strings as bit masks, and the moves that gates make on them.

A set S of strings of n <= 5 wires is an integer of 2^n bits: bit i is set when string i (wire 0 its most
significant bit) belongs to S. A gate that permutes strings permutes the mask's bits, and every gate used
here, an X with or without controls as well as a swap of wires, exchanges positions i and i + shift for some
i: a *delta swap*, six machine operations on a whole array of masks at once.

Notes
-----
Phases never matter to a set. That is why relative-phase gates serve: the Toffoli of Margolus takes three CX,
the fewest possible (Song and Klappenecker, Quantum Inf. Comput. 4, 361 (2004)), its sibling with three
controls takes six (Maslov, Phys. Rev. A 93, 022311 (2016)), against six and fourteen for the exact gates.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import combinations, product

import numpy as np

MAX_WIRES = 5
"""A mask of five wires fills a 32-bit word; the classes of six wires (over 10^13) are beyond any table."""

WEIGHTS = {1: 1, 2: 3, 3: 6}
"""Two-qubit gates of an X with so many controls: CX, relative-phase Toffoli, relative-phase three-control."""


@dataclass(frozen=True, slots=True)
class Move:
    """A controlled X acting on sets of strings.

    Attributes
    ----------
    controls, target : tuple of int, int
        Wires.
    polarities : tuple of int
        For each control the bit that lets the X act. A lone control is always positive: a CX with negative
        control is a CX and an X.
    shift, mask : int
        The delta swap: bits i of `mask` change places with bits i + shift.
    """

    controls: tuple[int, ...]
    polarities: tuple[int, ...]
    target: int
    shift: int
    mask: int

    @property
    def weight(self) -> int:
        """Two-qubit gates of the move."""
        return WEIGHTS[len(self.controls)]


def delta_swap(masks: np.ndarray, shift: int, mask: int) -> np.ndarray:
    """Exchange bits i of `mask` with bits i + shift in every one of `masks` (unsigned integers).

    >>> int(delta_swap(np.array([0b0011], dtype=np.uint32), 2, 0b0001)[0])
    6
    """
    kind = masks.dtype.type
    moving = ((masks >> kind(shift)) ^ masks) & kind(mask)
    return masks ^ moving ^ (moving << kind(shift))


def swap_positions(wires: int, shift: int, fixed: dict[int, int]) -> int:
    """Return the mask of the strings whose bits agree with `fixed` (wire to bit), for a swap by `shift`."""
    wanted = sum(bit << (wires - 1 - wire) for wire, bit in fixed.items())
    looked_at = sum(1 << (wires - 1 - wire) for wire in fixed)
    positions = sum(1 << i for i in range(1 << wires) if i & looked_at == wanted)
    if positions & (positions << shift):
        raise ValueError(f"a swap by {shift} would move a position twice: fix the bits that it changes")
    return positions


@cache
def moves(wires: int) -> tuple[Move, ...]:
    """Return every controlled X of one to three controls, cheapest first, in a fixed order.

    On five wires there are 20 CX, 120 Toffolis and 160 three-control gates, polarities counted.

    >>> [sum(len(m.controls) == c for m in moves(5)) for c in (1, 2, 3)]
    [20, 120, 160]
    """
    found = []
    for count in sorted(WEIGHTS):
        for target in range(wires):
            shift = 1 << (wires - 1 - target)
            for controls in combinations([w for w in range(wires) if w != target], count):
                for polarities in [(1,)] if count == 1 else product((1, 0), repeat=count):
                    fixed = dict(zip(controls, polarities, strict=True)) | {target: 0}
                    positions = swap_positions(wires, shift, fixed)
                    found.append(Move(controls, tuple(polarities), target, shift, positions))
    return tuple(found)


def flip(masks: np.ndarray, wire: int, wires: int) -> np.ndarray:
    """Apply X on `wire` to every set."""
    shift = 1 << (wires - 1 - wire)
    return delta_swap(masks, shift, swap_positions(wires, shift, {wire: 0}))


def swap_wires(masks: np.ndarray, first: int, second: int, wires: int) -> np.ndarray:
    """Exchange two wires in every set."""
    if first == second:
        return masks.copy()
    first, second = sorted((first, second))
    shift = (1 << (wires - 1 - first)) - (1 << (wires - 1 - second))
    return delta_swap(masks, shift, swap_positions(wires, shift, {first: 0, second: 1}))


def mask_of(chosen: np.ndarray) -> int:
    """Return the mask of a boolean array over strings.

    >>> mask_of(np.array([True, False, True, False]))
    5
    """
    return sum(1 << int(i) for i in np.flatnonzero(chosen))


def strings_of(mask: int) -> tuple[int, ...]:
    """Return the strings of a set, rising.

    >>> strings_of(0b1010)
    (1, 3)
    """
    return tuple(i for i in range(mask.bit_length()) if (mask >> i) & 1)


def subcube(kept: int) -> int:
    """Return the mask of the set that every search ends in: all strings of the `kept` last wires."""
    return (1 << (1 << kept)) - 1
