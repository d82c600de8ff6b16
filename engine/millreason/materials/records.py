"""The shapes of the files of material knowledge: forces, speeds, families, words, materials."""

from __future__ import annotations

from typing import Literal, TypeVar

from pydantic import Field

from millreason.materials.hardness import Kind
from millreason.provenance import KnowledgeFile, Many, Record

Group = Literal["P", "M", "K", "N", "S", "H"]
ChipForm = Literal["long", "segmented", "short"]
Trait = Literal[
    "gummy", "built_up_edge", "work_hardening", "abrasive", "low_conductivity", "high_conductivity",
    "hard", "cast_skin", "free_cutting", "reactive", "brittle", "fibrous",
]  # fmt: skip
Hazard = Literal[
    "magnesium_fire", "titanium_fire", "beryllium", "lead", "nickel_cobalt", "iron_dust", "combustible_dust"
]
Skin = Literal[
    "none", "mill_scale", "cast_skin", "forged_scale", "flame_cut_edge", "weld", "hardened_skin", "alpha_case"
]  # fmt: skip
FormWord = Literal[
    "plate", "bar", "billet", "block", "thin", "cover", "casting", "die_casting", "forging"
]  # fmt: skip
File = TypeVar("File", bound=KnowledgeFile)
NameSystem = Literal["en", "number", "aisi", "uns", "jis", "din", "bs", "trade", "near"]


class ForceRow(Record):
    """One pair of force constants with its band at the reference chip."""

    for_: str = Field(alias="for")
    kc11: float
    mc: float
    band: Many[float]
    family: str
    type: Literal["published", "derived", "estimate"]
    follows: str | None = None
    basis: str
    note: str = ""


class ForceFile(KnowledgeFile):
    """Content of knowledge/materials/forces.yaml."""

    families: dict[str, str]
    reference_chip_mm: float
    rows: dict[str, ForceRow]


class SpeedRow(Record):
    """Start values of one group of materials for one hardness range."""

    for_: str = Field(alias="for")
    edge: Literal["coated", "uncoated"]
    hb: Many[float]
    speed: Many[float]
    fz45: Many[float]
    basis: str
    note: str = ""


class SpeedRun(Record):
    """The rows of one family from soft to hard."""

    rows: Many[str]
    half_band: bool = False


class Factor(Record):
    """A factor with its basis."""

    factor: float
    basis: str


class EdgeSpeed(Record):
    """Least, start and most speed of one cutting material along a run."""

    speed: Many[float]
    basis: str


class SpeedFile(KnowledgeFile):
    """Content of knowledge/speeds.yaml."""

    uncoated: dict[Group, Factor]
    edges: dict[Literal["diamond", "cbn"], dict[str, EdgeSpeed]]
    rows: dict[str, SpeedRow]
    runs: dict[str, SpeedRun]


class StateRecord(Record):
    """A state of a material as a file gives it."""

    hb: Many[float]
    force: str | None = None
    group_force: str | None = None
    group: Group | None = None
    speed: str | None = None


class HardenedState(StateRecord):
    """A hardened state that several families share."""

    state: str


class Hardened(Record):
    """The hardened states of every family that hardens."""

    from_hb: float
    basis: str
    states: Many[HardenedState]
    usual: str
    traits: Many[Trait]
    chip: ChipForm


class Family(Record):
    """What all materials of one family share."""

    name: str
    groups: Many[Group]
    chip: ChipForm
    traits: Many[Trait]
    hazards: Many[Hazard] = ()
    speed: str
    table: Kind
    most_hb: float
    hardens: bool = False


class FamilyFile(KnowledgeFile):
    """Content of knowledge/materials/families.yaml."""

    basis_of: dict[Literal["groups", "traits", "most_hb", "hardened"], str]
    range_margin: float
    figures_margin: float
    hardened: Hardened
    families: dict[str, Family]


class FormWords(Record):
    """Words for the form or skin of a blank."""

    words: Many[str]
    form: FormWord | None = None
    skin: Skin | None = None


class GeneralWords(Record):
    """Words for a whole group of materials, and the question they lead to."""

    words: Many[str]
    groups: Many[Group]
    ask: str
    such_as: Many[str]


class OutsideWords(Record):
    """Materials that are known by name only, and why no answer is given for them."""

    words: Many[str]
    why: str
    kind: Literal["metal", "non_metal"] = "non_metal"


class WordFile(KnowledgeFile):
    """Content of knowledge/materials/words.yaml."""

    basis: str
    states: dict[str, Many[str]]
    forms: Many[FormWords]
    general: Many[GeneralWords]
    outside: Many[OutsideWords]
    shared: dict[str, str]
    fillers: Many[str]


class MaterialRecord(Record):
    """A material as a file gives it."""

    family: str
    names: dict[NameSystem, str | list[str]]
    states: dict[str, StateRecord]
    chip: ChipForm | None = None
    traits: Many[Trait] | None = None
    hazards: Many[Hazard] | None = None
    speed: str | None = None
    basis_of: dict[Literal["names", "hb"], str] = Field(default_factory=dict)
    state_names: dict[str, str] = Field(default_factory=dict)
    note: str = ""


class MaterialFile(KnowledgeFile):
    """Content of one file of materials; a shop's own file may bring force rows of its own."""

    basis_of: dict[Literal["names", "hb"], str] = Field(default_factory=dict)
    materials: dict[str, MaterialRecord]
    forces: dict[str, ForceRow] = Field(default_factory=dict)
