"""Cutter bodies as they stand in the knowledge: sizes, families, and which combinations exist."""

from __future__ import annotations

import math
from typing import Literal, Self

from pydantic import Field, NonNegativeFloat, PositiveFloat, model_validator

from millreason.machines import Mounting
from millreason.provenance import SHOP_BASIS, KnowledgeFile, Many, Record, Text

PitchName = Literal["coarse", "fine", "extra_fine"]
CutterClass = Literal[
    "face_mill",
    "square_shoulder_mill",
    "round_insert_mill",
    "high_feed_mill",
    "finishing_face_mill",
    "fly_cutter",
]
RakeName = Literal["double_negative", "double_positive", "positive_negative"]
CornerName = Literal["facet", "radius_0.4", "radius_0.8", "radius_1.2", "radius_1.6", "radius_2.0", "round", "sharp"]
EdgeName = Literal["sharp_polished_uncoated", "sharp_thin_coated", "honed_coated", "negative_land", "diamond", "cbn"]
PocketsName = Literal["fixed", "cartridge"]
ON_A_BORE = ("shell_arbor", "spindle_nose_flange")
PITCHES: tuple[PitchName, ...] = ("coarse", "fine", "extra_fine")


class BodySize(Record):
    """One diameter of the series: height, bore and teeth (coarse, fine, extra fine)."""

    nominal_mm: PositiveFloat
    label: Text
    series: Literal["metric", "inch"]
    height_mm: PositiveFloat
    bore_mm: PositiveFloat | None
    teeth: Many[int | None] = Field(min_length=3, max_length=3)
    basis_of: dict[str, str]


class MountingRow(Record):
    """A mounting and the diameters it is made for."""

    mounting: Mounting
    from_mm: PositiveFloat
    to_mm: PositiveFloat
    fixing: Text
    shank_mm: PositiveFloat | None = None
    thread: str | None = None
    basis: Text


class Tenon(Record):
    """Drive slots in the back of a body with a given bore."""

    bore_mm: PositiveFloat
    slot_width_mm: PositiveFloat
    slot_depth_mm: PositiveFloat
    basis: Text


class BodyMaterial(Record):
    """Density and fill of a body, for its mass."""

    id: Text
    density_kg_mm3: PositiveFloat
    fill: PositiveFloat
    fill_low: PositiveFloat
    fill_high: PositiveFloat
    basis: Text


class GulletModel(Record):
    """The figures of the gullet estimate."""

    shape: PositiveFloat
    depth_to_pitch: PositiveFloat
    depth_to_diameter: PositiveFloat
    depth_most_mm: PositiveFloat
    insert_mm: PositiveFloat
    basis: Text

    def area_mm2(self, diameter_mm: float, teeth: int) -> float:
        """Return the cross-section of one gullet; see the note in the knowledge file."""
        pitch = math.pi * diameter_mm / teeth
        depth = min(self.depth_to_pitch * pitch, self.depth_to_diameter * diameter_mm, self.depth_most_mm)
        return self.shape * depth * max(pitch - self.insert_mm, 0.0)


class RunOutClass(Record):
    """Run-out that a kind of pocket and care allows."""

    id: Text
    pockets: PocketsName
    axial_mm: PositiveFloat
    axial_best_mm: PositiveFloat | None = None
    radial_mm: PositiveFloat
    basis: Text


class RunOutCeiling(Record):
    """The most run-out of main edges that a standard allows, between neighbours and across."""

    to_mm: PositiveFloat
    adjacent_mm: PositiveFloat
    opposite_mm: PositiveFloat
    basis: Text


class WiperSetting(Record):
    """How far a wiper stands below its neighbours."""

    projection_low_mm: PositiveFloat
    projection_high_mm: PositiveFloat
    projection_most_mm: PositiveFloat
    equal_within_mm: PositiveFloat
    basis: Text


