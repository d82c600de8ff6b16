"""YAML with line numbers: strict scalars, no repeated keys, no aliases, bounded size and depth."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path
from typing import Any, TypeVar

import yaml
from pydantic import BaseModel, ValidationError

from millreason.errors import DataError, Finding, did_you_mean

MAX_BYTES = 4_000_000
MAX_DEPTH = 24

Key = tuple[str | int, ...]
Model = TypeVar("Model", bound=BaseModel)

_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
_NUMBER = re.compile(r"[-+]?(0|[1-9]\d*)(\.\d+)?([eE][-+]?\d+)?\Z")
_WORDS: dict[str, Any] = {
    "true": True,
    "false": False,
    "yes": True,
    "no": False,
    "null": None,
    "~": None,
    "": None,
}


@dataclass(frozen=True)
class Document:
    """The content of one YAML file as plain Python values, with the line of every entry."""

    name: str
    data: Any
    lines: Mapping[Key, int] = field(repr=False)

    def line(self, key: Key) -> int:
        """Return the line of an entry, or of its nearest parent that has one."""
        while key and key not in self.lines:
            key = key[:-1]
        return self.lines.get(key, 1)

    def finding(self, key: Key, message: str, label: str | None = None) -> Finding:
        """Return a finding located at an entry of this document."""
        shown = label if label is not None else ".".join(str(part) for part in key)
        return Finding(self.name, self.line(key), shown or "file", message)


def read_yaml(path: Path, name: str | None = None) -> Document:
    """Read a YAML file.

    Raises
    ------
    DataError
        if it cannot be read, is too large or too deep, repeats a key, or uses aliases or tags.
    """
    shown = name or path.name
    try:
        raw = path.read_bytes()
    except OSError as problem:
        raise DataError([Finding(shown, 1, "file", f"cannot be read: {problem.strerror}.")]) from problem
    try:
        return parse_yaml(raw.decode("utf-8-sig"), shown)
    except UnicodeDecodeError as problem:
        message = f"is not UTF-8 text (byte {problem.start}). Save it as UTF-8."
        raise DataError([Finding(shown, 1, "file", message)]) from problem


def parse_yaml(text: str, name: str) -> Document:
    """Parse YAML text; see `read_yaml`."""
    if len(text) > MAX_BYTES:
        message = f"has {len(text)} characters; at most {MAX_BYTES} are read. Split it into several files."
        raise DataError([Finding(name, 1, "file", message)])
    return _Reader(text, name).document()


class _Reader:
    """Builds plain values from the parser's events, so that depth and aliases are seen before they cost."""

    def __init__(self, text: str, name: str) -> None:
        self._text = text
        self._name = name
        self._lines: dict[Key, int] = {}
        self._findings: list[Finding] = []

    def document(self) -> Document:
        try:
            data = self._document()
        except yaml.MarkedYAMLError as problem:
            mark = problem.problem_mark or problem.context_mark
            said = " ".join(part for part in (problem.context, problem.problem) if part)
            self._add(mark.line + 1 if mark else 1, "file", f"is not readable as YAML: {said}.")
        except yaml.YAMLError as problem:
            self._add(1, "file", f"is not readable as YAML: {problem}.")
        if self._findings:
            raise DataError(self._findings)
        return Document(self._name, data, self._lines)

    @cached_property
    def _events(self) -> Iterator[yaml.Event]:
        return iter(yaml.parse(self._text, Loader=_LOADER))

    def _document(self) -> Any:
        data: Any = None
        documents = 0
        for event in self._events:
            if isinstance(event, yaml.DocumentStartEvent):
                documents += 1
                if documents > 1:
                    self._stop(event, "file", "holds more than one YAML document; only one is read. Split it.")
                data = self._value(next(self._events), ())
        return data

    def _value(self, event: yaml.Event, key: Key) -> Any:
        line = _line(event)
        self._lines.setdefault(key, line)
        shown = ".".join(str(part) for part in key) or "file"
        if isinstance(event, yaml.AliasEvent) or getattr(event, "anchor", None):
            self._stop(event, shown, "uses an anchor or alias (& or *), which is not read here. Write it out.")
        if getattr(event, "tag", None) and not (
            isinstance(event, yaml.ScalarEvent) and getattr(event, "tag", None) == "!"
        ):
            self._stop(event, shown, f"has the tag {getattr(event, 'tag', '')!r}, which is not read here. Remove it.")
        if len(key) > MAX_DEPTH:
            self._stop(event, shown, f"is nested deeper than {MAX_DEPTH} levels.")
        if isinstance(event, yaml.ScalarEvent):
            return self._scalar(event, shown)
        if isinstance(event, yaml.SequenceStartEvent):
            return self._sequence(key)
        return self._mapping(key)

    def _sequence(self, key: Key) -> list[Any]:
        items: list[Any] = []
        while not isinstance(event := next(self._events), yaml.SequenceEndEvent):
            items.append(self._value(event, (*key, len(items))))
        return items

    def _mapping(self, key: Key) -> dict[str, Any]:
        entries: dict[str, Any] = {}
        while not isinstance(event := next(self._events), yaml.MappingEndEvent):
            if not isinstance(event, yaml.ScalarEvent):
                raise self._stopped(event, ".".join(map(str, key)), "has a key that is not a plain word.")
            name = str(event.value)
            line = _line(event)
            inner = (*key, name)
            if name in entries:
                first = self._lines[inner]
                self._add(line, ".".join(map(str, inner)), f"is written twice (first in line {first}). Keep one.")
            else:
                self._lines[inner] = line
            value = self._value(next(self._events), inner)
            entries.setdefault(name, value)
        return entries

    def _scalar(self, event: yaml.ScalarEvent, shown: str) -> Any:
        text = event.value
        if event.style:  # quoted or block text
            return text
        if text in _WORDS:
            return _WORDS[text]
        if not _NUMBER.match(text):
            return text
        if re.search(r"[.eE]", text):
            number = float(text)
            if number in (float("inf"), float("-inf")):
                self._add(_line(event), shown, f"{text} is too large for a number.")
            return number
        if len(text) > 18:
            self._add(_line(event), shown, f"{text} is too large for a number. Quote it if it is text.")
            return text
        return int(text)

    def _add(self, line: int, label: str, message: str) -> None:
        self._findings.append(Finding(self._name, line, label, message))

    def _stop(self, event: yaml.Event, label: str, message: str) -> None:
        raise self._stopped(event, label, message)

    def _stopped(self, event: yaml.Event, label: str, message: str) -> DataError:
        self._add(_line(event), label, message)
        return DataError(self._findings)


