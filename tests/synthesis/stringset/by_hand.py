"""Everything about sets, groups and circuits once more, written plainly and sharing nothing with the package.

Sets are Python frozensets of strings, permutations are lists, states are dictionaries of amplitudes.
"""

from __future__ import annotations

import cmath
import heapq
import math
from collections import Counter
from itertools import combinations, permutations, product

import numpy as np

from encoder_forge.gates import Gate, expand
from encoder_forge.spectrum.records import TypicalBasis


def bit(string, wire, wires):
    return int(format(string, f"0{wires}b")[wire])


def group(wires):
    """All permutations of strings by wire orders and flips."""
    strings = [format(s, f"0{wires}b") for s in range(2**wires)]
    return [
        [int("".join(s[w] for w in order), 2) ^ flips for s in strings]
        for order in permutations(range(wires))
        for flips in range(2**wires)
    ]


def orbit_counts(wires):
    """Classes of sets by size, by Burnside's lemma: fixed sets are unions of cycles."""
    shapes = Counter()
    for element in group(wires):
        seen, cycles = set(), []
        for start in range(2**wires):
            length = 0
            while start not in seen:
                seen.add(start)
                start, length = element[start], length + 1
            if length:
                cycles.append(length)
        shapes[tuple(sorted(cycles))] += 1
    totals = [0] * (2**wires + 1)
    for cycles, number in shapes.items():
        fixed = [1] + [0] * 2**wires
        for length in cycles:
            fixed = [fixed[k] + (fixed[k - length] if k >= length else 0) for k in range(len(fixed))]
        totals = [t + number * f for t, f in zip(totals, fixed, strict=True)]
    order = math.factorial(wires) * 2**wires
    assert all(total % order == 0 for total in totals)
    return [total // order for total in totals]


def controlled_x(wires):
    """All controlled X of one to three controls, any polarities, as (weight, permutation of strings)."""
    found = []
    for target in range(wires):
        for count, weight in ((1, 1), (2, 3), (3, 6)):
            for controls in combinations(set(range(wires)) - {target}, count):
                for values in product((0, 1), repeat=count):
                    moved = [
                        s ^ (1 << (wires - 1 - target))
                        if all(bit(s, c, wires) == v for c, v in zip(controls, values, strict=True))
                        else s
                        for s in range(2**wires)
                    ]
                    found.append((weight, moved))
    return found


def least_costs(wires, kept):
    """Least cost of every single set, by Dijkstra over sets with wire orders and X as moves of cost 0."""
    free = [(0, element) for element in group(wires)]
    steps = free + controlled_x(wires)
    start = frozenset(range(2**kept))
    costs, heap = {}, [(0, 0, start)]
    number = 0
    while heap:
        cost, _, here = heapq.heappop(heap)
        if here in costs:
            continue
        costs[here] = cost
        for weight, moved in steps:
            there = frozenset(moved[s] for s in here)
            if there not in costs:
                number += 1
                heapq.heappush(heap, (cost + weight, number, there))
    return costs


def mask(strings):
    return sum(1 << s for s in strings)


def images(masks, moved):
    """Masks of the sets that a permutation of strings makes of others, by boolean arrays."""
    size = len(moved)
    members = (masks[:, None] >> np.arange(size, dtype=np.uint32)) & 1
    result = np.zeros_like(members)
    result[:, moved] = members
    return (result << np.arange(size, dtype=np.uint32)).sum(axis=1).astype(np.uint32)


def one_qubit(gate):
    half = 1 / math.sqrt(2)
    quarter = cmath.exp(0.25j * math.pi)
    fixed = {
        "x": ((0, 1), (1, 0)), "z": ((1, 0), (0, -1)), "h": ((half, half), (half, -half)),
        "s": ((1, 0), (0, 1j)), "sdg": ((1, 0), (0, -1j)), "t": ((1, 0), (0, quarter)),
        "tdg": ((1, 0), (0, quarter.conjugate())),
    }  # fmt: skip
    if gate.name in fixed:
        return fixed[gate.name]
    theta, phi, lam = gate.angles if gate.name == "U" else (gate.angles[0], 0, 0)
    assert gate.name in ("U", "ry")
    c, s = math.cos(theta / 2), math.sin(theta / 2)
    return (c, -cmath.exp(1j * lam) * s), (cmath.exp(1j * phi) * s, cmath.exp(1j * (phi + lam)) * c)


def run(gates: tuple[Gate, ...], state: dict[int, complex], wires: int) -> dict[int, complex]:
    """Run one- and two-qubit gates over a state held as a dictionary."""
    for gate in expand(gates):
        after: dict[int, complex] = {}
        target = 1 << (wires - 1 - gate.wires[-1])
        for string, amplitude in state.items():
            if gate.name == "cx":
                moved = string ^ target if bit(string, gate.wires[0], wires) else string
                after[moved] = after.get(moved, 0) + amplitude
                continue
            matrix = one_qubit(gate)
            column = int(bool(string & target))
            for row in (0, 1):
                moved = (string & ~target) | (target if row else 0)
                after[moved] = after.get(moved, 0) + matrix[row][column] * amplitude
        state = {s: a for s, a in after.items() if abs(a) > 1e-15}
    return state


def haar(size, rng, real=False):
    matrix = rng.normal(size=(size, size)) + (0 if real else 1j * rng.normal(size=(size, size)))
    q, r = np.linalg.qr(matrix)
    return (q * (np.diag(r) / np.abs(np.diag(r)))).astype(complex)


def typical_basis(eigenbasis, eigenvalues, block, kept):
    """The record of an iid source with a given letter spectrum."""
    weights = np.ones(1)
    for _ in range(block):
        weights = np.kron(weights, eigenvalues)
    falling = np.sort(weights)[::-1]
    boundary = falling[2**kept - 1]
    free = np.abs(weights - boundary) < 1e-12
    required = (weights > boundary) & ~free
    qubits = len(eigenvalues).bit_length() - 1
    best = float(falling[: 2**kept].sum())
    return TypicalBasis(block, qubits, kept, np.array(eigenbasis, complex), weights, required, free, best)


def eigenstate(basis, string):
    """An eigenstring as a state in the computational basis."""
    size = 1 << basis.letter_qubits
    vector = np.ones(1)
    for letter in range(basis.block):
        index = (string >> (basis.letter_qubits * (basis.block - 1 - letter))) % size
        vector = np.kron(vector, basis.rotation[:, index])
    return {i: complex(a) for i, a in enumerate(vector) if abs(a) > 1e-15}