class CornerOption(Record):
    """An insert corner: its radius and the land parallel to the floor."""

    corner: CornerName
    radius_mm: PositiveFloat | None = None
    land_mm: NonNegativeFloat
    basis: Text

    @model_validator(mode="after")
    def _radius_given(self) -> Self:
        if (self.corner == "facet") != (self.radius_mm is None):
            raise ValueError("a facet has no radius_mm, every other corner needs one")
        return self


class RakeOption(Record):
    """A rake combination with its effective angles, and the edges it is made with."""

    rake: RakeName
    edges: Many[EdgeName]
    axial_deg: float
    radial_deg: float
    insert_edges: int = Field(gt=0)
    basis: Text

    @model_validator(mode="after")
    def _signs_agree(self) -> Self:
        signs = {"double_negative": (-1, -1), "double_positive": (1, 1), "positive_negative": (1, -1)}
        axial, radial = signs[self.rake]
        if self.axial_deg * axial <= 0 or self.radial_deg * radial <= 0:
            raise ValueError(f"{self.rake} disagrees with axial {self.axial_deg:g} and radial {self.radial_deg:g} deg")
        return self


class WiperOption(Record):
    """Wiper inserts: from which diameter, and the land lengths."""

    from_mm: PositiveFloat
    lands_mm: Many[PositiveFloat]
    basis: Text


class SpeedCaution(Record):
    """Speeds above which the limit marked on the body must be known."""

    cutting_speed_m_min: PositiveFloat
    spindle_speed_rpm: PositiveFloat
    binding: bool = False
    basis: Text


class RampGeometry(Record):
    """What limits a ramp: the gap under the body and the part of the floor that the edge covers."""

    axial_gap_mm: NonNegativeFloat
    floor_edge_mm: PositiveFloat
    basis: Text


class CutterFamily(Record):
    """Bodies that share class, angle, inserts and the combinations that exist."""

    id: Text
    title: Text
    cutter_class: CutterClass
    kappa_deg: float = Field(ge=0, le=90)
    nominal_at: Literal["floor", "outermost"]
    from_mm: PositiveFloat
    to_mm: PositiveFloat
    pitches: Many[PitchName]
    teeth: int | None = Field(default=None, gt=0)
    insert_diameter_mm: PositiveFloat | None = None
    edge_length_mm: PositiveFloat
    usable_depth_mm: PositiveFloat
    corners: Many[CornerOption]
    rakes: Many[RakeOption]
    wipers: WiperOption | None = None
    mountings: Many[Mounting] | None = None
    cartridge_from_mm: PositiveFloat | None = None
    fixed_pockets: bool = True
    body_materials: Many[str]
    speed_caution: SpeedCaution
    ramp: RampGeometry
    basis: Text = SHOP_BASIS
    basis_of: dict[str, str] = Field(default_factory=dict)

    @model_validator(mode="after")
    def _angle_and_corners_agree(self) -> Self:
        round_insert = self.cutter_class == "round_insert_mill"
        if round_insert != (self.insert_diameter_mm is not None) or round_insert != (self.kappa_deg == 0):
            raise ValueError("kappa_deg 0 and insert_diameter_mm go with round_insert_mill, and only with it")
        names = {option.corner for option in self.corners}
        if round_insert != (names == {"round"}) or (self.kappa_deg == 90 and "facet" in names):
            raise ValueError("round corners only on round inserts, a facet only below 90 degrees")
        return self

    @property
    def edge_reach_mm(self) -> float:
        """How far the inserts stand out beyond the floor diameter, per side."""
        if self.insert_diameter_mm is not None:
            return self.insert_diameter_mm / 2
        return self.usable_depth_mm / math.tan(math.radians(self.kappa_deg))

    def floor_diameter_mm(self, size: BodySize) -> float:
        """Return the effective diameter at the floor."""
        return size.nominal_mm - (0 if self.nominal_at == "floor" else 2 * self.edge_reach_mm)

    def outermost_mm(self, size: BodySize) -> float:
        """Return the diameter over the inserts, which pockets, walls and clamps meet."""
        return size.nominal_mm + (2 * self.edge_reach_mm if self.nominal_at == "floor" else 0)

    def teeth_for(self, size: BodySize, pitch: str) -> int | None:
        """Return the teeth of a size in a pitch, or None where that body is not made."""
        if pitch not in self.pitches or not self.from_mm <= size.nominal_mm <= self.to_mm:
            return None
        return self.teeth or size.teeth[PITCHES.index(pitch)]

    def pockets_for(self, size: BodySize) -> tuple[PocketsName, ...]:
        """Return the kinds of insert pocket a size is made with."""
        fixed: tuple[PocketsName, ...] = ("fixed",) if self.fixed_pockets else ()
        start = self.cartridge_from_mm
        return (*fixed, "cartridge") if start is not None and size.nominal_mm >= start else fixed

    def wipers_for(self, size: BodySize) -> tuple[str, ...]:
        """Return the wiper options a size is made with."""
        made = self.wipers is not None and size.nominal_mm >= self.wipers.from_mm
        return ("none", "one", "all") if made else ("none",)

    def rake_for(self, rake: str, edge: str) -> RakeOption | None:
        """Return the option with this rake combination and edge, if it is made."""
        return next((option for option in self.rakes if option.rake == rake and edge in option.edges), None)

    def corner_for(self, corner: str) -> CornerOption | None:
        """Return the option with this corner, if it is made."""
        return next((option for option in self.corners if option.corner == corner), None)


