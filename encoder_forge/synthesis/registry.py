"""The one table of synthesis methods.

Command-line choices, the portfolio, the documentation and the conformance tests all read it. A method is a
function from a TypicalBasis to an Encoder; adding one is one file and one line here.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from importlib import import_module

from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis.encoder import Encoder


@dataclass(frozen=True, slots=True)
class Method:
    """One synthesis method.

    Attributes
    ----------
    module : str
        Where its `synthesise` function lives; imported on first use, so that a command that needs no Qiskit
        loads none.
    max_wires : int
        Widest block it takes.
    needs_letters : bool
        Whether it works letter by letter, and so not on sources of model `block`.
    cost : str
        How its two-qubit gates grow.
    reference : str
        The published method behind it.
    about : str
        One line.
    """

    module: str
    max_wires: int
    needs_letters: bool
    cost: str
    reference: str
    about: str

    def applies(self, basis: TypicalBasis, block_model: bool) -> bool:
        """Whether the method takes this problem."""
        return basis.wires <= self.max_wires and not (self.needs_letters and block_model)

    @property
    def synthesise(self) -> Callable[[TypicalBasis], Encoder]:
        """The method's function."""
        function: Callable[[TypicalBasis], Encoder] = import_module(self.module).synthesise
        return function


METHODS: dict[str, Method] = {
    "stringset": Method(
        module="encoder_forge.synthesis.stringset.method",
        max_wires=5,
        needs_letters=True,
        cost="the proven minimum in the gate model, after the letters' rotations",
        reference="Margolus gate: Song and Klappenecker 2004; three controls: Maslov 2016",
        about="search over sets of eigenstrings",
    ),
    "generic": Method(
        module="encoder_forge.synthesis.generic",
        max_wires=8,
        needs_letters=False,
        cost="O(4^n)",
        reference="Shende, Bullock and Markov 2006; Iten et al. 2016",
        about="completed unitary or inverted isometry through Qiskit, the cheaper",
    ),
    "drop": Method(
        module="encoder_forge.synthesis.drop",
        max_wires=8,
        needs_letters=True,
        cost="0 after the letters' rotations",
        reference="baseline",
        about="drop wires and guess them",
    ),
}
