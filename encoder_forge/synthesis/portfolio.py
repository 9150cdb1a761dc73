"""The portfolio: every method that applies is tried, and one encoder is picked by the user's aim."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from encoder_forge.errors import InputError, LimitError
from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis.encoder import Encoder
from encoder_forge.synthesis.registry import METHODS
from encoder_forge.tolerances import EIGENVALUE_TIE

AIMS = ("weight", "gates", "wires")


@dataclass(frozen=True, slots=True, eq=False)
class Choice:
    """What the portfolio found.

    Attributes
    ----------
    encoder : Encoder
        The one picked.
    candidates : tuple of Encoder
        All of them, in the order of the registry.
    """

    encoder: Encoder
    candidates: tuple[Encoder, ...]


def choose(
    basis: TypicalBasis,
    block_model: bool,
    method: str = "auto",
    aim: str = "weight",
    acceptable: Callable[[Encoder], bool] | None = None,
    progress: Callable[[str], None] | None = None,
) -> Choice:
    """Try the methods that apply and pick an encoder.

    Parameters
    ----------
    basis : TypicalBasis
    block_model : bool
        Whether letters are whole blocks.
    method : str
        "auto" or one name of the registry.
    aim : {"weight", "gates", "wires"}
        Highest typical weight, fewest two-qubit gates, or fewest wires; ties by the others in that order.
    acceptable : callable, optional
        Whether an encoder meets the user's requirement; for aims other than weight only such are picked.
    progress : callable, optional
        Told the name of each method before it runs.

    Raises
    ------
    InputError
        If the named method does not apply, or no candidate is acceptable.
    LimitError
        If no method takes a block of this width.
    """
    names = [method] if method != "auto" else list(METHODS)
    fitting = [name for name in names if METHODS[name].applies(basis, block_model)]
    if not fitting:
        raise _no_method(basis, block_model, method)
    candidates = []
    for name in fitting:
        if progress:
            progress(name)
        candidates.append(METHODS[name].synthesise(basis))
    eligible = [c for c in candidates if acceptable is None or acceptable(c)]
    if not eligible:
        best = max(candidates, key=lambda c: c.typical_weight)
        raise InputError(
            f"no candidate meets the requirement; the best ({best.method}) holds typical weight "
            f"{best.typical_weight:.6f}; accepted: a lower --fidelity or a larger --keep"
        )
    return Choice(min(eligible, key=_ORDER[aim]), tuple(candidates))


def _weight_loss(encoder: Encoder) -> float:
    # Rounded to the tie tolerance, so that rounding noise does not decide between equal weights.
    return round((1 - encoder.typical_weight) / EIGENVALUE_TIE) * EIGENVALUE_TIE


_ORDER: dict[str, Callable[[Encoder], tuple[float, ...]]] = {
    "weight": lambda e: (_weight_loss(e), e.two_qubit_gates, e.wires, e.depth),
    "gates": lambda e: (e.two_qubit_gates, _weight_loss(e), e.wires, e.depth),
    "wires": lambda e: (e.wires, _weight_loss(e), e.two_qubit_gates, e.depth),
}


def _no_method(basis: TypicalBasis, block_model: bool, method: str) -> InputError:
    if method == "auto":
        widest = max(m.max_wires for m in METHODS.values() if not (block_model and m.needs_letters))
        return LimitError(
            f"a block of {basis.wires} circuit qubits ({basis.block} letters of {basis.letter_qubits}) is "
            f"too large to synthesise; accepted: up to {widest} qubits, "
            f"--block {widest // basis.letter_qubits} for this source"
        )
    limits = METHODS[method]
    reason = (
        "works letter by letter, and this source's letters are whole blocks"
        if block_model and limits.needs_letters
        else f"takes up to {limits.max_wires} circuit qubits; the block has {basis.wires}"
    )
    return InputError(f"--method {method} {reason}; accepted here: auto")
