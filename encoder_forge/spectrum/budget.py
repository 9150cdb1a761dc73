"""Budget tables: block length and kept qubits against weight, fidelities and rate."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from encoder_forge.errors import InputError, LimitError
from encoder_forge.source.model import Source
from encoder_forge.spectrum.ensemble import substitute_fidelity, why_no_ensemble
from encoder_forge.spectrum.ladders import distinct_levels
from encoder_forge.spectrum.letter import refuse_copies
from encoder_forge.spectrum.records import Spectrum
from encoder_forge.spectrum.second_order import By, second_order_qubits
from encoder_forge.spectrum.types import TypeLadder, refuse_too_long
from encoder_forge.spectrum.typical import check_block

DENSE_BLOCKS = 12
"""Block lengths up to here are all listed; then they double."""
DENSE_REQUIRED = 128
"""With a fidelity to meet, every block length is listed when --max-block does not exceed this."""
SINGLE_BLOCK_ROWS = 20
"""Most rows for one block length, unless all are asked for."""
ALL_ROWS = 5000
"""Most rows of a table."""
WEIGHTS_SHOWN = (0.5, 1 - 1e-6)
"""Kept qubits are listed where the typical weight lies between these."""
_DEFAULT_TYPES = 100_000
_WRITTEN_DIMENSION = 1000
"""Kept dimensions over 2^1000 are given by their logarithm only."""
_TARGET_SLACK = 2e-15

Gates = Callable[[int, int], int | None]


@dataclass(frozen=True, slots=True)
class BudgetRequest:
    """What a budget is to list.

    Attributes
    ----------
    max_block : int or None
        Longest block length of the grid; a default by the source where None.
    block : int or None
        One block length in place of the grid.
    keep : int or None
        One number of kept qubits.
    kept_dimension : int or None
        One kept dimension K in place of kept qubits.
    fidelity : float or None
        A figure to reach; each block length then has one row, at its least kept qubits.
    by : "entanglement", "weight" or "ensemble"
        Which figure.
    every : bool
        Whether all numbers of kept qubits are listed.
    """

    max_block: int | None = None
    block: int | None = None
    keep: int | None = None
    kept_dimension: int | None = None
    fidelity: float | None = None
    by: By = "entanglement"
    every: bool = False


@dataclass(frozen=True, slots=True)
class BudgetRow:
    """One choice of block length and kept dimension; all fidelities noiseless.

    Attributes
    ----------
    block, kept : int
        Letters, and the qubits that hold the kept dimension.
    kept_dimension : int or None
        K; None over 2^1000.
    kept_dimension_log2 : float
    rate : float
        log2(K) / block, qubits a letter.
    typical_weight, entanglement_fidelity : float
        P and P^2 of the K heaviest strings.
    ensemble_fidelity_substitute : float or None
        Ties in lexicographic order; None where out of reach.
    two_qubit_gates : int or None
        Of the cheapest encoder known.
    least_kept : int or None
        With a fidelity to meet: the least kept qubits that reach it at this block length.
    second_order : float or None
        With a fidelity to meet: the Gaussian estimate of log2 K.
    """

    block: int
    kept: int
    kept_dimension: int | None
    kept_dimension_log2: float
    rate: float
    typical_weight: float
    entanglement_fidelity: float
    ensemble_fidelity_substitute: float | None
    two_qubit_gates: int | None
    least_kept: int | None = None
    second_order: float | None = None


@dataclass(frozen=True, slots=True)
class Budget:
    """The rows of a budget, and why some figures are missing."""

    rows: tuple[BudgetRow, ...]
    notes: tuple[str, ...]


def make_budget(
    source: Source,
    spectrum: Spectrum,
    request: BudgetRequest,
    gates: Gates | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> Budget:
    """List what block lengths and kept qubits achieve on a source.

    Parameters
    ----------
    source : Source
        Of model `iid` or `block`.
    spectrum : Spectrum
        Of that source.
    request : BudgetRequest
    gates : callable, optional
        (block, kept qubits) to the two-qubit gates of the cheapest encoder known for two-level letters with
        two distinct non-zero eigenvalues, None where unknown.
    progress : callable, optional
        Told how many block lengths are done, of how many.

    Raises
    ------
    InputError
        With every complaint about the request.
    LimitError
        For a block too long to sum, or too many rows.
    """
    refuse_copies(source)
    _check_request(source, request)
    lengths = block_lengths(source, spectrum, request)
    _check_kept(request, lengths[-1] * source.letter_qubits)
    refuse_too_long(len(distinct_levels(spectrum.eigenvalues).logs), lengths[-1])
    table = _Table(source, spectrum, request, gates)
    rows: list[BudgetRow] = []
    for done, block in enumerate(lengths):
        if progress is not None:
            progress(done, len(lengths))
        rows.extend(table.rows(block))
        if len(rows) > ALL_ROWS:
            raise LimitError(f"the table has over {ALL_ROWS} rows; accepted: fewer blocks, or without --all")
    if not rows and not table.notes:
        table.notes.append("a block of one qubit leaves nothing to choose; longer blocks can be compressed")
    return Budget(tuple(rows), tuple(dict.fromkeys(table.notes)))


def block_lengths(source: Source, spectrum: Spectrum, request: BudgetRequest) -> list[int]:
    """Return the block lengths that a request lists.

    All to 12, then doubling, and the longest asked for; every one where a fidelity is to be met and at most
    128 are asked for. Without a bound, as long as the sums stay quick.
    """
    if source.model == "block":
        return [1]
    if request.block is not None:
        return [request.block]
    if request.max_block is None:
        levels = len(distinct_levels(spectrum.eigenvalues).logs)
        return [n for n in _grid(DENSE_REQUIRED) if math.comb(n + levels - 1, n) <= _DEFAULT_TYPES]
    if request.fidelity is not None and request.max_block <= DENSE_REQUIRED:
        return list(range(1, request.max_block + 1))
    return _grid(request.max_block)


def _grid(longest: int) -> list[int]:
    lengths = list(range(1, min(longest, DENSE_BLOCKS) + 1))
    while lengths[-1] * 2 < longest:
        lengths.append(lengths[-1] * 2)
    return lengths if lengths[-1] == longest else [*lengths, longest]


def _check_request(source: Source, request: BudgetRequest) -> None:
    complaints = []
    for name in ("block", "max_block"):
        value = getattr(request, name)
        if value is not None and value < 1:
            complaints.append(f"--{name.replace('_', '-')} {value}: accepted: a whole number, 1 or more")
    if request.block is not None and request.max_block is not None:
        complaints.append("--block and --max-block: accepted: one of them")
    if request.keep is not None and request.kept_dimension is not None:
        complaints.append("--keep and --kept-dimension: accepted: one of them")
    if request.fidelity is not None and not 0 < request.fidelity < 1:
        complaints.append(
            f"--fidelity {request.fidelity:g}: accepted: a number between 0 and 1, without them"
        )
    if complaints:
        raise InputError(complaints)
    check_block(source, request.block if request.block is not None else 1)


def _check_kept(request: BudgetRequest, qubits: int) -> None:
    """Require that --keep and --kept-dimension compress the longest block of the table."""
    keep, dimension = request.keep, request.kept_dimension
    if keep is not None and not 1 <= keep < qubits:
        option, accepted = f"--keep {keep}", f"1 to {qubits - 1}"
    elif dimension is not None and not (dimension >= 1 and math.log2(dimension) < qubits):
        option = f"--kept-dimension {dimension}"
        accepted = f"1 to {2**qubits - 1}" if qubits <= 64 else f"1 to 2^{qubits} - 1"
    else:
        return
    if qubits == 1 and keep is not None:
        raise InputError(f"{option}: a block of one qubit cannot be compressed; accepted: a longer block")
    raise InputError(
        f"{option} does not compress a block of {qubits} qubit{'s' * (qubits != 1)}; accepted: {accepted}"
    )


class _Table:
    """Makes the rows of one block length after the other."""

    def __init__(
        self, source: Source, spectrum: Spectrum, request: BudgetRequest, gates: Gates | None
    ) -> None:
        self._source, self._spectrum, self._request = source, spectrum, request
        levels = distinct_levels(spectrum.eigenvalues)
        known = source.model == "iid" and source.letter_qubits == 1 and len(levels.logs) == 2
        self._gates = gates if known else None
        self.notes: list[str] = []

    def rows(self, block: int) -> Iterator[BudgetRow]:
        """Yield the rows of one block length."""
        request, qubits = self._request, block * self._source.letter_qubits
        ladder = TypeLadder(self._spectrum.eigenvalues, block)
        least = None if request.fidelity is None else self._least_kept(ladder, request.fidelity)
        if request.kept_dimension is not None:
            if math.log2(request.kept_dimension) < qubits:
                yield self._row(ladder, request.kept_dimension, None, least)
            return
        for kept in self._kept(ladder, qubits, least):
            yield self._row(ladder, None, kept, least)

    def _kept(self, ladder: TypeLadder, qubits: int, least: int | None) -> list[int]:
        """Return the numbers of kept qubits to list."""
        request = self._request
        if request.keep is not None:
            return [request.keep] if request.keep < qubits else []
        if request.every:
            if qubits - 1 > ALL_ROWS:
                raise LimitError(f"--all lists up to {ALL_ROWS} rows; a block of {qubits} qubits has more")
            return list(range(1, qubits))
        if request.fidelity is not None:
            return [] if least is None else [least]
        low = max(1, ladder.least_kept(WEIGHTS_SHOWN[0]))
        high = ladder.least_kept(WEIGHTS_SHOWN[1])
        if ladder.weight(high) > WEIGHTS_SHOWN[1]:
            high -= 1
        shown = list(range(low, min(high, qubits - 1) + 1))
        if request.block is not None:
            shown = _spread(shown, SINGLE_BLOCK_ROWS - 1)
        return sorted({*shown, qubits - 1} - {0})

    def _least_kept(self, ladder: TypeLadder, fidelity: float) -> int | None:
        """Return the least kept qubits whose figure reaches a fidelity."""
        by = self._request.by
        least = ladder.least_kept(math.sqrt(fidelity) if by == "entanglement" else fidelity)
        if by != "ensemble":
            return least
        # The ensemble fidelity is at most the weight, and rises with every string kept.
        while True:
            figure = self._ensemble(ladder.block, 1 << least)
            if figure is None or figure >= fidelity - _TARGET_SLACK:
                return None if figure is None else least
            least += 1

    def _ensemble(self, block: int, dimension: int) -> float | None:
        reason = why_no_ensemble(self._source, self._spectrum, block)
        if reason is None:
            return substitute_fidelity(self._source, self._spectrum, block, dimension)
        self.notes.append(reason)
        return None

    def _row(
        self, ladder: TypeLadder, dimension: int | None, kept: int | None, least: int | None
    ) -> BudgetRow:
        """Return the row of a kept dimension, or of kept qubits where that is None."""
        block, request = ladder.block, self._request
        if dimension is None:
            assert kept is not None
            log_dimension, dimension = float(kept), 1 << kept
        else:
            log_dimension, kept = math.log2(dimension), (dimension - 1).bit_length()
        weight = ladder.weight(log_dimension)
        whole = dimension == 1 << kept
        estimate = None
        if request.fidelity is not None:
            spectrum = self._spectrum
            estimate = second_order_qubits(
                spectrum.entropy_bits, spectrum.entropy_variance_bits2, block, request.fidelity, request.by
            )
            if estimate is None:
                self.notes.append("second_order is an estimate for weight and entanglement fidelity only")
        return BudgetRow(
            block=block,
            kept=kept,
            kept_dimension=dimension if log_dimension <= _WRITTEN_DIMENSION else None,
            kept_dimension_log2=log_dimension,
            rate=log_dimension / block,
            typical_weight=weight,
            entanglement_fidelity=weight**2,
            ensemble_fidelity_substitute=self._ensemble(block, dimension),
            two_qubit_gates=self._gates(block, kept) if self._gates is not None and whole else None,
            least_kept=least,
            second_order=estimate,
        )


def _spread(numbers: list[int], most: int) -> list[int]:
    """Return at most so many of a run of numbers, evenly spread, both ends among them.

    >>> _spread(list(range(10, 21)), 3)
    [10, 15, 20]
    """
    if len(numbers) <= most:
        return numbers
    return [numbers[round(i * (len(numbers) - 1) / (most - 1))] for i in range(most)]
