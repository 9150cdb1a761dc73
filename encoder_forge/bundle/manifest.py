"""The manifest: what a bundle says about itself, as plain JSON data."""

from __future__ import annotations

import hashlib
from importlib.metadata import PackageNotFoundError, version
from typing import Any

from encoder_forge import __version__
from encoder_forge.bits import ket
from encoder_forge.bundle.records import DECODER, ENCODER, SCHEMA, BuildRequest
from encoder_forge.check.report import CheckReport, Measured
from encoder_forge.qasm.program import Program
from encoder_forge.qasm.reader import read_program
from encoder_forge.source.model import SourceFile
from encoder_forge.spectrum.records import TypicalBasis
from encoder_forge.synthesis.encoder import Encoder

_LIBRARIES = ("numpy", "scipy", "qiskit")


def build_manifest(
    request: BuildRequest,
    basis: TypicalBasis,
    encoder: Encoder,
    candidates: tuple[Encoder, ...],
    texts: tuple[str, str],
    source_files: tuple[SourceFile, ...],
    report: CheckReport,
) -> dict[str, Any]:
    """Return a bundle's manifest; nothing in it depends on clock, machine or cache.

    Parameters
    ----------
    request : BuildRequest
    basis : TypicalBasis
    encoder : Encoder
        The one chosen.
    candidates : tuple of Encoder
    texts : tuple of str
        Encoder and decoder text.
    source_files : tuple of SourceFile
        As they are stored in the bundle.
    report : CheckReport
    """
    source = request.source
    return {
        "schema": SCHEMA,
        "tool": {"name": "encoder-forge", "version": __version__, "libraries": _library_versions()},
        "source": {
            "name": source.name,
            "revision": source.revision,
            "files": [file.name for file in source_files],
            "sha256": source.sha256,
        },
        "request": {
            "keep": request.keep,
            "fidelity": request.fidelity,
            "by": request.by,
            "aim": request.aim,
            "policy": request.policy,
            "effort": None,
            "method": request.method,
            "kept_wires": request.kept_wires,
            "flat": request.flat,
        },
        "block": basis.block,
        "letter_qubits": basis.letter_qubits,
        "kept": {
            "qubits": basis.kept_qubits,
            "dimension": len(encoder.kept_strings),
            "wires": list(encoder.kept),
            "eigenstrings": [ket(s, basis.wires) for s in encoder.kept_strings],
        },
        "trash": {"wires": list(encoder.trash)},
        "scratch": {"wires": list(encoder.scratch)},
        "rate": basis.kept_qubits / basis.block,
        "method": encoder.method,
        "minimum": encoder.minimum or None,
        "policy": request.policy,
        "seed": request.seed,
        "encoder": describe_text(ENCODER, texts[0], read_program(texts[0], ENCODER)),
        "decoder": describe_text(DECODER, texts[1], read_program(texts[1], DECODER)),
        "analytic": dict(report.analytic),
        "measured": describe_measured(report.measured),
        "deviation": report.deviation,
        "candidates": [describe_candidate(c, chosen=c.method == encoder.method) for c in candidates],
        "notes": [*source.notes, *report.measured.notes],
    }


def describe_text(file: str, text: str, program: Program) -> dict[str, Any]:
    """Return what the manifest says of one text; gate counts are those of the parsed, expanded text."""
    return {
        "file": file,
        "sha256": hashlib.sha256(text.encode()).hexdigest(),
        "qubits": program.wires,
        "two_qubit_gates": program.two_qubit_gates,
        "depth": program.depth,
    }


def describe_measured(measured: Measured) -> dict[str, Any]:
    """Return the measured figures as plain data."""
    worst = None
    if measured.worst_string is not None:
        worst = {"letters": list(measured.worst_string), "fidelity": measured.worst_fidelity}
    letters = None
    if measured.letter_fidelity is not None:
        letters = [{"label": label, "fidelity": f} for label, f in measured.letter_fidelity]
    interval = None if measured.evidence_interval is None else list(measured.evidence_interval)
    document: dict[str, Any] = {
        "typical_weight": measured.typical_weight,
        "entanglement_fidelity": measured.entanglement_fidelity,
        "entanglement_fidelity_total": measured.entanglement_fidelity_total,
        "ensemble_fidelity": measured.ensemble_fidelity,
        "letter_fidelity": letters,
        "worst_string": worst,
        "leakage": measured.leakage,
        "round_trip_error": measured.round_trip_error,
        "backend": measured.backend,
        "evidence": measured.evidence,
        "evidence_samples": measured.evidence_samples,
        "evidence_interval": interval,
    }
    if measured.herald_probability is not None:
        document["ensemble_fidelity_accepted"] = measured.ensemble_fidelity_accepted
        document["herald_probability"] = measured.herald_probability
    return document


def describe_candidate(encoder: Encoder, chosen: bool) -> dict[str, Any]:
    """Return one candidate's line."""
    return {
        "method": encoder.method,
        "two_qubit_gates": encoder.two_qubit_gates,
        "typical_weight": encoder.typical_weight,
        "depth": encoder.depth,
        "wires": encoder.wires,
        "minimum": encoder.minimum or None,
        "chosen": chosen,
        **encoder.details,
    }


def _library_versions() -> dict[str, str]:
    versions = {}
    for name in _LIBRARIES:
        try:
            versions[name] = version(name)
        except PackageNotFoundError:
            continue
    return versions
