"""The knowledge on disk, read once and frozen, with a shop's own folder laid over it."""

from __future__ import annotations

import hashlib
import re
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path
from typing import Protocol, TypeVar

from millreason.cutters import CutterFamily, CutterOnHand, CuttersFile, ShopCuttersFile
from millreason.errors import DataError, Finding, MillreasonError, did_you_mean
from millreason.machines import Interface, InterfacesFile, Machine, MachinesFile
from millreason.practice import Fluid, PracticeFile, PracticeValue, RuleOut, Strength, StrengthsFile
from millreason.provenance import (
    Basis,
    BasisKind,
    KnowledgeFile,
    Many,
    Record,
    Source,
    check_bases,
    cited_sources,
    count_kinds,
)
from millreason.yaml_source import Document, read_model, read_yaml

File = TypeVar("File", bound=KnowledgeFile)


class _HasId(Protocol):
    @property
    def id(self) -> str: ...


Entry = TypeVar("Entry", bound=_HasId)


class SourcesFile(Record):
    """knowledge/sources.yaml."""

    sources: Many[Source]


def data_root() -> Path:
    """Return the folder that holds knowledge/ and rules/: in the package, or the root of a checkout."""
    package = Path(__file__).resolve().parent
    inside = package / "data"
    return inside if inside.is_dir() else package.parent.parent


@dataclass(frozen=True)
class LoadedFile:
    """One file that was read: where it lies, whether it is a shop's, and its bases."""

    document: Document
    bases: Mapping[str, Basis]
    shop: bool = False


@dataclass(frozen=True)
class Knowledge:
    """Everything that was read from knowledge/ and from a shop's folder."""

    sources: Mapping[str, Source]
    strengths: Mapping[str, Strength]
    rule_out: RuleOut
    interfaces: Mapping[str, Interface]
    machines: Mapping[str, Machine]
    practice: Mapping[str, PracticeValue]
    fluids: Mapping[str, Fluid]
    cutters: CuttersFile
    on_hand: Mapping[str, CutterOnHand]
    from_shop: frozenset[str]
    files: Mapping[str, LoadedFile]
    root: Path = field(repr=False)
    shop: Path | None = field(default=None, repr=False)

    @cached_property
    def content_hash(self) -> str:
        """SHA-256 over the names and contents of all files of knowledge/, rules/ and the shop's folder."""
        digest = hashlib.sha256()
        for name, path in sorted(_all_files(self.root, self.shop)):
            digest.update(name.encode() + b"\0" + path.read_bytes().replace(b"\r\n", b"\n") + b"\0")
        return digest.hexdigest()

    def basis(self, file: str, label: str) -> Basis | None:
        """Return the basis that a label means in a file; None if it is the shop's own record."""
        return self.files[file].bases.get(label)

    def interface(self, written: str) -> Interface:
        """Return the interface that a person means.

        Raises
        ------
        MillreasonError
            if no interface has this name; the message lists near names.
        """
        plain = {_plain(name): identity for name, identity in self.interface_names.items()}
        found = plain.get(_plain(written))
        if found is None:
            hint = did_you_mean(written.casefold(), self.interface_names)
            known = ", ".join(self.interfaces)
            raise MillreasonError(f"unknown spindle interface {written!r}.{hint} Known: {known}.")
        return self.interfaces[found]

    @cached_property
    def interface_names(self) -> Mapping[str, str]:
        """Every spelling of an interface in lower case, with its id."""
        entries = self.interfaces.values()
        return {name.casefold(): entry.id for entry in entries for name in (entry.id, entry.title, *entry.aliases)}

    def provenance_counts(self) -> dict[BasisKind, int]:
        """Count the values by what they rest on; the shop's own are counted apart."""
        total: Counter[BasisKind] = Counter()
        for file in self.files.values():
            total.update(count_kinds(file.document, file.bases, file.shop))
        return dict(sorted(total.items()))

    def unused_sources(self, also: Iterable[str] = ()) -> tuple[str, ...]:
        """Return the sources that no knowledge file here cites, nor any of `also` (rules, other files)."""
        used = set(also).union(*(cited_sources(file.bases) for file in self.files.values()))
        return tuple(sorted(set(self.sources) - used))


def _plain(name: str) -> str:
    """Write an interface name in lower case without spaces, dots and dashes, as people vary them."""
    return re.sub(r"[\s.\-_]+", "", name.casefold())


def _all_files(root: Path, shop: Path | None) -> Iterable[tuple[str, Path]]:
    for folder in ("knowledge", "rules"):
        for path in (root / folder).rglob("*.yaml"):
            yield path.relative_to(root).as_posix(), path
    if shop is not None:
        for path in shop.rglob("*.yaml"):
            yield f"shop/{path.relative_to(shop).as_posix()}", path