class CutterOnHand(Record):
    """A cutter on a shop's shelf, by the names a job uses for its cutters; what is left out is unknown."""

    id: Text
    cutter_class: CutterClass
    diameter_mm: PositiveFloat
    teeth: int = Field(gt=0)
    kappa_deg: float = Field(ge=0, le=90)
    pitch: PitchName | None = None
    rake: RakeName | None = None
    corner: CornerName | None = None
    edge: EdgeName | None = None
    wiper: Literal["none", "one", "all"] | None = None
    pockets: PocketsName | None = None
    mounting: Mounting | None = None
    hand: Literal["right", "left"] | None = None
    usable_depth_mm: PositiveFloat | None = None
    speed_limit_rpm: PositiveFloat | None = None
    mass_kg: PositiveFloat | None = None
    land_mm: NonNegativeFloat | None = None
    note: str | None = None
    basis: Text = SHOP_BASIS

    def values(self) -> dict[str, float | int | str]:
        """Return what is known of the cutter, without its id and basis."""
        return self.model_dump(exclude={"id", "basis"}, exclude_none=True)


class CuttersFile(KnowledgeFile):
    """knowledge/cutters.yaml: sizes, mountings, and the families of bodies."""

    sizes: Many[BodySize]
    mountings: Many[MountingRow]
    tenons: Many[Tenon]
    body_materials: Many[BodyMaterial]
    gullet: GulletModel
    run_out: Many[RunOutClass]
    run_out_ceilings: Many[RunOutCeiling]
    wiper_setting: WiperSetting
    families: Many[CutterFamily]

    def body_material(self, name: str) -> BodyMaterial:
        """Return a body material by its id."""
        return next(material for material in self.body_materials if material.id == name)

    def mountings_for(self, family: CutterFamily, size: BodySize) -> tuple[MountingRow, ...]:
        """Return how a body of this family and size can be held; a body without a bore takes no arbor."""
        return tuple(
            row
            for row in self.mountings
            if row.from_mm <= size.nominal_mm <= row.to_mm
            and (family.mountings is None or row.mounting in family.mountings)
            and (size.bore_mm is not None or row.mounting not in ON_A_BORE)
        )


class ShopCuttersFile(KnowledgeFile):
    """The cutters of a shop: families of its own, and the cutters on its shelf."""

    families: Many[CutterFamily] = ()
    on_hand: Many[CutterOnHand] = ()
