"""What an input is: its facts stand once, in the field's metadata, and reading is made from them.

A document is a tree of frozen dataclasses whose fields are made by `quantity`, `choice`, `words`
and `table` below. `read` turns the tables of a parsed file into such a tree or raises one
`InputError` that names every problem at once.
"""

from __future__ import annotations

import dataclasses
import difflib
import functools
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any, get_args

from splitcalc.units import Dimension, UnitError, parse, show

REQUIRED = "required"


@dataclass(frozen=True)
class Entry:
    """One number of a document: its SI value and the text it was typed as."""

    si: float
    text: str


@dataclass(frozen=True)
class Fact:
    """What is known about an input.

    words : what it is, in trade words
    dimension : its kind of quantity; None for text and choices
    low, high : allowed range, both ends included [SI]
    default : the text taken when nothing is typed; `REQUIRED`, or None: worked out from others
    reason : why that default
    tolerance : the usual scatter of the built machine, as text
    options : the allowed words of a choice
    """

    words: str
    dimension: Dimension | None = None
    low: float = float("-inf")
    high: float = float("inf")
    default: str | None = REQUIRED
    reason: str = ""
    tolerance: str = ""
    options: tuple[str, ...] = ()


@dataclass(frozen=True)
class Problem:
    """One thing wrong in a document: where, and what is allowed."""

    key: str
    message: str

    def __str__(self) -> str:
        return f"{self.key}: {self.message}"


class InputError(ValueError):
    """A document that can't be used; `problems` has them all."""

    def __init__(self, problems: list[Problem], what: str = "the machine file") -> None:
        self.problems = problems
        count = len(problems)
        head = f"{what} can't be used: {count} problem{'s' if count > 1 else ''}"
        super().__init__("\n  ".join([head, *map(str, problems)]))

    def _render_traceback_(self) -> list[str]:
        """What a notebook shows: the problems, without the calls that led to them."""
        return str(self).splitlines()


@functools.cache
def entry(text: str, dimension: Dimension) -> Entry:
    return Entry(parse(text, dimension), text)


def _field(fact: Fact) -> Any:
    if fact.default is REQUIRED:
        return field(metadata={"fact": fact})
    if fact.default is None or fact.dimension is None:
        return field(default=fact.default, metadata={"fact": fact})
    make = functools.partial(entry, fact.default, fact.dimension)  # read on first use
    return field(default_factory=make, metadata={"fact": fact})


def quantity(
    words: str,
    dimension: Dimension,
    low: float,
    high: float,
    *,
    default: str | None = REQUIRED,
    reason: str = "",
    tolerance: str = "",
) -> Any:
    """A field that holds a number with a unit. Range in SI, both ends allowed."""
    return _field(Fact(words, dimension, low, high, default, reason, tolerance))


def choice(words: str, *options: str, default: str | None = REQUIRED, reason: str = "") -> Any:
    """A field that holds one of a few words."""
    return _field(Fact(words, default=default, reason=reason, options=options))


def words(what: str, *, default: str | None = REQUIRED) -> Any:
    """A field that holds free text."""
    return _field(Fact(what, default=default))


def table(factory: Callable[[], Any] | None = None) -> Any:
    """A field that holds a nested table, or a list of them when `factory` is tuple."""
    return field() if factory is None else field(default_factory=factory)


def fact_of(item: dataclasses.Field[Any]) -> Fact | None:
    return item.metadata.get("fact")


def read_value(value: Any, fact: Fact) -> Any:
    """One value of a parsed file as its field wants it; ValueError says what is allowed."""
    if fact.dimension is None:
        if not isinstance(value, str):
            raise ValueError(f"found {found(value)}; text in quotes is wanted ({fact.words})")
        if fact.options and value not in fact.options:
            allowed = ", ".join(f'"{o}"' for o in fact.options)
            raise ValueError(f'found "{value}"; allowed: {allowed}{_nearest(value, fact.options)}')
        if len(value) > 10_000:
            raise ValueError(f"found {len(value)} letters; at most 10000 are allowed")
        return value
    if isinstance(value, int | float) and not isinstance(value, bool):
        value = str(value)
    if not isinstance(value, str):
        raise ValueError(f'found {found(value)}; wanted: {fact.words}, such as "{_example(fact)}"')
    try:
        out = entry(value, fact.dimension)
    except UnitError as error:
        raise ValueError(str(error)) from None
    if not fact.low <= out.si <= fact.high:
        raise ValueError(f'found "{value}"; {fact.words} must be {_range(fact, value)}')
    return out


def _example(fact: Fact) -> str:
    assert fact.dimension is not None
    return fact.dimension.example if fact.default in (REQUIRED, None) else str(fact.default)