class _Loader:
    """Reads files, checks their bases, and gathers every finding before it stops."""

    def __init__(self, root: Path, shop: Path | None, sources: Mapping[str, Source]) -> None:
        self.root = root
        self.shop = shop
        self.sources = sources
        self.files: dict[str, LoadedFile] = {}
        self.findings: list[Finding] = []

    def shipped(self, topic: str, model: type[File]) -> File | None:
        name = f"knowledge/{topic}.yaml"
        return self._read(self.root / name, name, model, shop=False)

    def of_shop(self, topic: str, model: type[File]) -> File | None:
        if self.shop is None or not (self.shop / f"{topic}.yaml").is_file():
            return None
        return self._read(self.shop / f"{topic}.yaml", shop_name(topic), model, shop=True)

    def _read(self, path: Path, name: str, model: type[File], *, shop: bool) -> File | None:
        try:
            document = read_yaml(path, name)
            content = read_model(document, model)
            check_bases(document, content.bases, self.sources, shop)
        except DataError as problem:
            self.findings.extend(problem.findings)
            return None
        self.files[name] = LoadedFile(document, content.bases, shop)
        return content

    def by_id(self, name: str, group: str, entries: Iterable[Entry]) -> dict[str, Entry]:
        """Return entries by id; a repeated id is a finding."""
        result: dict[str, Entry] = {}
        for index, entry in enumerate(entries):
            if entry.id in result:
                self.add(name, (group, index, "id"), f"{entry.id!r} is used twice. Give each entry its own id.")
            result[entry.id] = entry
        return result

    def add(self, name: str, key: tuple[str | int, ...], message: str) -> None:
        self.findings.append(self.files[name].document.finding(key, message))

    def stop_if_wrong(self) -> None:
        if self.findings:
            raise DataError(self.findings)


def shop_name(topic: str) -> str:
    """Return how a file of a shop's folder is named in findings and in the answer."""
    return f"shop/{topic}.yaml"


def load_sources(root: Path) -> dict[str, Source]:
    """Read knowledge/sources.yaml."""
    name = "knowledge/sources.yaml"
    document = read_yaml(root / name, name)
    result: dict[str, Source] = {}
    findings = []
    for index, entry in enumerate(read_model(document, SourcesFile).sources):
        if entry.id in result:
            findings.append(document.finding(("sources", index, "id"), f"{entry.id!r} is used twice. Keep one."))
        result[entry.id] = entry
    if findings:
        raise DataError(findings)
    return result


def load_knowledge(root: Path | None = None, shop: Path | None = None) -> Knowledge:
    """Read the knowledge under `root`, and lay a shop's machines and cutters over it.

    Raises
    ------
    DataError
        with every finding in every file.
    """
    base = root if root is not None else data_root()
    sources = load_sources(base)
    loader = _Loader(base, shop, sources)
    strengths = loader.shipped("strengths", StrengthsFile)
    interfaces = loader.shipped("interfaces", InterfacesFile)
    machines = loader.shipped("machines", MachinesFile)
    cutters = loader.shipped("cutters", CuttersFile)
    practice = loader.shipped("practice", PracticeFile)
    own_machines = loader.of_shop("machines", MachinesFile) or MachinesFile(machines=())
    own_cutters = loader.of_shop("cutters", ShopCuttersFile) or ShopCuttersFile()
    if strengths is None or interfaces is None or machines is None or cutters is None or practice is None:
        raise DataError(loader.findings)
    by_interface = loader.by_id("knowledge/interfaces.yaml", "interfaces", interfaces.interfaces)
    cutter_set = _cutters(loader, cutters, own_cutters)
    result = Knowledge(
        sources=sources,
        strengths=loader.by_id("knowledge/strengths.yaml", "strengths", strengths.strengths),
        rule_out=strengths.rule_out,
        interfaces=by_interface,
        machines=_machines(loader, machines, own_machines, by_interface),
        practice=practice.values,
        fluids=loader.by_id("knowledge/practice.yaml", "fluids", practice.fluids),
        cutters=cutter_set,
        on_hand=loader.by_id(shop_name("cutters"), "on_hand", own_cutters.on_hand),
        from_shop=_ids(own_machines.machines, own_cutters.families, own_cutters.on_hand),
        files=loader.files,
        root=base,
        shop=shop,
    )
    loader.stop_if_wrong()
    return result


def _ids(*groups: Iterable[_HasId]) -> frozenset[str]:
    return frozenset(entry.id for group in groups for entry in group)


def _machines(
    loader: _Loader, shipped: MachinesFile, own: MachinesFile, interfaces: Mapping[str, Interface]
) -> dict[str, Machine]:
    """Lay a shop's machines over the shipped ones, and check that every interface exists."""
    result: dict[str, Machine] = {}
    for name, file in (("knowledge/machines.yaml", shipped), (shop_name("machines"), own)):
        result |= loader.by_id(name, "machines", file.machines)
        for index, machine in enumerate(file.machines):
            if machine.interface not in interfaces:
                message = f"unknown interface {machine.interface!r}.{did_you_mean(machine.interface, interfaces)}"
                known = f" Interfaces are in knowledge/interfaces.yaml: {', '.join(interfaces)}."
                loader.add(name, ("machines", index, "interface"), message + known)
    return result


def _cutters(loader: _Loader, shipped: CuttersFile, own: ShopCuttersFile) -> CuttersFile:
    """Lay a shop's families over the shipped ones, and check that every body material exists."""
    families: dict[str, CutterFamily] = {}
    materials = [material.id for material in shipped.body_materials]
    for name, entries in (("knowledge/cutters.yaml", shipped.families), (shop_name("cutters"), own.families)):
        families |= loader.by_id(name, "families", entries)
        for index, family in enumerate(entries):
            for place, material in enumerate(family.body_materials):
                if material not in materials:
                    message = f"unknown body material {material!r}.{did_you_mean(material, materials)}"
                    loader.add(name, ("families", index, "body_materials", place), message)
    loader.stop_if_wrong()
    return shipped.model_copy(update={"families": tuple(families.values())})
