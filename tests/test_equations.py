"""Equations: each can be printed, its dimensions agree, and print and replay give its number."""

import ast
import importlib
import inspect
import math
import pkgutil
import re
import threading
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import splitcalc
from splitcalc.checks import ALL
from splitcalc.equations import REGISTRY, Equation, Line, at, recording, render
from splitcalc.equations.symbols import SYMBOLS, glyph
from splitcalc.logs.report import findings
from splitcalc.logs.search import finish, search
from splitcalc.machine.file import load
from splitcalc.units import Dimension, parse, registry

for module in pkgutil.walk_packages(splitcalc.__path__, "splitcalc."):
    importlib.import_module(module.name)  # an equation registers itself when its module is read

WORKSHEETS = Path(__file__).resolve().parents[1] / "worksheets"
DEMOS = ("machine.toml", "machine-si.toml")
EQUATIONS = dict(sorted(REGISTRY.items()))
EVERY = pytest.mark.parametrize("equation", EQUATIONS.values(), ids=EQUATIONS)

# What the walker may print, as functions of plain numbers.
PLAIN = {
    "pi": math.pi, "sqrt": math.sqrt, "sinh": math.sinh, "cosh": math.cosh, "tanh": math.tanh,
    "exp": math.exp, "abs": abs, "minimum": min, "maximum": max, "hypot": math.hypot,
}  # fmt: skip


def arguments(equation):
    return list(inspect.signature(equation.function).parameters)


def evaluated(node, names, functions=PLAIN):
    code = compile(ast.Expression(node), "<equation>", "eval")
    return eval(code, {"__builtins__": {}, **functions}, names)


# --- every equation -----------------------------------------------------------------------------


@EVERY
def test_an_equation_can_be_printed(equation):
    lines = render.statements(equation)
    assert lines[-1][0] == equation.gives
    assert equation.source
    assert equation.function.__module__.startswith("splitcalc.")
    for name in (*arguments(equation), *(name for name, _ in lines)):
        assert SYMBOLS[name].words


def test_every_symbol_is_used_and_has_a_glyph_of_its_own():
    used = {
        name
        for equation in EQUATIONS.values()
        for name in (*arguments(equation), *(name for name, _ in render.statements(equation)))
    }
    assert set(SYMBOLS) == used
    glyphs = [glyph(name) for name in SYMBOLS]
    assert len(set(glyphs)) == len(glyphs)


def pure(value):
    """The number in a quantity without dimension; pint refuses any other."""
    return value.m_as("") if hasattr(value, "m_as") else value


def quantity_functions():
    """The functions of `PLAIN` that an equation uses, for pint's quantities."""
    free = {name: lambda x, f=PLAIN[name]: f(pure(x)) for name in ("sinh", "cosh", "tanh", "exp")}
    return PLAIN | free | {"sqrt": lambda x: x**0.5, "hypot": lambda x, y: (x**2 + y**2) ** 0.5}


def dimensions_agree(equation):
    """Whether each step has the dimension of its symbol; pint raises where a sum has two."""
    units = {name: registry().Unit(SYMBOLS[name].dimension.si_unit) for name in SYMBOLS}
    names = {
        name: registry().Quantity(1.3 + number / 7, units[name])
        for number, name in enumerate(arguments(equation))
    }
    for name, node in render.statements(equation):
        value = evaluated(node, names, quantity_functions()) * registry().Quantity(1.0, "")
        if value.dimensionality != units[name].dimensionality:
            return False
        names[name] = value
    return True


@EVERY
def test_dimensions_agree(equation):
    assert dimensions_agree(equation)


def sum_of_two_kinds(*, F, e):
    return F + e


def moment_of_another_kind(*, F, e):
    return F / e


def exponential_of_a_length(*, s_l, nu):
    return nu * exp(s_l)  # noqa: F821  never called: only its source is read


def test_the_dimension_check_finds_what_is_wrong():
    import pint

    assert not dimensions_agree(Equation(moment_of_another_kind, "T", "wrong on purpose"))
    for function, gives in ((sum_of_two_kinds, "F"), (exponential_of_a_length, "nu")):
        with pytest.raises(pint.DimensionalityError):
            dimensions_agree(Equation(function, gives, "wrong on purpose"))


def branches(*, F):
    if F > 0:
        return F
    return -F


def calls_what_is_not_listed(*, F):
    return round(F)


def chooses(*, F, e):
    return F if e else -F


def unknown_argument(*, F, q_q):
    return F * q_q


def unknown_step(*, F):
    q_q = 2 * F
    return q_q


def unknown_operator(*, F, e):
    return F % e


@pytest.mark.parametrize(
    ("function", "told"),
    [
        (branches, "if F > 0"),
        (calls_what_is_not_listed, "round"),
        (chooses, "if e else"),
        (unknown_argument, "q_q"),
        (unknown_step, "q_q"),
        (unknown_operator, "%"),
    ],
)
def test_what_is_not_plain_is_refused(function, told):
    with pytest.raises(ValueError, match=told):
        render.statements(Equation(function, "F", "refused on purpose"))


