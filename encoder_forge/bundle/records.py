"""What is asked of a build, and what a bundle holds."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from encoder_forge.qasm.writer import Policy
from encoder_forge.source.model import Source, SourceFile

MANIFEST = "manifest.json"
ENCODER = "encoder.qasm"
DECODER = "decoder.qasm"
SCHEMA = 1


@dataclass(frozen=True, slots=True, eq=False)
class BuildRequest:
    """Everything a user asks of a build.

    Attributes
    ----------
    source : Source
    block : int or None
        Letters in a block; None searches up to `max_block` (with `fidelity`), or for model `block`.
    keep : int or None
        Kept qubits; None picks the least that meets `fidelity`.
    fidelity : float or None
        What has to be met, measured by `by`.
    by : {"entanglement", "ensemble", "weight", "letter", "worst"}
    aim : {"weight", "gates", "wires"}
    policy : {"substitute", "discard", "herald"}
    method : str
        "auto" or a registry name.
    kept_wires : {"any", "leading"}
    flat : bool
        Spell out gate definitions in the texts.
    max_block : int or None
    seed : int
        Of every random choice (sampled letter strings).
    backend : str
        Check backend.
    """

    source: Source
    block: int | None = None
    keep: int | None = None
    fidelity: float | None = None
    by: str = "entanglement"
    aim: str = "weight"
    policy: Policy = "substitute"
    method: str = "auto"
    kept_wires: str = "any"
    flat: bool = False
    max_block: int | None = None
    seed: int = 0
    backend: str = "statevector"


@dataclass(frozen=True, slots=True, eq=False)
class Bundle:
    """A bundle's files in memory.

    Attributes
    ----------
    manifest : dict
        Plain JSON data.
    encoder, decoder : str
        OpenQASM 3 texts.
    source_files : tuple of SourceFile
        The source file as `source.toml` or `source.json`, then its array files.
    """

    manifest: dict[str, Any]
    encoder: str
    decoder: str
    source_files: tuple[SourceFile, ...]
