"""The shapes of the files of material knowledge: forces, speeds, families, words, materials."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Literal

from pydantic import Field

from millreason.hardness import Kind, Strict

Group = Literal["P", "M", "K", "N", "S", "H"]
ChipForm = Literal["long", "segmented", "short"]
Trait = Literal[
    "gummy", "built_up_edge", "work_hardening", "abrasive", "low_conductivity", "high_conductivity",
    "hard", "cast_skin", "free_cutting", "reactive", "brittle", "fibrous",
]  # fmt: skip
Hazard = Literal["magnesium_fire", "titanium_fire", "beryllium", "lead", "nickel_cobalt", "iron_dust", "combustible_dust"]
Skin = Literal["none", "mill_scale", "cast_skin", "forged_scale", "flame_cut_edge", "weld", "hardened_skin", "alpha_case"]
NameSystem = Literal["en", "number", "aisi", "uns", "jis", "din", "bs", "trade", "near"]
Bases = Mapping[str, Mapping[str, Any]]

class ForceRow(Strict):
    """One pair of force constants with its band at the reference chip."""

    for_: str = Field(alias="for")
    kc11: float
    mc: float
    band: list[float]
    family: str
    type: Literal["published", "derived", "estimate"]
    follows: str | None = None
    basis: str
    note: str = ""


class ForceFile(Strict):
    """Content of knowledge/materials/forces.yaml."""

    bases: dict[str, dict[str, Any]]
    families: dict[str, str]
    reference_chip_mm: float
    rows: dict[str, ForceRow]


class SpeedRow(Strict):
    """Start values of one group of materials for one hardness range."""

    for_: str = Field(alias="for")
    edge: Literal["coated", "uncoated"]
    hb: list[float]
    speed: list[float]
    fz45: list[float]
    basis: str
    note: str = ""


class SpeedRun(Strict):
    """The rows of one family from soft to hard."""

    rows: list[str]
    half_band: bool = False


class Factor(Strict):
    """A factor with its basis."""

    factor: float
    basis: str


class SpeedFile(Strict):
    """Content of knowledge/speeds.yaml."""

    bases: dict[str, dict[str, Any]]
    uncoated: dict[Group, Factor]
    rows: dict[str, SpeedRow]
    runs: dict[str, SpeedRun]


class StateRecord(Strict):
    """A state of a material as a file gives it."""

    hb: list[float]
    force: str | None = None
    group_force: str | None = None
    group: Group | None = None
    speed: str | None = None


class HardenedState(StateRecord):
    """A hardened state that several families share."""

    state: str


class Hardened(Strict):
    """The hardened states of every family that hardens."""

    from_hb: float
    basis: str
    states: list[HardenedState]
    usual: str
    traits: list[Trait]
    chip: ChipForm


class Family(Strict):
    """What all materials of one family share."""

    name: str
    groups: list[Group]
    chip: ChipForm
    traits: list[Trait]
    hazards: list[Hazard] = []
    speed: str
    table: Kind
    most_hb: float
    hardens: bool = False


class FamilyFile(Strict):
    """Content of knowledge/materials/families.yaml."""

    bases: dict[str, dict[str, Any]]
    basis: dict[str, str]
    range_margin: float
    figures_margin: float
    hardened: Hardened
    families: dict[str, Family]


class FormWords(Strict):
    """Words for the form or skin of a blank."""

    words: list[str]
    skin: Skin | None = None
    form: str | None = None


class GeneralWords(Strict):
    """Words for a whole group of materials, and the question they lead to."""

    words: list[str]
    groups: list[Group]
    ask: str
    such_as: list[str]


class OutsideWords(Strict):
    """Materials that are known by name only, and why no answer is given for them."""

    words: list[str]
    why: str


class WordFile(Strict):
    """Content of knowledge/materials/words.yaml."""

    bases: dict[str, dict[str, Any]]
    basis: str
    states: dict[str, list[str]]
    forms: list[FormWords]
    general: list[GeneralWords]
    outside: list[OutsideWords]
    fillers: list[str]


class MaterialRecord(Strict):
    """A material as a file gives it."""

    family: str
    names: dict[NameSystem, str | list[str]]
    states: dict[str, StateRecord]
    chip: ChipForm | None = None
    traits: list[Trait] | None = None
    hazards: list[Hazard] | None = None
    speed: str | None = None
    basis: dict[Literal["names", "hb"], str] = {}
    note: str = ""


class MaterialFile(Strict):
    """Content of one file of materials; a shop's own file may bring force rows of its own."""

    bases: dict[str, dict[str, Any]]
    basis: dict[Literal["names", "hb"], str]
    materials: dict[str, MaterialRecord]
    forces: dict[str, ForceRow] = {}
