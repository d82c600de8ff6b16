"""The material knowledge as read from its files: entries, families, force rows, speed rows, words."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from pathlib import Path
from typing import Any

from millreason.errors import DataError, Finding, did_you_mean
from millreason.hardness import HardnessKnowledge, check_bases, load_hardness
from millreason.material_records import (
    ChipForm,
    Family,
    FamilyFile,
    ForceFile,
    ForceRow,
    Group,
    Hazard,
    MaterialFile,
    MaterialRecord,
    NameSystem,
    SpeedFile,
    StateRecord,
    Trait,
    WordFile,
)
from millreason.yaml_source import Document, Key, read_model, read_yaml

# The label of entries that stand for a whole group of materials under a trade word.
GROUP_NAME = "group_name"


@dataclass(frozen=True)
class State:
    """A state of a material with everything resolved."""

    id: str
    hb_min: float
    hb_max: float
    force: str
    own_force: bool
    group: Group
    speed: str
    chip: ChipForm
    traits: tuple[Trait, ...]
    hb_basis: Mapping[str, Any] = field(repr=False, default_factory=dict)

    @property
    def hb_typical(self) -> float:
        """Middle of the hardness range [HB]."""
        return (self.hb_min + self.hb_max) / 2

    def distance(self, hb: float) -> float:
        """How far a hardness lies outside the range [HB]; 0 inside."""
        return max(self.hb_min - hb, hb - self.hb_max, 0.0)


@dataclass(frozen=True)
class Material:
    """One entry of the material knowledge."""

    id: str
    family: str
    names: Mapping[NameSystem, tuple[str, ...]]
    states: tuple[State, ...]
    shared_states: tuple[State, ...]
    hazards: tuple[Hazard, ...]
    is_group: bool
    names_basis: Mapping[str, Any] = field(repr=False)
    file: str = ""
    line: int = 0
    note: str = ""

    @property
    def name(self) -> str:
        """The name it is shown under: its first exact one."""
        return next(iter(self.exact_names))

    @property
    def exact_names(self) -> Iterator[str]:
        """All names that mean this entry and no other."""
        return (name for system, names in self.names.items() if system != "near" for name in names)


@dataclass(frozen=True)
class MaterialBook:
    """All material knowledge, checked and resolved."""

    materials: Mapping[str, Material]
    family_file: FamilyFile
    forces: Mapping[str, tuple[ForceRow, Mapping[str, Any]]]
    reference_chip_mm: float
    speeds: SpeedFile
    words: WordFile
    hardness: HardnessKnowledge

    @property
    def families(self) -> Mapping[str, Family]:
        """All families by id."""
        return self.family_file.families

    def family(self, material: Material) -> Family:
        """Return the family of a material."""
        return self.family_file.families[material.family]

    def groups(self, material: Material) -> tuple[Group, ...]:
        """Return every ISO 513 group a material can be in: its family's and its states'."""
        own = [*self.family(material).groups, *(state.group for state in (*material.states, *material.shared_states))]
        return tuple(dict.fromkeys(own))

    @cached_property
    def index(self) -> Any:
        """The index of words and names; see `material_search`."""
        from millreason.material_search import build_index

        return build_index(self)


_TABLE_FILES = ("families.yaml", "forces.yaml", "words.yaml")


def load_materials(root: Path, shop_folders: Sequence[Path] = ()) -> MaterialBook:
    """Read all material knowledge below a data root, with the `materials` folder of shops laid over it.

    Raises
    ------
    DataError
        with every finding of every file.
    """
    folder = root / "knowledge" / "materials"
    family_file = read_model(read_yaml(folder / "families.yaml", "knowledge/materials/families.yaml"), FamilyFile)
    force_document = read_yaml(folder / "forces.yaml", "knowledge/materials/forces.yaml")
    speed_document = read_yaml(root / "knowledge" / "speeds.yaml", "knowledge/speeds.yaml")
    words_document = read_yaml(folder / "words.yaml", "knowledge/materials/words.yaml")
    forces = read_model(force_document, ForceFile)
    book = MaterialBook(
        {},
        family_file,
        {name: (row, forces.bases.get(row.basis, {})) for name, row in forces.rows.items()},
        forces.reference_chip_mm,
        read_model(speed_document, SpeedFile),
        read_model(words_document, WordFile),
        load_hardness(root),
    )
    findings = [*_check_forces(force_document, forces, book), *_check_speeds(speed_document, book)]
    for document in _material_documents(folder, shop_folders):
        book, found = _add(book, document)
        findings += found
    findings += _check_words(words_document, book)
    if findings:
        raise DataError(findings)
    return book


def _material_documents(folder: Path, shop_folders: Iterable[Path]) -> Iterator[Document]:
    for path in sorted(folder.glob("*.yaml")):
        if path.name not in _TABLE_FILES:
            yield read_yaml(path, f"knowledge/materials/{path.name}")
    for shop in shop_folders:
        for path in sorted((shop / "materials").glob("*.yaml")):
            yield read_yaml(path, f"{shop.name}/materials/{path.name}")


def _add(book: MaterialBook, document: Document) -> tuple[MaterialBook, list[Finding]]:
    """Lay one file of materials over the book."""
    file = read_model(document, MaterialFile)
    findings = check_bases(document, file.bases)
    rows = {name: (row, file.bases.get(row.basis, {})) for name, row in file.forces.items()}
    book = replace(book, forces={**book.forces, **rows})
    added: dict[str, Material] = {}
    for name, record in file.materials.items():
        problems = _check_record(document, ("materials", name), record, file, book)
        findings += problems
        if not problems:
            added[name] = _resolve(name, record, file, document, book)
    return replace(book, materials={**book.materials, **added}), findings


def _resolve(name: str, record: MaterialRecord, file: MaterialFile, document: Document, book: MaterialBook) -> Material:
    family = book.families[record.family]
    labels = {**file.basis, **record.basis}
    hb_basis = file.bases[labels["hb"]]
    hardened = book.family_file.hardened
    shared = hardened.states if family.hardens else []
    return Material(
        id=name,
        family=record.family,
        names={system: (names,) if isinstance(names, str) else tuple(names) for system, names in record.names.items()},
        states=tuple(_state(key, state, record, book, hb_basis) for key, state in record.states.items()),
        shared_states=tuple(_state(s.state, s, record, book, book.family_file.bases[hardened.basis]) for s in shared),
        hazards=tuple(family.hazards if record.hazards is None else record.hazards),
        is_group=labels["names"] == GROUP_NAME,
        names_basis=file.bases[labels["names"]],
        file=document.name,
        line=document.line(("materials", name)),
        note=record.note,
    )


def _state(key: str, state: StateRecord, record: MaterialRecord, book: MaterialBook, hb_basis: Mapping[str, Any]) -> State:
    family, hardened = book.families[record.family], book.family_file.hardened
    group = state.group or family.groups[0]
    chip, traits = record.chip or family.chip, family.traits if record.traits is None else record.traits
    if group == "H" and family.groups[0] != "H":
        chip, traits = hardened.chip, [*(trait for trait in traits if trait == "abrasive"), *hardened.traits]
    return State(
        id=key,
        hb_min=state.hb[0],
        hb_max=state.hb[1],
        force=state.force or state.group_force or "",
        own_force=state.force is not None,
        group=group,
        speed=state.speed or record.speed or family.speed,
        chip=chip,
        traits=tuple(traits),
        hb_basis=hb_basis,
    )


def _unknown(document: Document, key: Key, word: str, known: Iterable[str], where: str) -> list[Finding]:
    known = list(known)
    return [] if word in known else [document.finding(key, f"{word!r} is not in {where}.{did_you_mean(word, known)}")]


def _check_record(document: Document, key: Key, record: MaterialRecord, file: MaterialFile, book: MaterialBook) -> list[Finding]:
    findings = _unknown(document, (*key, "family"), record.family, book.families, "families.yaml")
    for label in {**file.basis, **record.basis}.values():
        findings += _unknown(document, (*key, "basis"), label, file.bases, "the bases of this file")
    if record.speed is not None:
        findings += _unknown(document, (*key, "speed"), record.speed, book.speeds.runs, "the runs of speeds.yaml")
    if not any(names for system, names in record.names.items() if system != "near"):
        findings.append(document.finding((*key, "names"), "has no exact name. Give one."))
    if not record.states:
        findings.append(document.finding((*key, "states"), "is empty. Give at least one state with its hardness."))
    for name, state in record.states.items():
        findings += _check_state(document, (*key, "states", name), state, book)
        findings += _unknown(document, (*key, "states", name), name, book.words.states, "the states of words.yaml")
    return findings


def _check_state(document: Document, key: Key, state: StateRecord, book: MaterialBook) -> list[Finding]:
    findings = []
    if len(state.hb) != 2 or state.hb[0] >= state.hb[1]:
        findings.append(document.finding((*key, "hb"), f"is {state.hb}; give two rising figures."))
    rows = [row for row in (state.force, state.group_force) if row is not None]
    if len(rows) != 1:
        findings.append(document.finding(key, "needs exactly one of force (its own) and group_force (its group's)."))
    for row in rows:
        findings += _unknown(document, key, row, book.forces, "the rows of forces.yaml")
    if state.speed is not None:
        findings += _unknown(document, (*key, "speed"), state.speed, book.speeds.runs, "the runs of speeds.yaml")
    return findings


def _check_forces(document: Document, forces: ForceFile, book: MaterialBook) -> list[Finding]:
    findings = check_bases(document, forces.bases)
    for name, row in forces.rows.items():
        key = ("rows", name)
        findings += _unknown(document, (*key, "basis"), row.basis, forces.bases, "the bases of this file")
        findings += _unknown(document, (*key, "family"), row.family, forces.families, "the families of this file")
        if row.follows is not None:
            findings += _unknown(document, (*key, "follows"), row.follows, book.hardness.runs, "the runs of hardness.yaml")
        nominal = row.kc11 * forces.reference_chip_mm**-row.mc
        if len(row.band) != 2 or not row.band[0] <= nominal * 1.0005 or not nominal * 0.9995 <= row.band[1]:
            findings.append(document.finding((*key, "band"), f"{row.band} does not hold the nominal {nominal:.0f} N/mm2."))
    return findings


def _check_speeds(document: Document, book: MaterialBook) -> list[Finding]:
    findings = check_bases(document, book.speeds.bases)
    for name, row in book.speeds.rows.items():
        findings += _unknown(document, ("rows", name, "basis"), row.basis, book.speeds.bases, "the bases of this file")
        for part, count in ((row.hb, 2), (row.speed, 3), (row.fz45, 3)):
            if len(part) != count or part != sorted(part):
                findings.append(document.finding(("rows", name), f"{part} must be {count} rising figures."))
    for name, run in book.speeds.runs.items():
        for row_name in run.rows:
            findings += _unknown(document, ("runs", name), row_name, book.speeds.rows, "rows")
    for name, family in book.families.items():
        if family.speed not in book.speeds.runs:
            findings.append(document.finding(("runs",), f"{family.speed!r} is missing; family {name} of families.yaml asks for it."))
    return findings


def _check_words(document: Document, book: MaterialBook) -> list[Finding]:
    findings = check_bases(document, book.words.bases)
    for place, words in enumerate(book.words.general):
        for entry in words.such_as:
            findings += _unknown(document, ("general", place, "such_as"), entry, book.materials, "the materials")
    return findings