# --- what is printed is what is computed ----------------------------------------------------------

BACK = {"·": "*", "−": "-", "^": "**", "√": "sqrt", "tan α": "tan_α", "tan β": "tan_β", "π": "pi"}


def reread(text):
    """A printed formula as Python again; the glyphs are good names as they stand."""
    for printed, typed in BACK.items():
        text = text.replace(printed, typed)
    return text


def value_of(text, names):
    spelled = {reread(glyph(name)): value for name, value in names.items()}
    return eval(reread(text), {"__builtins__": {}, **PLAIN, "min": min, "max": max}, spelled)


@EVERY
def test_the_printed_formula_gives_the_number_of_the_function(equation):
    rng = np.random.default_rng(7)
    for _ in range(20):
        # from 0.1 to 0.9 every root, quotient and exponential exists
        names = {name: float(rng.uniform(0.1, 0.9)) for name in arguments(equation)}
        expected = float(equation.function(**names))
        for name, node in render.statements(equation):
            names[name] = value_of(render._text(node, glyph), names)
        assert names[equation.gives] == pytest.approx(expected, rel=1e-12)


LEAVES = st.one_of(
    st.sampled_from(["F", "e", "kappa", "tan_alpha"]).map(lambda name: ast.Name(name)),
    st.integers(1, 9).map(lambda number: ast.Constant(number)),
)
OPERATORS = st.sampled_from([ast.Add(), ast.Sub(), ast.Mult(), ast.Div()])
EXPRESSIONS = st.recursive(
    LEAVES,
    lambda inner: st.one_of(
        st.builds(ast.BinOp, inner, OPERATORS, inner),
        st.builds(ast.BinOp, inner, st.just(ast.Pow()), st.integers(1, 3).map(ast.Constant)),
        st.builds(lambda operand: ast.UnaryOp(ast.USub(), operand), inner),
        st.builds(lambda part: ast.Call(ast.Name("abs"), [part], []), inner),
    ),
    max_leaves=8,
)


@settings(max_examples=300, deadline=None)
@given(EXPRESSIONS)
def test_the_walker_brackets_what_needs_it(node):
    names = {"F": 1.25, "e": -0.5, "kappa": 3.0, "tan_alpha": -0.75}
    typed = ast.fix_missing_locations(ast.parse(ast.unparse(node), mode="eval")).body
    try:
        expected = evaluated(typed, names)
    except (ZeroDivisionError, OverflowError):
        return
    assert value_of(render._text(typed, glyph), names) == pytest.approx(expected, rel=1e-12)


# --- the recorder ---------------------------------------------------------------------------------


def called(name):
    """The marked function, as the core calls it."""
    info = next(e for key, e in EQUATIONS.items() if key.endswith(f".{name}"))
    return getattr(importlib.import_module(info.function.__module__), name)


def test_nothing_is_recorded_outside():
    torque = called("st_venant_torque")
    with recording() as lines:
        pass
    assert torque(T=3.0, T_w=1.0) == 2.0
    assert lines == []
    with recording() as lines, pytest.raises(TypeError):
        torque(T=3.0, T_w=None)
    torque(T=3.0, T_w=1.0)
    assert lines == []


def test_lines_come_in_the_order_of_use_with_their_place():
    torque = called("st_venant_torque")
    with recording() as lines:
        torque(T=3.0, T_w=1.0)
        with at("rear pad"):
            torque(T=4.0, T_w=1.0)
        torque(T=5.0, T_w=1.0)
    assert [(line.values["T"], line.result, line.place) for line in lines] == [
        (3.0, 2.0, ""),
        (4.0, 3.0, "rear pad"),
        (5.0, 4.0, ""),
    ]
    assert all(line.equation is torque.equation for line in lines)


def test_a_recording_inside_another_keeps_its_own_lines():
    torque = called("st_venant_torque")
    with recording() as outer:
        torque(T=3.0, T_w=1.0)
        with recording() as inner:
            torque(T=4.0, T_w=1.0)
        torque(T=5.0, T_w=1.0)
    assert [line.values["T"] for line in outer] == [3.0, 5.0]
    assert [line.values["T"] for line in inner] == [4.0]


def test_another_thread_does_not_write_into_a_recording():
    torque = called("st_venant_torque")
    with recording() as lines:
        thread = threading.Thread(target=torque, kwargs={"T": 3.0, "T_w": 1.0})
        thread.start()
        thread.join()
    assert lines == []


def test_steps_inside_an_equation_are_those_of_the_run():
    with recording() as lines:
        called("web_spring")(E=np.array([[2e11]]), nu=0.3, t_w=0.01, h_o=0.2)
    (D_name, _, D), (k_name, _, k_w) = render.steps(lines[0])
    assert (D_name, k_name) == ("D", "k_w")
    # plate stiffness E t^3 / (12 (1 - nu^2)): textbook, from memory
    assert pytest.approx(2e11 * 1e-6 / (12 * 0.91), rel=1e-14) == D
    assert k_w == lines[0].result
    text = render.lines_of_text(lines[0], "si")
    assert text[0] == "D = E·t_w^3/(12·(1 − ν^2))"
    assert text[2] == "  = 18.32\u202fkN·m"


