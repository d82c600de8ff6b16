"""The material knowledge, resolved: materials with their states, and the tables they point to."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING

from millreason.errors import DataError, Finding
from millreason.materials.checks import check_forces, check_record, check_speeds, check_words
from millreason.materials.hardness import HardnessKnowledge, load_hardness
from millreason.materials.records import (
    ChipForm,
    Family,
    FamilyFile,
    File,
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
from millreason.provenance import (
    SHOP_BASIS,
    Basis,
    BasisKind,
    Source,
    check_bases,
    cited_sources,
    count_kinds,
)
from millreason.yaml_source import Document, read_model, read_yaml

if TYPE_CHECKING:
    from millreason.materials.index import Index

# The label of entries that stand for a whole group of materials under a trade word.
GROUP_NAME = "group_name"
_TABLE_FILES = ("families.yaml", "forces.yaml", "words.yaml")


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
    hb_basis: Basis | None = field(repr=False, default=None)

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
    names_basis: Basis | None = field(repr=False)
    state_names: Mapping[str, str] = field(default_factory=dict)
    file: str = ""
    line: int = 0
    from_shop: bool = False
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
    forces: Mapping[str, tuple[ForceRow, Basis | None]]
    reference_chip_mm: float
    speeds: SpeedFile
    words: WordFile
    hardness: HardnessKnowledge
    counts: Mapping[BasisKind, int] = field(default_factory=dict)
    cited: frozenset[str] = frozenset()

    @property
    def families(self) -> Mapping[str, Family]:
        """All families by id."""
        return self.family_file.families

    def family(self, material: Material) -> Family:
        """Return the family of a material."""
        return self.family_file.families[material.family]

    def groups(self, material: Material) -> tuple[Group, ...]:
        """Return every ISO 513 group a material can be in: its family's and its states'."""
        own = [
            *self.family(material).groups,
            *(state.group for state in (*material.states, *material.shared_states)),
        ]
        return tuple(dict.fromkeys(own))

    @cached_property
    def index(self) -> Index:
        """The index of words and names; see `material_index`."""
        from millreason.materials.index import build_index

        return build_index(self)


def load_book(root: Path, shops: Sequence[Path], sources: Mapping[str, Source]) -> MaterialBook:
    """Read all material knowledge below a data root, with a shop's own materials laid over it.

    A shop keeps them in `materials.yaml` or in a folder `materials`; an id that is known is replaced.

    Raises
    ------
    DataError
        with every finding of every file.
    """
    return _Loader(root, shops, sources).book()


class _Loader:
    """Reads files one after the other and gathers findings, sources and counts."""

    def __init__(self, root: Path, shops: Sequence[Path], sources: Mapping[str, Source]) -> None:
        self._root = root
        self._shops = shops
        self._sources = sources
        self._findings: list[Finding] = []
        self._counts: Counter[BasisKind] = Counter()
        self._cited: set[str] = set()

    def book(self) -> MaterialBook:
        families, _ = self._read("knowledge/materials/families.yaml", FamilyFile)
        forces, force_document = self._read("knowledge/materials/forces.yaml", ForceFile)
        speeds, speed_document = self._read("knowledge/speeds.yaml", SpeedFile)
        words, words_document = self._read("knowledge/materials/words.yaml", WordFile)
        hardness = load_hardness(self._root, self._sources)
        self._cited |= cited_sources(hardness.bases)
        rows = {name: (row, forces.bases.get(row.basis)) for name, row in forces.rows.items()}
        book = MaterialBook({}, families, rows, forces.reference_chip_mm, speeds, words, hardness)
        self._findings += check_forces(force_document, forces, forces.reference_chip_mm, hardness)
        self._findings += check_speeds(speed_document, speeds, families)
        for path, name, shop in self._material_files():
            book = self._add(book, read_yaml(path, name), shop)
        self._findings += check_words(words_document, words, book.materials)
        if self._findings:
            raise DataError(self._findings)
        self._count_materials(book)
        return replace(book, counts=dict(self._counts), cited=frozenset(self._cited))

    def _read(self, name: str, model: type[File]) -> tuple[File, Document]:
        document = read_yaml(self._root / name, name)
        content = read_model(document, model)
        check_bases(document, content.bases, self._sources)
        self._counts.update(count_kinds(document, content.bases))
        self._cited |= cited_sources(content.bases)
        return content, document

    def _material_files(self) -> Iterator[tuple[Path, str, bool]]:
        for path in sorted((self._root / "knowledge" / "materials").glob("*.yaml")):
            if path.name not in _TABLE_FILES:
                yield path, f"knowledge/materials/{path.name}", False
        for shop in self._shops:
            for path in sorted([*shop.glob("materials.yaml"), *shop.glob("materials/*.yaml")]):
                yield path, f"shop/{path.relative_to(shop).as_posix()}", True

    def _add(self, book: MaterialBook, document: Document, shop: bool) -> MaterialBook:
        """Lay one file of materials over the book."""
        file = read_model(document, MaterialFile)
        check_bases(document, file.bases, self._sources, shop)
        self._cited |= cited_sources(file.bases)
        rows = {name: (row, file.bases.get(row.basis)) for name, row in file.forces.items()}
        self._findings += check_forces(document, file, book.reference_chip_mm, book.hardness)
        book = replace(book, forces={**book.forces, **rows})
        added: dict[str, Material] = {}
        for name, record in file.materials.items():
            problems = check_record(document, name, record, book, shop, file)
            self._findings += problems
            if not problems:
                added[name] = _resolve(name, record, file, document, book, shop)
        return replace(book, materials={**book.materials, **added})

    def _count_materials(self, book: MaterialBook) -> None:
        for material in book.materials.values():
            for basis in (material.names_basis, *(state.hb_basis for state in material.states)):
                self._counts[basis.kind if basis else "shop"] += 1


def _resolve(
    name: str, record: MaterialRecord, file: MaterialFile, document: Document, book: MaterialBook, shop: bool
) -> Material:
    family = book.families[record.family]
    labels = {**file.basis_of, **record.basis_of}
    hb_basis = file.bases.get(labels.get("hb", SHOP_BASIS))
    hardened = book.family_file.hardened
    shared = hardened.states if family.hardens else ()
    return Material(
        id=name,
        family=record.family,
        names={system: (names,) if isinstance(names, str) else tuple(names) for system, names in record.names.items()},
        states=tuple(_state(key, state, record, book, hb_basis) for key, state in record.states.items()),
        shared_states=tuple(_state(s.state, s, record, book, book.family_file.bases[hardened.basis]) for s in shared),
        hazards=tuple(family.hazards if record.hazards is None else record.hazards),
        is_group=labels.get("names", SHOP_BASIS) == GROUP_NAME,
        names_basis=file.bases.get(labels.get("names", SHOP_BASIS)),
        state_names=record.state_names,
        file=document.name,
        line=document.line(("materials", name)),
        from_shop=shop,
        note=record.note,
    )


def _state(key: str, state: StateRecord, record: MaterialRecord, book: MaterialBook, hb_basis: Basis | None) -> State:
    family, hardened = book.families[record.family], book.family_file.hardened
    group = state.group or family.groups[0]
    chip, traits = record.chip or family.chip, family.traits if record.traits is None else record.traits
    if group == "H" and family.groups[0] != "H":
        chip, traits = hardened.chip, (*(trait for trait in traits if trait == "abrasive"), *hardened.traits)
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