def _line(event: yaml.Event) -> int:
    return event.start_mark.line + 1 if event.start_mark is not None else 1


def read_model(document: Document, model: type[Model]) -> Model:
    """Validate a document against a pydantic model, turning each problem into a located finding."""
    try:
        return model.model_validate(document.data)
    except ValidationError as problem:
        raise DataError(_finding(document, error, model) for error in problem.errors()) from None


def _finding(document: Document, error: Any, model: type[BaseModel]) -> Finding:
    key: Key = tuple(part for part in error["loc"] if not (isinstance(part, str) and part.startswith("function-")))
    if error["type"] == "extra_forbidden":
        known = _fields_at(model, key[:-1])
        listed = f" Allowed: {', '.join(sorted(known))}." if known else ""
        return document.finding(key, f"unknown key.{did_you_mean(str(key[-1]), known)}{listed}")
    if error["type"] == "missing":
        return document.finding(key, "is missing. Add it.")
    found = error.get("input")
    shown = f" Found: {found!r}." if not isinstance(found, dict | list) else ""
    return document.finding(key, f"{error['msg']}.{shown}")


def _fields_at(model: type[BaseModel], key: Key) -> list[str]:
    """Return the field names of the model that lies at a key below `model`, as far as it can be told."""
    current: Any = model
    for part in key:
        if not (isinstance(current, type) and issubclass(current, BaseModel)) or isinstance(part, int):
            continue
        info = current.model_fields.get(part)
        current = _inner_model(info.annotation) if info is not None else None
    return list(current.model_fields) if isinstance(current, type) and issubclass(current, BaseModel) else []


def _inner_model(annotation: Any) -> Any:
    """Return the model inside an annotation such as list[Model] or Model | None."""
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    for argument in getattr(annotation, "__args__", ()):
        found = _inner_model(argument)
        if found is not None:
            return found
    return None
