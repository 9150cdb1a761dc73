"""How much a source may hold; every refusal over one of these states the figure."""

from __future__ import annotations

SOURCE_BYTES = 4 * 2**20
"""Largest source file (TOML or JSON) read: 4 MiB, some 100 000 amplitudes; more belongs in an array file."""

ARRAY_BYTES = 64 * 2**20
"""Most bytes read from all array files of a source together: 64 MiB."""

STATE_ENTRIES = 2**22
"""Most complex numbers in all states of a source together (64 MiB): a density matrix counts all its d^2."""

LETTERS = 1024
"""Most letters of a source."""

LETTER_DIMENSION = 8
"""Most levels of a letter in the models `iid` and `copies`: three qubits a letter."""

BLOCK_QUBITS = 12
"""Most qubits of a block in the model `block`; what a command can build from it may be less."""

MAGNITUDE = 1e100
"""Largest number accepted: its square, and sums of such squares, stay within double precision."""

TEXT_LENGTH = 200
"""Most characters of a name, a revision or a label: they stand in one-line headers."""
