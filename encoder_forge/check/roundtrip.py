"""The channel that encoder and decoder texts make together, as sums over what was measured and reset.

Between the two unitaries stand only measurements, resets, conditions and permutations of basis strings. So
each Kraus operator of the middle sends some basis rows r to rows r' and drops the others:
A_b = sum over (r, r') in branch b of D |r'><r| E.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from encoder_forge.bits import pick_bits, wire_mask
from encoder_forge.check.backends import Backend
from encoder_forge.errors import CheckFailedError, LimitError
from encoder_forge.qasm.program import Apply, Measure, Operation, Program, Reset, When


@dataclass(frozen=True, slots=True, eq=False)
class Branch:
    """One outcome of the middle.

    Attributes
    ----------
    bits : int
        Values of the classical bits, bit i worth 2^i.
    entered, left : ndarray of int, shape (r,)
        Basis rows after the encoder's unitary, and what they have become before the decoder's.
    factors : ndarray of complex, shape (r,)
        Phases picked up on the way.
    """

    bits: int
    entered: np.ndarray
    left: np.ndarray
    factors: np.ndarray


@dataclass(frozen=True, slots=True, eq=False)
class RoundTrip:
    """Encoder and decoder texts, run.

    Attributes
    ----------
    wires, block_wires : int
        Of the circuit, and of the block (the first ones); the rest is scratch, starting at zero.
    encode : ndarray of complex, shape (2^wires, 2^block_wires)
        The encoder's unitary on block inputs.
    decode : ndarray of complex, shape (2^wires, c)
        The decoder's unitary on the rows `decoded_rows`.
    rows, codes, factors, starts : ndarray
        All branches one after the other: encoder row, column of `decode`, phase; where each branch starts.
    bits : tuple of int
        Classical bits of each branch, bit i worth 2^i.
    accepted : int
        The branch that holds trash = scratch = 0.
    accepted_rows : ndarray of bool, shape (2^wires,)
        Rows with trash and scratch at zero.
    """

    wires: int
    block_wires: int
    encode: np.ndarray
    decode: np.ndarray
    rows: np.ndarray
    codes: np.ndarray
    factors: np.ndarray
    starts: np.ndarray
    bits: tuple[int, ...]
    accepted: int
    accepted_rows: np.ndarray

    def amplitudes(self, bras: np.ndarray, kets: np.ndarray) -> np.ndarray:
        """Return <bra|A|ket> for every Kraus operator and every pair of columns.

        Parameters
        ----------
        bras, kets : ndarray of complex, shape (2^block_wires, x)

        Returns
        -------
        ndarray of complex, shape (branches, 2^scratch, x)
        """
        sent = self.encode @ kets
        scratch = 1 << (self.wires - self.block_wires)
        decode = self.decode.reshape(1 << self.block_wires, scratch, -1)
        back = np.einsum("nsc,nx->scx", decode.conj(), bras)
        terms = back.conj()[:, self.codes, :] * (self.factors[:, None] * sent[self.rows])
        return np.add.reduceat(terms, self.starts, axis=1).transpose(1, 0, 2)

    def accepted_output(self, kets: np.ndarray) -> np.ndarray:
        """Return the accepted branch's output on all circuit wires, shape (2^wires, x)."""
        sent = self.encode @ kets
        first = self.starts[self.accepted]
        last = self.starts[self.accepted + 1] if self.accepted + 1 < len(self.starts) else len(self.rows)
        part = slice(first, last)
        return self.decode[:, self.codes[part]] @ (self.factors[part, None] * sent[self.rows[part]])

    def outputs(self, kets: np.ndarray) -> np.ndarray:
        """Return every Kraus operator on every column: shape (2^block_wires, branches * 2^scratch, x)."""
        sent = self.encode @ kets
        columns = []
        for b, first in enumerate(self.starts):
            last = self.starts[b + 1] if b + 1 < len(self.starts) else len(self.rows)
            part = slice(first, last)
            out = self.decode[:, self.codes[part]] @ (self.factors[part, None] * sent[self.rows[part]])
            columns.append(out.reshape(1 << self.block_wires, -1, kets.shape[1]))
        return np.concatenate(columns, axis=1)


