"""Where a value comes from: sources, bases, and the check that every label leads to one."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Literal, Self, TypeVar

from pydantic import BaseModel, ConfigDict, Field, model_validator

from millreason.errors import DataError, Finding, did_you_mean
from millreason.yaml_source import Document, Key

SHOP_BASIS = "shop"

Item = TypeVar("Item")
Many = Annotated[tuple[Item, ...], Field(strict=False)]
Text = Annotated[str, Field(min_length=1)]
SourceKind = Literal[
    "standard",
    "handbook",
    "textbook",
    "paper",
    "law",
    "trade_press",
    "web_table",
    "examination",
    "manual",
]
BasisKind = Literal["checked", "recalled", "common_practice", "derived", "invented", "shop"]


class Record(BaseModel):
    """A piece of knowledge: strict, frozen, no unknown keys."""

    model_config = ConfigDict(strict=True, frozen=True, extra="forbid")


class Source(Record):
    """A published work that values and rules are cited from."""

    id: Annotated[str, Field(pattern=r"^[a-z0-9][a-z0-9-]*$")]
    kind: SourceKind
    author: Text
    title: Text
    edition: str | None = None
    year: int | None = None
    note: str | None = None


class Citation(Record):
    """A place in a source, and whether its text was seen or is quoted from memory."""

    source: Text
    where: Text
    seen: Literal["checked", "recalled"]


class Basis(Record):
    """What a value rests on: exactly one of the four fields, and an optional note."""

    cited: Citation | None = None
    common_practice: str | None = None
    derived: str | None = None
    invented: str | None = None
    note: str | None = None

    @model_validator(mode="after")
    def _exactly_one(self) -> Self:
        given = [
            name for name in ("cited", "common_practice", "derived", "invented") if getattr(self, name) is not None
        ]
        if len(given) != 1:
            found = ", ".join(given) or "none"
            raise ValueError(f"give exactly one of cited, common_practice, derived, invented (found: {found})")
        return self

    @property
    def kind(self) -> BasisKind:
        """The kind that is counted and printed."""
        if self.cited is not None:
            return self.cited.seen
        if self.common_practice is not None:
            return "common_practice"
        return "derived" if self.derived is not None else "invented"

    @property
    def remark(self) -> str:
        """Where in the source, or the remark that goes with the value."""
        if self.cited is not None:
            return self.cited.where
        return self.common_practice or self.derived or self.invented or ""


Bases = Mapping[str, Basis]


class KnowledgeFile(Record):
    """What every knowledge file has: labelled bases that its entries point to."""

    bases: dict[str, Basis] = Field(default_factory=dict)


def labels(data: Any, key: Key = ()) -> Iterator[tuple[Key, str]]:
    """Yield the place and the label of every `basis:` below a value, and of every entry of a `basis_of:`."""
    if isinstance(data, dict):
        for name, value in data.items():
            if name == "basis" and isinstance(value, str):
                yield (*key, name), value
            elif name == "basis_of" and isinstance(value, dict):
                yield from (((*key, name, field), label) for field, label in value.items())
            elif isinstance(value, dict | list):
                yield from labels(value, (*key, name))
    elif isinstance(data, list):
        for index, value in enumerate(data):
            if isinstance(value, dict | list):
                yield from labels(value, (*key, index))


def check_bases(document: Document, bases: Bases, sources: Mapping[str, Source], shop: bool = False) -> None:
    """Check that every label and every cited source of a knowledge file exists.

    Raises
    ------
    DataError
        with every label or source that leads nowhere.
    """
    known = [*bases, SHOP_BASIS] if shop else list(bases)
    findings = [
        document.finding(key, f"unknown basis {label!r}.{did_you_mean(label, known)} Labels are under 'bases:'.")
        for key, label in labels(document.data)
        if label not in known
    ]
    findings += [
        _unknown_source(document, name, basis, sources) for name, basis in bases.items() if not _known(basis, sources)
    ]
    if findings:
        raise DataError(findings)


def _known(basis: Basis, sources: Mapping[str, Source]) -> bool:
    return basis.cited is None or basis.cited.source in sources


def _unknown_source(document: Document, name: str, basis: Basis, sources: Mapping[str, Source]) -> Finding:
    found = basis.cited.source if basis.cited else ""
    message = f"unknown source {found!r}.{did_you_mean(found, sources)} Sources are in knowledge/sources.yaml."
    return document.finding(("bases", name, "cited", "source"), message)


def count_kinds(document: Document, bases: Bases, shop: bool = False) -> Counter[BasisKind]:
    """Count the values of a file by the kind of their basis.

    An entry without numbers counts as one; an entry of a shop that names no basis is the shop's own.
    """
    kinds: Counter[BasisKind] = Counter()
    for label, values in _weights(document.data, shop):
        kinds[bases[label].kind if label in bases else "shop"] += values
    return kinds


def _weights(data: Any, shop: bool) -> Iterator[tuple[str, int]]:
    """Yield every label that is used below a value, with how many values stand on it."""
    if isinstance(data, dict):
        own = data.get("basis_of", {})
        yield from ((label, 1) for label in own.values())
        if shop and "id" in data and not own:
            data = {"basis": SHOP_BASIS, **data}
        if isinstance(data.get("basis"), str):
            numbers = sum(_numbers(value) for name, value in data.items() if name not in own)
            apart = sum(1 for name in own if name not in data)
            yield data["basis"], max(numbers - apart, 1)
        data = list(data.values())
    if isinstance(data, list):
        for value in data:
            yield from _weights(value, shop)


def _numbers(value: Any) -> int:
    """Return how many values stand on an entry's own basis; a list counts once, a group with its own not."""
    if isinstance(value, dict):
        return 0 if "basis" in value else sum(_numbers(inner) for inner in value.values())
    if isinstance(value, list):
        return int(any(_numbers(inner) for inner in value))
    return int(isinstance(value, int | float))


def cited_sources(bases: Bases) -> frozenset[str]:
    """Return the ids of the sources that bases cite."""
    return frozenset(basis.cited.source for basis in bases.values() if basis.cited is not None)
