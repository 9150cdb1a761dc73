"""Constant angle expressions of OpenQASM 3: numbers, pi, parameters, + - * / ** and a few functions."""

from __future__ import annotations

import ast
import math
from collections.abc import Mapping
from functools import lru_cache

_CONSTANTS = {"pi": math.pi, "π": math.pi, "tau": math.tau, "τ": math.tau, "euler": math.e, "ℇ": math.e}
_FUNCTIONS = {
    "sin": math.sin, "cos": math.cos, "tan": math.tan, "arcsin": math.asin, "arccos": math.acos,
    "arctan": math.atan, "sqrt": math.sqrt, "exp": math.exp, "log": math.log,
}  # fmt: skip


def evaluate(text: str, names: Mapping[str, float] | None = None) -> float:
    """Evaluate a constant expression, in radians.

    Parameters
    ----------
    text : str
    names : mapping of str to float, optional
        Parameters of an enclosing gate definition.

    Raises
    ------
    ValueError
        For anything but arithmetic on numbers, known constants and given names, or a result that is not
        finite.

    >>> evaluate("-3*pi/4") == -3 * math.pi / 4
    True
    """
    try:
        value = _value(_parsed(text), names or {})
    except (SyntaxError, ZeroDivisionError, OverflowError, TypeError, RecursionError, MemoryError) as error:
        raise ValueError(f"cannot evaluate the angle {text!r}") from error
    if not math.isfinite(value):
        raise ValueError(f"the angle {text!r} is not finite")
    return value


@lru_cache(maxsize=4096)
def _parsed(text: str) -> ast.expr:
    return ast.parse(text.strip(), mode="eval").body


def _value(node: ast.expr, names: Mapping[str, float]) -> float:
    if isinstance(node, ast.Constant) and isinstance(node.value, int | float):
        return float(node.value)
    if isinstance(node, ast.Name):
        if node.id in names:
            return names[node.id]
        if node.id in _CONSTANTS:
            return _CONSTANTS[node.id]
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub | ast.UAdd):
        value = _value(node.operand, names)
        return -value if isinstance(node.op, ast.USub) else value
    if isinstance(node, ast.BinOp):
        return _binary(node, names)
    if (
        isinstance(node, ast.Call)
        and isinstance(node.func, ast.Name)
        and node.func.id in _FUNCTIONS
        and len(node.args) == 1
        and not node.keywords
    ):
        return _FUNCTIONS[node.func.id](_value(node.args[0], names))
    raise ValueError(f"cannot evaluate {ast.unparse(node)!r}")


def _integer(node: ast.expr) -> bool:
    if isinstance(node, ast.UnaryOp):
        return _integer(node.operand)
    if isinstance(node, ast.BinOp):
        return _integer(node.left) and _integer(node.right)
    return isinstance(node, ast.Constant) and isinstance(node.value, int)


def _binary(node: ast.BinOp, names: Mapping[str, float]) -> float:
    left, right = _value(node.left, names), _value(node.right, names)
    match node.op:
        case ast.Add():
            return left + right
        case ast.Sub():
            return left - right
        case ast.Mult():
            return left * right
        case ast.Div():
            if _integer(node.left) and _integer(node.right):
                # The language divides integers as integers; consumers disagree, so we do not guess.
                raise ValueError(f"{ast.unparse(node)!r} divides integers")
            return left / right
        case ast.Pow():
            power = left**right
            if isinstance(power, complex):
                raise ValueError("a power of a negative number is not real")
            return float(power)
    raise ValueError(f"cannot evaluate {ast.unparse(node)!r}")