def run_round_trip(
    encoder: Program,
    decoder: Program,
    backend: Backend,
    block_wires: int,
    kept: tuple[int, ...],
) -> RoundTrip:
    """Run encoder and decoder texts one after the other.

    Parameters
    ----------
    encoder, decoder : Program
    backend : Backend
    block_wires : int
        Qubits of the block; the wires after them are scratch.
    kept : tuple of int
        Kept wires; all others are trash or scratch.

    Raises
    ------
    CheckFailedError
        If the texts do not have the form (unitary, measurements and resets, unitary), or trash is not at zero
        before the decoder's unitary.
    LimitError
        If they are too wide.
    """
    if encoder.wires != decoder.wires:
        raise CheckFailedError(
            f"encoder.qasm has {encoder.wires} wires and decoder.qasm {decoder.wires}; they must agree"
        )
    check_width(encoder.wires, backend)
    inputs = np.zeros((1 << encoder.wires, 1 << block_wires), dtype=complex)
    inputs[np.arange(1 << block_wires) << (encoder.wires - block_wires), np.arange(1 << block_wires)] = 1
    encode = backend.columns(encoder.unitary_part, encoder.wires, inputs)
    middle, last = _split(encoder, decoder)
    branches = _middle_branches(middle, encoder.wires)
    mask = sum(wire_mask(w, encoder.wires) for w in range(encoder.wires) if w not in kept)
    _require_clean(branches, mask)
    decoded_rows = np.unique(np.concatenate([b.left for b in branches]))
    inputs = np.zeros((1 << encoder.wires, len(decoded_rows)), dtype=complex)
    inputs[decoded_rows, np.arange(len(decoded_rows))] = 1
    sizes = np.array([len(b.entered) for b in branches])
    starts = np.concatenate([[0], np.cumsum(sizes)[:-1]])
    holding = [i for i, b in enumerate(branches) if np.any(b.entered == 0)]
    return RoundTrip(
        wires=encoder.wires,
        block_wires=block_wires,
        encode=encode,
        decode=backend.columns(last, encoder.wires, inputs),
        rows=np.concatenate([b.entered for b in branches]),
        codes=np.searchsorted(decoded_rows, np.concatenate([b.left for b in branches])),
        factors=np.concatenate([b.factors for b in branches]),
        starts=starts,
        bits=tuple(b.bits for b in branches),
        accepted=holding[0],
        accepted_rows=(np.arange(1 << encoder.wires) & mask) == 0,
    )


def check_width(wires: int, backend: Backend) -> None:
    """Refuse a text with more wires than a dense simulation takes, before anything is allocated.

    Raises
    ------
    LimitError
    """
    if wires > backend.max_wires:
        raise LimitError(
            f"the text has {wires} wires; a dense simulation takes at most {backend.max_wires} "
            f"(4^{wires} amplitudes would need {16 * 4**wires / 2**30:.3g} GiB)"
        )


def _split(encoder: Program, decoder: Program) -> tuple[list[tuple[int, Operation]], list[Apply]]:
    """Return the middle (operations with the offset of their bits) and the decoder's unitary."""
    head = len(encoder.unitary_part)
    tail = encoder.operations[head:]
    lead = 0
    for i, operation in enumerate(decoder.operations):
        if not isinstance(operation, Apply):
            lead = i + 1
    middle = [(0, op) for op in tail] + [(encoder.bits, op) for op in decoder.operations[:lead]]
    last = [op for op in decoder.operations[lead:] if isinstance(op, Apply)]
    return middle, last


def _middle_branches(middle: list[tuple[int, Operation]], wires: int) -> list[Branch]:
    rows = np.arange(1 << wires)
    branches = [Branch(0, rows, rows, np.ones(1 << wires, dtype=complex))]
    for offset, operation in middle:
        branches = [after for branch in branches for after in _stepped(branch, operation, offset, wires)]
    return branches


def _stepped(branch: Branch, operation: Operation, offset: int, wires: int) -> list[Branch]:
    if isinstance(operation, Apply):
        return [_permuted(branch, operation, wires)]
    if isinstance(operation, When):
        number = sum(((branch.bits >> (b + offset)) & 1) << i for i, b in enumerate(operation.bits))
        result = [branch]
        for inner in operation.then if number == operation.value else operation.otherwise:
            result = [after for b in result for after in _stepped(b, inner, offset, wires)]
        return result
    result = []
    for value, part in _parts_by_value(branch, operation.wire, wires):
        left, bits = part.left, part.bits
        if isinstance(operation, Reset):
            left = left & ~wire_mask(operation.wire, wires)
        elif isinstance(operation, Measure):
            place = 1 << (operation.bit + offset)
            bits = bits | place if value else bits & ~place
        result.append(Branch(bits, part.entered, left, part.factors))
    return result


def _parts_by_value(branch: Branch, wire: int, wires: int) -> list[tuple[int, Branch]]:
    values = pick_bits(branch.left, (wire,), wires)
    parts = []
    for value in (0, 1):
        chosen = values == value
        if np.any(chosen):
            part = Branch(branch.bits, branch.entered[chosen], branch.left[chosen], branch.factors[chosen])
            parts.append((value, part))
    return parts


def _permuted(branch: Branch, operation: Apply, wires: int) -> Branch:
    """Apply a gate that permutes basis strings, phases allowed."""
    matrix = operation.matrix
    targets = np.argmax(abs(matrix), axis=0)
    factors = matrix[targets, np.arange(len(matrix))]
    if np.max(abs(abs(factors) - 1)) > 1e-12:
        raise CheckFailedError(
            f"gate {operation.name} between the two unitaries (after the first measurement or reset) is not "
            "a permutation of basis strings; accepted there: measure, reset, if, x, cx and the like"
        )
    before = pick_bits(branch.left, operation.wires, wires)
    after = targets[before]
    left = branch.left.copy()
    for place, wire in enumerate(operation.wires):
        bit = (after >> (len(operation.wires) - 1 - place)) & 1
        left = np.where(bit == 1, left | wire_mask(wire, wires), left & ~wire_mask(wire, wires))
    return Branch(branch.bits, branch.entered, left, branch.factors * factors[before])


def _require_clean(branches: list[Branch], mask: int) -> None:
    if any(np.any(branch.left & mask) for branch in branches):
        raise CheckFailedError(
            "decoder.qasm does not reset every trash and scratch wire before its unitary: "
            "what the receiver finds there is not what the encoder left"
        )
