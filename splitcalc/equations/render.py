"""Print an equation from its own source: symbols, numbers with units, result.

The walker keeps the order of the source, brackets what needs it, and prints constants as they
stand in the source. Values of assignments inside an equation are those of the run.
"""

from __future__ import annotations

import ast
import functools
import inspect
import textwrap
from collections.abc import Callable
from typing import Any

from splitcalc.equations import Equation, Line
from splitcalc.equations.symbols import SYMBOLS, glyph
from splitcalc.units import show

FUNCTIONS = {
    "sqrt": "√",
    "sinh": "sinh",
    "cosh": "cosh",
    "tanh": "tanh",
    "exp": "exp",
    "abs": "abs",
    "minimum": "min",
    "maximum": "max",
    "hypot": "hypot",
}
OPERATORS: dict[type[ast.operator], tuple[str, int]] = {
    ast.Add: (" + ", 1),
    ast.Sub: (" − ", 1),
    ast.Mult: ("·", 2),
    ast.Div: ("/", 2),
    ast.Pow: ("^", 4),
}
UNARY = 3
ATOM = 9


@functools.cache
def statements(equation: Equation) -> tuple[tuple[str, ast.expr], ...]:
    """(symbol, expression) for each assignment and the return; ValueError if it is not plain."""
    tree = ast.parse(textwrap.dedent(inspect.getsource(equation.function))).body[0]
    assert isinstance(tree, ast.FunctionDef)
    out: list[tuple[str, ast.expr]] = []
    for node in tree.body:
        if isinstance(node, ast.Expr) and isinstance(node.value, ast.Constant):
            continue  # the docstring
        if isinstance(node, ast.Assign) and isinstance(node.targets[0], ast.Name):
            out.append((node.targets[0].id, node.value))
        elif isinstance(node, ast.Return) and node.value is not None:
            out.append((equation.gives, node.value))
        else:
            raise ValueError(f"{equation.name}: {ast.unparse(node)} is not a straight line")
    for name, expression in out:
        if name not in SYMBOLS:
            raise ValueError(f"{equation.name}: {name} is not in the symbol table")
        _text(expression, lambda symbol: symbol)  # refuses what can't be printed
    return tuple(out)


def _text(node: ast.expr, leaf: Callable[[str], str], times: str = "·") -> str:
    return _render(node, leaf, times)[0]


def _render(node: ast.expr, leaf: Callable[[str], str], times: str) -> tuple[str, int]:
    """The text of an expression and how tightly it binds."""
    match node:
        case ast.Name(id=name):
            if name != "pi" and name not in SYMBOLS:
                raise ValueError(f"{name} is not in the symbol table")
            return ("π", ATOM) if name == "pi" else (leaf(name), ATOM)
        case ast.Constant(value=int() | float() as value):
            return f"{value:g}", ATOM
        case ast.UnaryOp(op=ast.USub(), operand=operand):
            return "−" + _bracket(operand, UNARY, leaf, times), UNARY
        case ast.BinOp(left=left, op=op, right=right):
            if type(op) not in OPERATORS:
                raise ValueError(f"{ast.unparse(node)} can't be printed")
            sign, level = OPERATORS[type(op)]
            # the right side of - / and ^ needs brackets already at the same level
            tight = level + isinstance(op, ast.Sub | ast.Div | ast.Pow)
            first = _bracket(left, level + isinstance(op, ast.Pow), leaf, times)
            return (
                first
                + (times if isinstance(op, ast.Mult) else sign)
                + _bracket(right, tight, leaf, times),
                level,
            )
        case ast.Call(func=ast.Name(id=name), args=args, keywords=[]) if name in FUNCTIONS:
            inside = ", ".join(_text(arg, leaf, times) for arg in args)
            return f"{FUNCTIONS[name]}({inside})", ATOM
    raise ValueError(f"{ast.unparse(node)} can't be printed")


def _bracket(node: ast.expr, level: int, leaf: Callable[[str], str], times: str) -> str:
    text, binds = _render(node, leaf, times)
    return f"({text})" if binds < level else text


def scalar(value: Any) -> float:
    """The one number in a value of any shape with one element."""
    return float(value if isinstance(value, float | int) else value.item())


def shown(symbol: str, value: float, system: str) -> str:
    return show(value, SYMBOLS[symbol].dimension, system, digits=4)  # type: ignore[arg-type]


@functools.cache
def _code(equation: Equation) -> tuple[tuple[str, Any], ...]:
    return tuple(
        (name, compile(ast.Expression(node), equation.name, "eval"))
        for name, node in statements(equation)
    )


def steps(line: Line) -> list[tuple[str, str, float]]:
    """(symbol, expression source, value) of each step, recomputed from the run's arguments."""
    names = {name: scalar(value) for name, value in line.values.items()}
    out = []
    for (name, code), (_, node) in zip(
        _code(line.equation), statements(line.equation), strict=True
    ):
        value = scalar(eval(code, line.equation.function.__globals__, names))
        names[name] = value
        out.append((name, ast.unparse(node), value))
    return out


def lines_of_text(line: Line, system: str) -> list[str]:
    """The equation as text: `symbol = formula`, `= numbers with units`, `= result`."""
    known = {name: scalar(value) for name, value in line.values.items()}
    out = [f"[{line.place}]"] if line.place else []
    for (name, node), (_, _, value) in zip(statements(line.equation), steps(line), strict=True):
        inserted = _text(
            node,
            lambda symbol, known=known: f"({shown(symbol, known[symbol], system)})",  # type: ignore[misc]
        )
        out.append(f"{glyph(name)} = {_text(node, glyph)}")
        out.append(f"  = {inserted}")
        out.append(f"  = {shown(name, value, system)}")
        known[name] = value
    return out
