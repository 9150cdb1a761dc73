"""Fidelity of single letter strings through an encoder and its decoder, computed from the kept set.

`substitute` and `herald` need the kept strings alone; `discard` needs the encoder's whole unitary, since the
failed branch passes through the decoder as it is.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from encoder_forge.bits import pick_bits
from encoder_forge.errors import InputError, LimitError
from encoder_forge.source.model import Source
from encoder_forge.spectrum.amplitudes import all_strings, component_table, kept_indicator, string_components
from encoder_forge.spectrum.records import Policy, TypicalBasis

MAX_STRINGS = 4096
"""Most letter strings taken one by one."""
MAX_MIXED_QUBITS = 6
"""Most block qubits for strings of mixed letters, whose states are matrices."""
_CHUNK_AMPLITUDES = 1 << 21


@dataclass(frozen=True, slots=True, eq=False)
class Branches:
    """A declared encoder unitary, split by what the kept and the other wires hold.

    Attributes
    ----------
    encode : ndarray of complex, shape (t, c, 2^block_wires)
        Amplitude of code c beside value t of trash and scratch, for a block with scratch at zero.
    decode : ndarray of complex, shape (z, c, 2^block_wires)
        Conjugate of what the decoder makes of code c: amplitudes on block and scratch value z.
    """

    encode: np.ndarray
    decode: np.ndarray

    def kraus(self) -> np.ndarray:
        """Return every Kraus operator of the round trip, shape (z, t, 2^block_wires, 2^block_wires)."""
        return np.einsum("zci,tcj->ztij", self.decode.conj(), self.encode, optimize=True)

    def traces(self, state: np.ndarray) -> np.ndarray:
        """Return Tr(A state) for every Kraus operator A, shape (z, t)."""
        sent = self.encode @ state
        return np.einsum("tcj,zcj->zt", sent, self.decode.conj(), optimize=True)


def split_unitary(unitary: np.ndarray, kept: tuple[int, ...], block_wires: int) -> Branches:
    """Split an encoder's unitary by kept and other wires.

    Parameters
    ----------
    unitary : ndarray of complex, shape (2^wires, 2^wires)
        Wire 0 most significant; scratch wires last, starting at zero.
    kept : tuple of int
    block_wires : int

    Raises
    ------
    InputError
        If the shapes do not fit.
    """
    wires = len(unitary).bit_length() - 1
    if unitary.shape != (1 << wires, 1 << wires) or wires < block_wires or not set(kept) < set(range(wires)):
        raise InputError(
            f"encoder unitary of shape {unitary.shape} with kept wires {kept}: accepted: a square matrix "
            f"over at least the block's {block_wires} wires, and kept wires among these"
        )
    others = tuple(w for w in range(wires) if w not in kept)
    numbers = np.arange(len(unitary))
    order = np.lexsort((pick_bits(numbers, kept, wires), pick_bits(numbers, others, wires)))
    rows = unitary[order].reshape(1 << len(others), 1 << len(kept), len(unitary))
    scratch = 1 << (wires - block_wires)
    decode = np.stack([rows[0][:, z::scratch] for z in range(scratch)])
    return Branches(encode=rows[:, :, ::scratch], decode=decode)


def string_fidelities(
    source: Source,
    basis: TypicalBasis,
    kept_strings: np.ndarray,
    policy: Policy,
    letters: np.ndarray | None = None,
    unitary: np.ndarray | None = None,
    kept: tuple[int, ...] | None = None,
) -> np.ndarray:
    """Return the fidelity of single letter strings after encoder and decoder, without noise.

    Parameters
    ----------
    source : Source
        What feeds the block.
    basis : TypicalBasis
        The eigenstrings that `kept_strings` are numbers of; it may belong to another source of the same
        block length and letter qubits.
    kept_strings : array of int
        The kept eigenstrings; eigenstring 0 is what the receiver guesses under `substitute`.
    policy : "discard", "substitute" or "herald"
    letters : ndarray of int, shape (x, block), optional
        Letter numbers of the strings wanted; all strings in lexicographic order by default.
    unitary, kept : optional
        For `discard`: the encoder's unitary and its kept wires, see `split_unitary`.

    Returns
    -------
    ndarray, shape (x,)
        For a pure string x of weight P_x on the kept set: substitute P_x^2 + (1 - P_x) |<q|x>|^2; herald
        P_x^2, a flagged block counting zero; discard sum over t of |<x|A_t|x>|^2 for the Kraus operators A_t
        of dropped values t. For mixed letters Uhlmann's squared fidelity with the input (Uhlmann, Rep. Math.
        Phys. 9, 273 (1976); Jozsa, J. Mod. Opt. 41, 2315 (1994)).

    Raises
    ------
    LimitError
        For more than 4,096 strings, or mixed letters over 6 block qubits.
    InputError
        For `discard` without a unitary.
    """
    if letters is None:
        _limit_strings(len(source.letters), basis.block)
        letters = all_strings(source, basis.block)
    if not source.pure and basis.wires > MAX_MIXED_QUBITS:
        raise LimitError(
            f"mixed letters in a block of {basis.wires} qubits: string by string up to {MAX_MIXED_QUBITS}"
        )
    branches = None
    if policy == "discard":
        if unitary is None or kept is None:
            raise InputError("policy 'discard' needs the encoder's unitary and its kept wires")
        branches = split_unitary(unitary, kept, basis.wires)
    table = component_table(source, None if branches else basis.rotation)
    indicator = kept_indicator(basis, kept_strings)
    rank = table.shape[2] ** basis.block
    step = max(1, _CHUNK_AMPLITUDES // ((1 << basis.wires) * rank))
    parts = []
    for start in range(0, len(letters), step):
        components = string_components(table, letters[start : start + step])
        if branches is not None:
            parts.append(_discarding(components, branches))
        else:
            parts.append(_by_kept_set(components, indicator, policy))
    return np.concatenate(parts)


def _limit_strings(letters: int, block: int) -> None:
    if letters**block > MAX_STRINGS:
        raise LimitError(
            f"{letters} letters in blocks of {block} make {letters**block} strings; "
            f"listed one by one up to {MAX_STRINGS}"
        )


def _by_kept_set(components: np.ndarray, indicator: np.ndarray, policy: Policy) -> np.ndarray:
    """Return fidelities under `substitute` or `herald`; components in the eigenbasis, shape (x, D, r).

    With the input V V^* and the output Y Y^*, sqrt(F) is the sum of the singular values of V^* Y. Under
    `herald` Y = T V, and V^* T V is positive, so that the sum is its trace P_x for mixed strings too.
    """
    weights = np.einsum("xar,a->x", abs(components) ** 2, indicator)
    if policy == "herald":
        return weights**2
    guess = components[:, 0, :].conj()
    failed = np.clip(1 - weights, 0, None)
    if components.shape[2] == 1:
        return weights**2 + failed * abs(guess[:, 0]) ** 2
    inside = components[:, indicator > 0, :]
    accepted = np.einsum("xar,xas->xrs", inside.conj(), inside, optimize=True)
    substituted = (np.sqrt(failed)[:, None] * guess)[:, :, None]
    return _squared_nuclear_norms(np.concatenate([accepted, substituted], axis=2))


def _discarding(components: np.ndarray, branches: Branches) -> np.ndarray:
    """Return fidelities under `discard`; components in the computational basis, shape (x, D, r)."""
    values, codes, size = branches.encode.shape
    sent = branches.encode.reshape(-1, size) @ components
    sent = sent.reshape(len(components), values, codes, -1)
    back = branches.decode.reshape(-1, size) @ components
    back = back.reshape(len(components), -1, codes, components.shape[2])
    if components.shape[2] == 1:
        overlaps = np.einsum("xzc,xtc->xzt", back[..., 0].conj(), sent[..., 0], optimize=True)
        result: np.ndarray = np.sum(abs(overlaps) ** 2, axis=(1, 2))
        return result
    # The output is spanned by what the codes decode to: first shrink the branches to at most `codes` columns.
    columns = sent.transpose(0, 2, 1, 3).reshape(len(components), codes, -1)
    if columns.shape[2] > codes:
        triangle = np.asarray(np.linalg.qr(columns.conj().transpose(0, 2, 1), mode="r"))
        columns = triangle.conj().transpose(0, 2, 1)
    overlap = np.einsum("xzcr,xck->xrzk", back.conj(), columns, optimize=True)
    return _squared_nuclear_norms(overlap.reshape(len(components), components.shape[2], -1))


def _squared_nuclear_norms(matrices: np.ndarray) -> np.ndarray:
    result: np.ndarray = np.sum(np.linalg.svd(matrices, compute_uv=False), axis=1) ** 2
    return result
