"""YAML with lines: what is read, what is refused, and where each finding points."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from pydantic import BaseModel, ConfigDict

from millreason.errors import DataError, Finding
from millreason.yaml_source import MAX_BYTES, MAX_DEPTH, Document, parse_yaml, read_model, read_yaml


def findings(text: str) -> tuple[Finding, ...]:
    with pytest.raises(DataError) as caught:
        parse_yaml(text, "shop.yaml")
    return caught.value.findings


@pytest.mark.parametrize(
    ("written", "read"),
    [
        ("NO", "NO"), ("on", "on"), ("off", "off"), ("Yes", "Yes"), ("y", "y"), ("4:30", "4:30"), ("012", "012"),
        ("0x1F", "0x1F"), ("1_000", "1_000"), (".inf", ".inf"), ("2024-01-31", "2024-01-31"), ("1.5.2", "1.5.2"),
        ("1e3", 1000.0), ("1.5", 1.5), ("-3", -3), ("yes", True), ("no", False), ("true", True), ("~", None),
        ('"3"', "3"), ("'yes'", "yes"), ("GG25", "GG25"), ("3 in", "3 in"),
    ],
)  # fmt: skip
def test_a_scalar_is_what_it_looks_like(written: str, read: object) -> None:
    value = parse_yaml(f"a: {written}\n", "t").data["a"]
    assert value == read
    assert type(value) is type(read)


def test_a_repeated_key_is_found_with_both_lines() -> None:
    (finding,) = findings("work:\n  width: 3 in\n  stock: 1 mm\n  width: 4 in\n")
    assert finding.line == 4
    assert finding.field == "work.width"
    assert "first in line 2" in finding.message


def test_all_repeated_keys_are_found_at_once() -> None:
    assert [finding.line for finding in findings("a: 1\na: 2\nb: {c: 1, c: 2}\n")] == [2, 3]


@pytest.mark.parametrize(
    ("text", "word"),
    [
        ("a: &x 1\nb: *x\n", "anchor or alias"),
        ("a: !!python/object/apply:os.system [ls]\n", "tag"),
        ("a: !shop 3\n", "tag"),
        ("a: 1\n---\nb: 2\n", "more than one YAML document"),
        ("a: [1, 2\n", "not readable as YAML"),
        ("a: 1\n\tb: 2\n", "not readable as YAML"),
        ("? [1, 2]\n: 3\n", "not a plain word"),
        ("a: 1e999\n", "too large"),
        ("a: 99999999999999999999\n", "too large"),
    ],
)
def test_what_is_not_read_says_so(text: str, word: str) -> None:
    assert any(word in finding.message for finding in findings(text))


def test_an_alias_bomb_is_refused_before_it_grows() -> None:
    levels = "\n".join(f"l{n}: &l{n} [{', '.join([f'*l{n - 1}'] * 9)}]" for n in range(1, 12))
    begun = time.perf_counter()
    assert findings(f"l0: &l0 [x]\n{levels}\n")[0].line == 1
    assert time.perf_counter() - begun < 1


def test_a_deep_file_is_refused_without_a_crash() -> None:
    assert "nesting" in findings("a: " + "[" * 5000 + "]" * 5000)[0].message
    (finding,) = findings("a: " + "[" * 40 + "]" * 40)
    assert f"deeper than {MAX_DEPTH}" in finding.message
    assert parse_yaml("a: " + "[" * (MAX_DEPTH - 1) + "]" * (MAX_DEPTH - 1), "t").data


def test_a_huge_file_is_refused_unread() -> None:
    begun = time.perf_counter()
    (finding,) = findings("a: 1\n" * (MAX_BYTES // 5 + 1))
    assert "at most" in finding.message
    assert time.perf_counter() - begun < 1


def test_every_entry_knows_its_line() -> None:
    document = parse_yaml("work:\n  width: 1 mm\ncutters:\n  - id: A\n    teeth: 3\n", "t")
    assert document.line(("work", "width")) == 2
    assert document.line(("cutters", 0, "teeth")) == 5
    assert document.line(("cutters", 0, "kappa")) == 4
    assert document.line(("nowhere",)) == 1


def test_a_file_that_is_not_there_or_no_text_is_a_finding(tmp_path: Path) -> None:
    with pytest.raises(DataError, match=r"gone\.yaml:1: file: cannot be read"):
        read_yaml(tmp_path / "gone.yaml")
    (tmp_path / "raw.yaml").write_bytes(b"a: \xff\xfe")
    with pytest.raises(DataError, match="not UTF-8"):
        read_yaml(tmp_path / "raw.yaml")
    (tmp_path / "bom.yaml").write_bytes(b"\xef\xbb\xbfa: 1\n")
    assert read_yaml(tmp_path / "bom.yaml").data == {"a": 1}


class _Inner(BaseModel):
    model_config = ConfigDict(extra="forbid", strict=True)
    power_kw: float


class _Outer(BaseModel):
    model_config = ConfigDict(extra="forbid", strict=True)
    machines: list[_Inner]


def test_a_model_finds_every_fault_with_its_line() -> None:
    document = parse_yaml("machines:\n  - power_kw: 3.0\n  - powr_kw: 4\n  - power_kw: yes\n", "m.yaml")
    with pytest.raises(DataError) as caught:
        read_model(document, _Outer)
    lines = [(finding.line, finding.message) for finding in caught.value.findings]
    assert [line for line, _ in lines] == [3, 3, 4]
    assert any("Did you mean 'power_kw'?" in message for _, message in lines)
    assert any("is missing" in message for _, message in lines)
    assert "Found: True" in lines[2][1]


def test_an_empty_file_holds_nothing() -> None:
    assert parse_yaml("", "t") == Document("t", None, {})
