"""Fits the blocks of a characterised quantum source into fewer physical qubits.

The folders stand in the order in which the data flows: source, spectrum, synthesis, qasm, check, bundle,
cli. Each imports only from those before it; errors, tolerances, gates and bits lie beneath them all.
"""

__version__ = "0.1.0"
