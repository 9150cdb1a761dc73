"""OpenQASM 3 text to a Program.

The project's own reader takes the part of the language that encoders are written in (standard gates, gate
definitions, measure, reset, `if` on bits) at a few microseconds a statement; whatever it does not know goes
to Qiskit's importer, so that any text the importer reads can be checked. A gate's action is computed from
its definition's body, never from its name.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import lru_cache

import numpy as np

from encoder_forge.qasm.expressions import evaluate
from encoder_forge.qasm.importer import import_program
from encoder_forge.qasm.program import Apply, Measure, Operation, Program, Reset, When
from encoder_forge.qasm.stdgates import STANDARD_GATES, TWO_QUBIT_COUNT

_COMMENT = re.compile(r"//[^\n]*|/\*.*?\*/", re.DOTALL)
_STATEMENT = re.compile(r"\s*([^;{}]*)([;{}])")
_CALL = re.compile(r"([A-Za-z_]\w*)\s*(?:\((.*)\))?\s*(.*)", re.DOTALL)
_DECLARE = re.compile(r"(qubit|bit)\s*(?:\[\s*(\d+)\s*\])?\s+([A-Za-z_]\w*)")
_DEFINE = re.compile(r"gate\s+([A-Za-z_]\w*)\s*(?:\(([^)]*)\))?\s*([\w\s,]+)")
_MEASURE = re.compile(r"(?:([\w\[\]\s]+?)\s*=\s*)?measure\s+([\w\[\]\s]+?)(?:\s*->\s*([\w\[\]\s]+))?")
_CONDITION = re.compile(r"(!?)\s*([A-Za-z_]\w*)\s*(?:\[\s*(\d+)\s*\])?\s*(?:==\s*(\d+|true|false))?")
_OPERAND = re.compile(r"\s*([A-Za-z_]\w*)\s*(?:\[\s*(\d+)\s*\])?\s*")
_MAX_REGISTER = 1 << 16


class _UnknownError(Exception):
    """Text outside the part of the language that this reader knows."""


@dataclass(slots=True)
class _Definition:
    angles: tuple[str, ...]
    operands: tuple[str, ...]
    body: list[tuple[str, tuple[str, ...], tuple[int, ...]]] = field(default_factory=list)


def read_program(text: str, name: str = "text") -> Program:
    """Read OpenQASM 3 text.

    Parameters
    ----------
    text : str
    name : str
        What to call the text in a complaint, usually its file name.

    Returns
    -------
    Program

    Raises
    ------
    InputError
        If neither this reader nor the importer can read it.
    """
    try:
        return _Reader(text).read()
    except (_UnknownError, ValueError, RecursionError):
        return import_program(text, name)


class _Reader:
    def __init__(self, text: str) -> None:
        self.text = _COMMENT.sub(" ", text)
        self.qubits: dict[str, tuple[int, ...]] = {}
        self.bits: dict[str, tuple[int, ...]] = {}
        self.definitions: dict[str, _Definition] = {}
        self.standard = False

    def read(self) -> Program:
        statements = self._statements()
        if not statements or not re.fullmatch(r"OPENQASM\s+3(\.\d+)?", statements[0][0]):
            raise _UnknownError
        operations = self._block(iter(statements[1:]), top=True)
        return Program(
            wires=sum(len(w) for w in self.qubits.values()),
            bits=sum(len(b) for b in self.bits.values()),
            operations=tuple(operations),
            registers=dict(self.bits),
            reader="own",
        )

    def _statements(self) -> list[tuple[str, str]]:
        result, position = [], 0
        for match in _STATEMENT.finditer(self.text):
            if match.start() != position:
                raise _UnknownError
            result.append((match[1].strip(), match[2]))
            position = match.end()
        if self.text[position:].strip():
            raise _UnknownError
        return result

    def _block(self, statements, top: bool) -> list[Operation]:  # type: ignore[no-untyped-def]
        operations: list[Operation] = []
        for head, end in statements:
            if end == "}":
                if top or head:
                    raise _UnknownError
                return operations
            if end == "{":
                if head.startswith("if"):
                    operations.append(self._when(head, self._block(statements, top=False)))
                elif top and head.startswith("gate"):
                    self._define(head, statements)
                else:
                    raise _UnknownError
            elif head.startswith("if"):
                condition, rest = _split_condition(head)
                operations.append(self._condition(condition, self._simple(rest, top=False)))
            else:
                operations.extend(self._simple(head, top))
        if not top:
            raise _UnknownError
        return operations

    def _simple(self, head: str, top: bool) -> list[Operation]:
        word = re.match(r"\w*", head)
        match word[0] if word else "":
            case "include":
                if not top or head.split(None, 1)[1].strip() not in ('"stdgates.inc"', "'stdgates.inc'"):
                    raise _UnknownError
                self.standard = True
                return []
            case "qubit" | "bit" if "=" not in head:
                if not top:
                    raise _UnknownError
                self._declare(head)
                return []
            case "barrier":
                return []
            case "reset":
                return [Reset(w) for w in self._operand(head[5:], self.qubits)]
        if "measure" in head:
            return self._measure(head)
        return self._call(head)

    def _declare(self, head: str) -> None:
        match = _DECLARE.fullmatch(head)
        if not match or match[3] in self.qubits or match[3] in self.bits:
            raise _UnknownError
        table = self.qubits if match[1] == "qubit" else self.bits
        first, size = sum(len(v) for v in table.values()), int(match[2] or 1)
        if not 0 < size <= _MAX_REGISTER:
            raise _UnknownError
        table[match[3]] = tuple(range(first, first + size))

    def _define(self, head: str, statements) -> None:  # type: ignore[no-untyped-def]
        match = _DEFINE.fullmatch(head)
        if not match or match[1] in self.definitions or self._is_standard(match[1]):
            raise _UnknownError
        angles = tuple(a.strip() for a in match[2].split(",")) if match[2] else ()
        operands = tuple(o.strip() for o in match[3].split(","))
        definition = _Definition(angles, operands)
        for inner, end in statements:
            if end == "}":
                if inner:
                    raise _UnknownError
                self.definitions[match[1]] = definition
                return
            if end == "{":
                raise _UnknownError
            call = _CALL.fullmatch(inner)
            if not call or not self._known(call[1]):
                raise _UnknownError
            wires = tuple(operands.index(o.strip()) for o in call[3].split(","))
            definition.body.append((call[1], _split_angles(call[2]), wires))
        raise _UnknownError

    def _is_standard(self, name: str) -> bool:
        return name == "U" or (self.standard and name in STANDARD_GATES)

    def _known(self, name: str) -> bool:
        return name in self.definitions or self._is_standard(name)

    def _when(self, head: str, body: list[Operation]) -> When:
        condition, rest = _split_condition(head)
        if rest:
            raise _UnknownError
        return self._condition(condition, body)

    def _condition(self, condition: str, body: list[Operation]) -> When:
        match = _CONDITION.fullmatch(condition.strip())
        if not match or match[2] not in self.bits or (match[1] and match[4]):
            raise _UnknownError
        bits = self._operand(condition if not match[1] and not match[4] else _bare(match), self.bits)
        if match[4] is None and len(bits) > 1:
            raise _UnknownError
        value = {None: 0 if match[1] else 1, "true": 1, "false": 0}.get(match[4])
        return When(bits, int(match[4]) if value is None else value, tuple(body))

    def _measure(self, head: str) -> list[Operation]:
        match = _MEASURE.fullmatch(head)
        target = match and (match[1] or match[3])
        if not match or not target or (match[1] and match[3]):
            raise _UnknownError
        wires, bits = self._operand(match[2], self.qubits), self._operand(target, self.bits)
        if len(wires) != len(bits):
            raise _UnknownError
        return [Measure(w, b) for w, b in zip(wires, bits, strict=True)]

    def _operand(self, text: str, table: Mapping[str, tuple[int, ...]]) -> tuple[int, ...]:
        match = _OPERAND.fullmatch(text)
        if not match or match[1] not in table:
            raise _UnknownError
        members = table[match[1]]
        if match[2] is None:
            return members
        if int(match[2]) >= len(members):
            raise _UnknownError
        return (members[int(match[2])],)

    def _call(self, head: str) -> list[Operation]:
        match = _CALL.fullmatch(head)
        if not match or not self._known(match[1]) or not match[3]:
            raise _UnknownError
        operands = [self._operand(o, self.qubits) for o in match[3].split(",")]
        size = max(len(o) for o in operands)
        if any(len(o) not in (1, size) for o in operands):
            raise _UnknownError
        angles = tuple(evaluate(a) for a in _split_angles(match[2]))
        result: list[Operation] = []
        for i in range(size):
            wires = tuple(o[i if len(o) > 1 else 0] for o in operands)
            if len(set(wires)) != len(wires):
                raise _UnknownError
            self._expand(match[1], angles, wires, result)
        return result

    def _expand(
        self, name: str, angles: tuple[float, ...], wires: tuple[int, ...], result: list[Operation]
    ) -> None:
        definition = self.definitions.get(name)
        if definition is None:
            standard = STANDARD_GATES[name]
            if (standard.qubits, standard.angles) != (len(wires), len(angles)):
                raise _UnknownError
            result.append(_standard_operation(name, angles, wires))
            return
        if (len(definition.operands), len(definition.angles)) != (len(wires), len(angles)):
            raise _UnknownError
        names = dict(zip(definition.angles, angles, strict=True))
        for inner, expressions, places in definition.body:
            values = tuple(evaluate(e, names) for e in expressions)
            self._expand(inner, values, tuple(wires[p] for p in places), result)


def _standard_operation(name: str, angles: tuple[float, ...], wires: tuple[int, ...]) -> Apply:
    count = TWO_QUBIT_COUNT.get(name, 1) if len(wires) > 1 else 0
    return Apply(name, _standard_matrix(name, angles), wires, count)


@lru_cache(maxsize=65536)
def _standard_matrix(name: str, angles: tuple[float, ...]) -> np.ndarray:
    matrix = np.asarray(STANDARD_GATES[name].matrix(*angles), dtype=complex)
    matrix.setflags(write=False)
    return matrix


def _split_angles(text: str | None) -> tuple[str, ...]:
    """Split at the commas outside parentheses."""
    if text is None or not text.strip():
        return ()
    parts, level, start = [], 0, 0
    for i, character in enumerate(text):
        level += (character == "(") - (character == ")")
        if character == "," and level == 0:
            parts.append(text[start:i].strip())
            start = i + 1
    parts.append(text[start:].strip())
    return tuple(parts)


def _split_condition(head: str) -> tuple[str, str]:
    """Split `if (condition) rest` into condition and rest."""
    match = re.fullmatch(r"if\s*\(([^()]*)\)\s*(.*)", head, re.DOTALL)
    if not match:
        raise _UnknownError
    return match[1], match[2]


def _bare(match: re.Match[str]) -> str:
    return match[2] if match[3] is None else f"{match[2]}[{match[3]}]"