# --- findings of the demos: replayed, and printed -------------------------------------------------


@pytest.fixture(scope="module", params=DEMOS)
def demo(request):
    machine = load(WORKSHEETS / request.param)
    numbers = machine.numbers()
    return numbers, [f for f in findings(ALL, numbers, machine.units) if f.applies]


FINAL = {"beam-first-yield": "sigma_v", "web-cross-bending": "sigma_q"}


def test_the_replay_gives_the_number_of_the_finding(demo):
    for finding in demo[1]:
        last = FINAL[finding.check.id]
        replayed = [line.result for line in finding.lines if line.equation.gives == last]
        assert max(map(float, replayed)) == pytest.approx(finding.demand, rel=1e-12)


def test_the_finding_is_at_least_what_the_search_saw(demo):
    # the search looks at fewer stations than the finding; how many fewer is tested with the search
    numbers, results = demo
    spots = {f.check.id: finish(search(f.check, numbers)) for f in results[::2]}
    for finding in results:
        seen = spots[finding.check.id][finding.set].value
        share = finding.demand / finding.capacity
        assert seen * (1 - 1e-12) <= share <= seen * 1.01


def test_every_step_of_a_replay_ends_in_its_own_result(demo):
    for finding in demo[1]:
        for line in finding.lines:
            assert render.steps(line)[-1][2] == pytest.approx(
                float(np.asarray(line.result).item()), rel=1e-12, abs=1e-300
            )


LEAF = re.compile(r"\(([^()]*)\)")  # the innermost brackets hold one number each


def half_digit(text):
    """Half a unit of the last of four significant digits, in the display unit."""
    mantissa = re.match(r"−?[\d.\u202f]*\d(?:×10[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)?", text)[0]
    value = abs(parse(mantissa, Dimension.NUMBER))
    return 0.5 * 10.0 ** (math.floor(math.log10(value)) - 3) / value if value else 0.0


def check_printed(node, inserted, result, name, names):
    """The inserted numbers give the printed result, within what their digits allow."""
    order = []
    render._text(node, lambda symbol: order.append(symbol) or symbol)
    texts = LEAF.findall(inserted)
    assert len(texts) == len(order)
    values, errors = [], []
    for symbol, text in zip(order, texts, strict=True):
        values.append(parse(text, SYMBOLS[symbol].dimension))
        errors.append(abs(values[-1]) * half_digit(text))
        assert abs(values[-1] - names[symbol]) <= errors[-1] * 1.0001  # rounding of the rounding
    formula = reread(LEAF.sub("X", inserted)).replace("X", "({})")

    def at_values(changed):
        text = formula.format(*(repr(value) for value in changed))
        return eval(text, {"__builtins__": {}, **PLAIN, "min": min, "max": max})

    middle = at_values(values)
    allowed = 0.0
    for k, error in enumerate(errors):
        moved = [
            at_values([v + sign * error * (k == j) for j, v in enumerate(values)])
            for sign in (-1, 1)
        ]
        allowed += max(abs(m - middle) for m in moved)
    printed = parse(result, SYMBOLS[name].dimension)
    allowed = 1.01 * allowed + abs(printed) * half_digit(result)  # 1 %: products of two errors
    assert abs(middle - printed) <= allowed + 1e-12 * abs(printed), (inserted, result)


@pytest.mark.parametrize("system", ["si", "us"])
def test_printed_numbers_give_the_printed_result(demo, system):
    _, results = demo
    seen = 0
    for finding in results:
        for line in finding.lines:
            names = {key: render.scalar(value) for key, value in line.values.items()}
            text = render.lines_of_text(line, system)[bool(line.place) :]
            triples = zip(text[::3], text[1::3], text[2::3], strict=True)
            for (name, node), triple in zip(render.statements(line.equation), triples, strict=True):
                # the US thousands comma, which the reader of units refuses
                symbolic, inserted, result = (
                    re.sub(r"(?<=\d),(?=\d{3})", "", part).removeprefix("  = ") for part in triple
                )
                assert symbolic == f"{glyph(name)} = {render._text(node, glyph)}"
                value = float(evaluated(node, names))
                check_printed(node, inserted, result, name, names)
                names[name] = value
                seen += 1
    assert seen > 50


def test_a_line_of_one_element_arrays_prints_like_one_of_floats():
    equation = called("st_venant_torque").equation
    plain = Line(equation, {"T": 3e3, "T_w": 1e3}, 2e3, "rear pad")
    boxed = Line(equation, {"T": np.array([[3e3]]), "T_w": np.array(1e3)}, np.array([[2e3]]), "")
    assert render.lines_of_text(plain, "si") == ["[rear pad]", *render.lines_of_text(boxed, "si")]