def found(value: Any) -> str:
    """What stands in the file, in the words of the file's format."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, list):
        return "a list"
    text = f'"{value}"' if isinstance(value, str) else str(value)
    return text if len(text) <= 60 else text[:57] + "..."


def _range(fact: Fact, like: str) -> str:
    assert fact.dimension is not None
    us = any(word in like for word in ("in", "ft", '"', "'", "psi", "ksi", "lbf", "kip", "degF"))
    system: Any = "us" if us else "si"
    low, high = (show(v, fact.dimension, system, digits=4) for v in (fact.low, fact.high))
    if fact.high == float("inf"):
        return f"at least {low}"
    return f"{low} to {high}"


def _nearest(word: str, known: tuple[str, ...]) -> str:
    close = difflib.get_close_matches(word, known, n=1, cutoff=0.5)
    return f' - did you mean "{close[0]}"?' if close else ""


def _read_field(fact: Fact, value: Any, _: Any) -> Any:
    return read_value(value, fact)


def _read_list(conv: Any, name: str, value: Any, kind: Any) -> Any:
    if not isinstance(value, list):
        raise ValueError(
            f"found {found(value)}; a list is wanted, one table for each headed [[...{name}]]"
        )
    part: Any = get_args(kind)[0]
    return tuple(conv.structure(value, list[part]))


@functools.cache
def converter() -> Any:
    """cattrs, told how our fields are read. Imported here: reading is its only use."""
    import cattrs
    from cattrs.gen import make_dict_structure_fn, override

    out = cattrs.Converter(forbid_extra_keys=True, detailed_validation=True)

    def hook(cls: Any, conv: Any) -> Any:
        own: Any = {
            item.name: override(struct_hook=functools.partial(_read_field, fact))
            for item in dataclasses.fields(cls)
            if (fact := fact_of(item)) is not None
        }
        for item in dataclasses.fields(cls):
            if item.default_factory is tuple:
                own[item.name] = override(
                    struct_hook=functools.partial(_read_list, conv, item.name)
                )
        structure = make_dict_structure_fn(
            cls, conv, _cattrs_forbid_extra_keys=True, _cattrs_detailed_validation=True, **own
        )

        def checked(value: Any, kind: Any) -> Any:
            if not isinstance(value, Mapping):
                raise ValueError(f"found {found(value)}; a table is wanted")
            return structure(value, kind)

        return checked

    out.register_structure_hook_factory(dataclasses.is_dataclass, hook)
    return out


def read(cls: type, data: Mapping[str, Any]) -> Any:
    """A document of class `cls` from parsed tables.

    Raises
    ------
    InputError : with every problem, each with its key, what was found and what is allowed
    """
    import cattrs

    try:
        return converter().structure(data, cls)
    except cattrs.BaseValidationError as error:
        raise InputError(list(_problems(error, "", cls))) from None


def _problems(error: BaseException, path: str, cls: Any) -> Iterator[Problem]:
    """The leaves of cattrs' tree of errors, each with the key that a person typed."""
    import cattrs

    if isinstance(error, cattrs.BaseValidationError):
        for inner in error.exceptions:
            step = path
            for note in getattr(inner, "__notes__", ()):
                if isinstance(note, cattrs.AttributeValidationNote):
                    step = f"{path}.{note.name}".lstrip(".")
                elif isinstance(note, cattrs.IterableValidationNote):
                    step = f"{path}[{int(note.index) + 1}]"
            yield from _problems(inner, step, getattr(error, "cl", cls))
    elif isinstance(error, cattrs.ForbiddenExtraKeysError):
        known = tuple(f.name for f in dataclasses.fields(error.cl))
        for name in sorted(error.extra_fields):
            near = _nearest(name, known) or f"; known here: {', '.join(known)}"
            yield Problem(f"{path}.{name}".lstrip("."), f"unknown key{near}")
    elif isinstance(error, KeyError):
        name = error.args[0]
        yield Problem(path, f"missing; wanted: {_wanted(cls, name)}")
    else:
        yield Problem(path or "file", str(error))


def _wanted(cls: Any, name: str) -> str:
    for item in dataclasses.fields(cls):
        if item.name == name:
            fact = fact_of(item)
            if fact is None:
                return f"a table [{name}]"
            if fact.options:
                return f"{fact.words}: one of {', '.join(fact.options)}"
            if fact.dimension is None:
                return fact.words
            return f'{fact.words}, such as "{_example(fact)}"'
    return name


def walk(document: Any, prefix: str = "") -> Iterator[tuple[str, Fact, Any]]:
    """(dotted key, fact, value) of every input in a document, defaults included."""
    for item in dataclasses.fields(document):
        key, value, fact = f"{prefix}{item.name}", getattr(document, item.name), fact_of(item)
        if fact is not None:
            yield key, fact, value
        elif dataclasses.is_dataclass(value):
            yield from walk(value, f"{key}.")
        elif isinstance(value, tuple):
            for number, part in enumerate(value, start=1):
                yield from walk(part, f"{key}[{number}].")
