"""Encoder to OpenQASM 3 text.

Portable text: stdgates.inc, and `gate` definitions at the head for relative-phase Toffolis; `flat` spells
those out. A comment header says whose encoder it is; its digest covers everything from the OPENQASM line on.
Only constructs that every consumer takes are used: gates, measure, reset, `if` on one bit.
"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from typing import Literal

from encoder_forge.gates import GATES, Gate, expand, inverse_sequence
from encoder_forge.synthesis.encoder import Encoder

Policy = Literal["discard", "substitute", "herald"]
POLICIES: tuple[Policy, ...] = ("substitute", "discard", "herald")

REGISTER = "wire"
SYNDROME = "syndrome"
FLAG = "flag"


@dataclass(frozen=True, slots=True)
class Heading:
    """What the comment header of a text says about the source.

    Attributes
    ----------
    source, revision : str
    block : int
        Letters.
    letter_qubits : int
    """

    source: str
    revision: str
    block: int
    letter_qubits: int


def encoder_text(encoder: Encoder, policy: Policy, heading: Heading, flat: bool = False) -> str:
    """Write the encoder under its failure policy: the unitary, then what happens to the trash.

    `discard` leaves the trash unseen. `substitute` measures trash and scratch and resets the kept wires when
    any is not zero (code 0 is the most probable string). `herald` measures them and joins the outcomes into
    the one bit `flag`.
    """
    lines = _program_head(encoder.gates, encoder.wires, flat)
    lines += [_line(gate) for gate in _shown(encoder.gates, flat)]
    watched = encoder.trash + encoder.scratch
    if policy == "substitute":
        lines.insert(_declaration_place(lines), f"bit[{len(watched)}] {SYNDROME};")
        lines += _measured(watched)
        resets = " ".join(f"reset {REGISTER}[{wire}];" for wire in encoder.kept)
        lines += [f"if ({SYNDROME}[{i}]) {{ {resets} }}" for i in range(len(watched))]
    elif policy == "herald":
        place = _declaration_place(lines)
        lines[place:place] = [f"bit[{len(watched)}] {SYNDROME};", f"bit[1] {FLAG};"]
        lines += _measured(watched)
        # The first watched wire becomes the logical or of all: already collapsed, so setting it is safe.
        first = f"{REGISTER}[{watched[0]}]"
        lines += [
            f"if ({SYNDROME}[{i}]) {{ reset {first}; x {first}; }}" for i in range(1, len(watched))
        ]
        lines.append(f"{FLAG}[0] = measure {first};")
    return _with_header("encoder", lines, encoder, policy, heading)


def decoder_text(encoder: Encoder, policy: Policy, heading: Heading, flat: bool = False) -> str:
    """Write the decoder: trash and scratch reset, then the encoder's gate-by-gate inverse."""
    gates = inverse_sequence(encoder.gates)
    lines = _program_head(gates, encoder.wires, flat)
    lines += [f"reset {REGISTER}[{wire}];" for wire in encoder.trash + encoder.scratch]
    lines += [_line(gate) for gate in _shown(gates, flat)]
    return _with_header("decoder", lines, encoder, policy, heading)


def program_digest(text: str) -> str:
    """Return the SHA-256 of everything from the OPENQASM line on, in hexadecimal."""
    start = text.find("OPENQASM")
    body = text[start:] if start >= 0 else text
    return hashlib.sha256(body.encode()).hexdigest()


def stated_digest(text: str) -> str | None:
    """Return the digest that a text's comment header states, or None where it states none."""
    for line in text.splitlines():
        if line.startswith("// digest: sha256 "):
            return line.split()[-1]
        if not line.startswith("//"):
            break
    return None


def _shown(gates: tuple[Gate, ...], flat: bool) -> tuple[Gate, ...]:
    return expand(gates) if flat else gates


def _program_head(gates: tuple[Gate, ...], wires: int, flat: bool) -> list[str]:
    lines = ["OPENQASM 3.0;", 'include "stdgates.inc";']
    if not flat:
        used = {gate.name for gate in gates}
        lines += [_definition(name) for name, kind in GATES.items() if kind.body and name in used]
    lines.append(f"qubit[{wires}] {REGISTER};")
    return lines


def _declaration_place(lines: list[str]) -> int:
    return next(i for i, line in enumerate(lines) if line.startswith("qubit[")) + 1


def _definition(name: str) -> str:
    operands = "abcd"[: GATES[name].wires]
    body = " ".join(_line(gate, operands) for gate in GATES[name].body)
    return f"gate {name} {', '.join(operands)} {{ {body} }}"


def _line(gate: Gate, operands: str | None = None) -> str:
    angles = f"({', '.join(repr(float(a)) for a in gate.angles)})" if gate.angles else ""
    wires = ", ".join(operands[w] if operands else f"{REGISTER}[{w}]" for w in gate.wires)
    return f"{gate.name}{angles} {wires};"


def _measured(watched: tuple[int, ...]) -> list[str]:
    return [f"{SYNDROME}[{i}] = measure {REGISTER}[{wire}];" for i, wire in enumerate(watched)]


def _with_header(role: str, lines: list[str], encoder: Encoder, policy: Policy, heading: Heading) -> str:
    body = "\n".join(lines) + "\n"

    def listed(wires: tuple[int, ...]) -> str:
        return ", ".join(map(str, wires)) if wires else "none"

    letters = f"{heading.block} letter{'s' if heading.block != 1 else ''} of {heading.letter_qubits} qubit"
    header = [
        f"// {role} of source {heading.source}, revision {heading.revision}",
        f"// block: {letters}{'s' if heading.letter_qubits != 1 else ''}",
        f"// kept wires: {listed(encoder.kept)}",
        f"// trash wires: {listed(encoder.trash)}",
        f"// scratch wires: {listed(encoder.scratch)}",
        f"// failure policy: {policy}",
        f"// digest: sha256 {program_digest(body)}",
    ]
    return "\n".join(header) + "\n" + body
