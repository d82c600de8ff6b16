"""Every formula tells what it computes: docstring and signature agree, with units, example and source."""

import doctest
import importlib
import inspect
import pkgutil
import re
from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest
import yaml

from millreason import formulas

SECTIONS = ("Parameters", "Returns", "Raises", "Notes", "Examples", "References")
NO_SOURCE = {"common practice", "own derivation"}
UNIT = re.compile(r"\[([^\]]+)\]")
UNITS = {
    "-", "mm", "um", "mm/min", "mm/m", "mm2", "mm3", "mm/s", "cm3/min", "m/min", "1/min", "min", "deg",
    "1/deg",
    "N", "N/mm", "N/mm2", "N.m", "N.mm/rad", "kW", "J/mm3", "kg", "kg/m3", "g.mm/kg", "money", "money/min",
}  # fmt: skip
SUFFIXES = {
    "mm": "mm", "deg": "deg", "n": "N", "kw": "kW", "rpm": "1/min", "nm": "N.m", "min": "min", "kg": "kg",
    "m_min": "m/min", "mm_min": "mm/min", "n_mm": "N/mm", "n_mm2": "N/mm2", "mm2": "mm2", "mm3": "mm3",
    "mm_m": "mm/m", "cm3_min": "cm3/min", "j_mm3": "J/mm3", "kg_m3": "kg/m3", "nmm_rad": "N.mm/rad",
    "mm_s": "mm/s", "per_min": "money/min",
}  # fmt: skip


def public_formulas() -> list[Callable[..., object]]:
    """Return each public formula once, from the module that defines it."""
    found = {}
    for info in pkgutil.iter_modules(formulas.__path__):
        module = importlib.import_module(f"millreason.formulas.{info.name}")
        if info.name.startswith("_"):
            continue
        for name, member in inspect.getmembers(module, inspect.isfunction):
            if member.__module__ == module.__name__ and not name.startswith("_"):
                found[f"{info.name}.{name}"] = member
    return [found[key] for key in sorted(found)]


def sections(formula: Callable[..., object]) -> dict[str, str]:
    """Split a numpydoc docstring; the text before the first section is called Summary."""
    parts = re.split(r"(?m)^(\w+)\n-{3,}\n", inspect.getdoc(formula) or "")
    return {"Summary": parts[0], **dict(zip(parts[1::2], parts[2::2], strict=True))}


def described_parameters(text: str) -> dict[str, str]:
    """Return the described parameters in order, each with its type and description."""
    found = re.split(r"(?m)^(\w+) : ", text)
    return dict(zip(found[1::2], found[2::2], strict=True))


FORMULAS = public_formulas()
NAMES = [f"{formula.__module__.rsplit('.', 1)[-1]}.{formula.__name__}" for formula in FORMULAS]
each_formula = pytest.mark.parametrize("formula", FORMULAS, ids=NAMES)


@cache
def known_sources() -> set[str]:
    text = (Path(__file__).parents[1] / "knowledge" / "sources.yaml").read_text(encoding="utf-8")
    return {source["id"] for source in yaml.safe_load(text)["sources"]}


def test_no_two_formulas_share_a_name():
    names = [formula.__name__ for formula in FORMULAS]
    assert len(names) > 50
    assert len(set(names)) == len(names)


@each_formula
def test_docstring_has_every_section_in_order(formula):
    assert tuple(sections(formula)) == ("Summary", *SECTIONS)
    assert all(text.strip() for text in sections(formula).values())


@each_formula
def test_parameters_match_the_signature_and_carry_units(formula):
    described = described_parameters(sections(formula)["Parameters"])
    assert list(described) == list(inspect.signature(formula).parameters)
    for name, text in described.items():
        units = UNIT.findall(text)
        assert units, f"{name} has no [unit]"
        assert set(units) <= UNITS, f"{name}: {units}"


@each_formula
def test_unit_in_a_name_is_the_unit_described(formula):
    for name, text in described_parameters(sections(formula)["Parameters"]).items():
        ends = [suffix for suffix in SUFFIXES if name.endswith(f"_{suffix}")]
        if ends:
            assert UNIT.findall(text) == [SUFFIXES[max(ends, key=len)]], name


@each_formula
def test_result_carries_a_unit(formula):
    units = UNIT.findall(sections(formula)["Returns"])
    assert units
    assert set(units) <= UNITS


@each_formula
def test_refusal_is_documented(formula):
    assert "OutOfRangeError" in sections(formula)["Raises"]


@each_formula
def test_example_runs_the_formula(formula):
    examples = doctest.DocTestParser().get_examples(inspect.getdoc(formula) or "")
    assert any(re.search(rf"\b{formula.__name__}\(", example.source) for example in examples)
    assert any(example.want for example in examples)


@each_formula
def test_references_are_known(formula):
    cited = [entry.strip() for entry in re.split(r"[,\n]", sections(formula)["References"]) if entry.strip()]
    assert cited
    unknown = set(cited) - NO_SOURCE - known_sources()
    assert not unknown, f"not in knowledge/sources.yaml: {sorted(unknown)}"
