"""The worksheet: every formula as it was used, with its inputs, result and references."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields, is_dataclass
from functools import cache
from inspect import getdoc, signature
from typing import Any, TypeVar

from millreason.trace import Calculation, Plain

Result = TypeVar("Result")


@dataclass
class Worksheet:
    """Runs formulas and remembers each use; the records are made only when they are wanted."""

    uses: list[tuple[str, Callable[..., Any], tuple[Any, ...], Any, str]] = field(default_factory=list)

    def use(self, result_of: str, unit: str, formula: Callable[..., Result], *inputs: Any) -> Result:
        """Run a formula on its inputs and remember it."""
        result = formula(*inputs)
        self.uses.append((result_of, formula, inputs, result, unit))
        return result

    def calculations(self) -> list[Calculation]:
        """Return every use as a record."""
        return [
            Calculation(
                result_of,
                _name(formula),
                _named(formula, inputs),
                _shown(result),
                unit,
                list(references(formula)),
            )
            for result_of, formula, inputs, result, unit in self.uses
        ]


@cache
def references(formula: Callable[..., Any]) -> tuple[str, ...]:
    """Return the references in a formula's docstring."""
    lines = (getdoc(formula) or "").splitlines()
    if "References" not in lines:
        return ()
    tail = lines[lines.index("References") + 2 :]
    return tuple(line.strip().lstrip("- ").removeprefix(".. ").strip() for line in tail if line.strip())


def _name(formula: Callable[..., Any]) -> str:
    return f"{formula.__module__.rsplit('.', 1)[-1]}.{formula.__name__}"


def _named(formula: Callable[..., Any], inputs: tuple[Any, ...]) -> dict[str, Plain]:
    return {name: _shown(value) for name, value in zip(signature(formula).parameters, inputs, strict=False)}


def _shown(value: Any) -> Plain:
    if is_dataclass(value) and not isinstance(value, type):
        return "; ".join(f"{entry.name} {_text(getattr(value, entry.name))}" for entry in fields(value))
    if isinstance(value, Mapping):
        return "; ".join(f"{name} {_text(entry)}" for name, entry in value.items())
    if isinstance(value, tuple | list):
        return "; ".join(_text(entry) for entry in value)
    return value  # type: ignore[no-any-return]


def _text(value: Any) -> str:
    if isinstance(value, float):
        return f"{value:.6g}"
    if isinstance(value, tuple):
        return f"({', '.join(_text(entry) for entry in value)})"
    return str(value)
