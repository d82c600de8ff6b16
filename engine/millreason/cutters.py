"""Cutter bodies: the families and sizes of the knowledge, and the bodies that follow from them."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import Literal, Self

from pydantic import Field, NonNegativeFloat, PositiveFloat, model_validator

from millreason.machines import Mounting
from millreason.provenance import SHOP_BASIS, KnowledgeFile, Many, Record, Text

Pitch = Literal["coarse", "fine", "extra_fine"]
CutterClass = Literal[
    "face_mill",
    "square_shoulder_mill",
    "round_insert_mill",
    "high_feed_mill",
    "finishing_face_mill",
    "fly_cutter",
]
Rake = Literal["double_negative", "double_positive", "positive_negative"]
Corner = Literal[
    "facet", "radius_0.4", "radius_0.8", "radius_1.2", "radius_1.6", "radius_2.0", "round", "sharp"
]
Edge = Literal[
    "sharp_polished_uncoated", "sharp_thin_coated", "honed_coated", "negative_land", "diamond", "cbn"
]
Pockets = Literal["fixed", "cartridge"]
PITCHES: tuple[Pitch, ...] = ("coarse", "fine", "extra_fine")


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
    pockets: Pockets
    axial_mm: PositiveFloat
    axial_best_mm: PositiveFloat | None = None
    radial_mm: PositiveFloat
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

    corner: Corner
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

    rake: Rake
    edges: Many[Edge]
    axial_deg: float
    radial_deg: float
    insert_edges: int = Field(gt=0)
    basis: Text

    @model_validator(mode="after")
    def _signs_agree(self) -> Self:
        signs = {"double_negative": (-1, -1), "double_positive": (1, 1), "positive_negative": (1, -1)}
        axial, radial = signs[self.rake]
        if self.axial_deg * axial <= 0 or self.radial_deg * radial <= 0:
            raise ValueError(
                f"{self.rake} disagrees with axial {self.axial_deg:g} and radial {self.radial_deg:g} deg"
            )
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
    pitches: Many[Pitch]
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
    def overhang_of_edge_mm(self) -> float:
        """How far the inserts stand out beyond the floor diameter, per side."""
        if self.insert_diameter_mm is not None:
            return self.insert_diameter_mm / 2
        return self.usable_depth_mm / math.tan(math.radians(self.kappa_deg))

    def rake_for(self, rake: str, edge: str) -> RakeOption | None:
        """Return the option with this rake combination and edge, if it is made."""
        return next((option for option in self.rakes if option.rake == rake and edge in option.edges), None)

    def corner_for(self, corner: str) -> CornerOption | None:
        """Return the option with this corner, if it is made."""
        return next((option for option in self.corners if option.corner == corner), None)


class CutterOnHand(Record):
    """A cutter that a shop owns: a family, and what is measured or marked on this one."""

    id: Text
    title: Text
    family: Text
    nominal_mm: PositiveFloat
    teeth: int = Field(gt=0)
    pitch: Pitch | None = None
    rake: Rake | None = None
    corners: Many[Corner] = ()
    edges: Many[Edge] = ()
    wipers: Many[Literal["none", "one", "all"]] = ("none",)
    pockets: Pockets = "fixed"
    mounting: Mounting | None = None
    bore_mm: PositiveFloat | None = None
    mass_kg: PositiveFloat | None = None
    speed_most_rpm: PositiveFloat | None = None
    hand: Literal["right", "left"] = "right"
    basis: Text = SHOP_BASIS


class CuttersFile(KnowledgeFile):
    """knowledge/cutters.yaml."""

    sizes: Many[BodySize]
    mountings: Many[MountingRow]
    tenons: Many[Tenon]
    body_materials: Many[BodyMaterial]
    gullet: GulletModel
    run_out: Many[RunOutClass]
    wiper_setting: WiperSetting
    families: Many[CutterFamily]


class ShopCuttersFile(KnowledgeFile):
    """The cutters of a shop: families of its own, and the cutters on its shelf."""

    families: Many[CutterFamily] = ()
    on_hand: Many[CutterOnHand] = ()


@dataclass(frozen=True)
class CutterBody:
    """One body: a family in one size and one pitch. Its masses, gullets and outer diameters are computed."""

    family: CutterFamily
    size: BodySize
    pitch: Pitch
    teeth: int
    mountings: tuple[MountingRow, ...]
    material: BodyMaterial
    gullet: GulletModel
    on_hand: CutterOnHand | None = None

    @cached_property
    def id(self) -> str:
        """A readable name that is unique among bodies."""
        if self.on_hand is not None:
            return self.on_hand.id
        return f"{self.family.id}/{self.size.label}/{self.pitch}/{self.material.id}"

    @cached_property
    def diameter_mm(self) -> float:
        """Effective diameter at the floor."""
        if self.family.nominal_at == "floor":
            return self.size.nominal_mm
        return self.size.nominal_mm - 2 * self.family.overhang_of_edge_mm

    @cached_property
    def outermost_mm(self) -> float:
        """Diameter over the inserts, which pockets, walls and clamps meet."""
        return self.diameter_mm + 2 * self.family.overhang_of_edge_mm

    @cached_property
    def mass_kg(self) -> float:
        """Mass of the body: measured if the shop gave it, else the estimate of the ring."""
        if self.on_hand is not None and self.on_hand.mass_kg is not None:
            return self.on_hand.mass_kg
        return self._ring_mass(self.material.fill)

    def mass_span_kg(self) -> tuple[float, float]:
        """Return the lowest and highest estimate of the mass."""
        return self._ring_mass(self.material.fill_low), self._ring_mass(self.material.fill_high)

    def _ring_mass(self, fill: float) -> float:
        bore = self.size.bore_mm or 0.0
        ring = math.pi / 4 * (self.size.nominal_mm**2 - bore**2) * self.size.height_mm
        return self.material.density_kg_mm3 * ring * fill

    @cached_property
    def gullet_area_mm2(self) -> float:
        """Cross-section of the room in front of one tooth (estimate)."""
        return self.gullet.area_mm2(self.size.nominal_mm, self.teeth)

    @cached_property
    def chip_room_mm3(self) -> float:
        """Room for chips in front of one tooth over the usable depth (estimate)."""
        return self.gullet_area_mm2 * self.family.usable_depth_mm

    @property
    def pockets(self) -> tuple[Pockets, ...]:
        """The kinds of insert pocket this body is made with."""
        if self.on_hand is not None:
            return (self.on_hand.pockets,)
        start = self.family.cartridge_from_mm
        fixed: tuple[Pockets, ...] = ("fixed",) if self.family.fixed_pockets else ()
        return (*fixed, "cartridge") if start is not None and self.size.nominal_mm >= start else fixed

    @property
    def wipers(self) -> tuple[str, ...]:
        """The wiper options this body is made with."""
        if self.on_hand is not None:
            return self.on_hand.wipers
        made = self.family.wipers
        return (
            ("none", "one", "all") if made is not None and self.size.nominal_mm >= made.from_mm else ("none",)
        )

    def mounting_row(self, mounting: str) -> MountingRow | None:
        """Return how this body is held by a mounting, if it is made for it."""
        return next((row for row in self.mountings if row.mounting == mounting), None)


def bodies_of(family: CutterFamily, file: CuttersFile) -> Iterator[CutterBody]:
    """Yield every body of a family: each size, pitch and body material that is made."""
    materials = {material.id: material for material in file.body_materials}
    for size in file.sizes:
        if not family.from_mm <= size.nominal_mm <= family.to_mm:
            continue
        rows = mountings_for(family, size, file)
        for pitch in family.pitches:
            teeth = family.teeth or size.teeth[PITCHES.index(pitch)]
            if teeth is not None:
                for name in family.body_materials:
                    yield CutterBody(family, size, pitch, teeth, rows, materials[name], file.gullet)


def mountings_for(family: CutterFamily, size: BodySize, file: CuttersFile) -> tuple[MountingRow, ...]:
    """Return how a body of this family and size can be held."""
    return tuple(
        row
        for row in file.mountings
        if row.from_mm <= size.nominal_mm <= row.to_mm
        and (family.mountings is None or row.mounting in family.mountings)
        and (row.mounting not in ("shell_arbor", "spindle_nose_flange") or size.bore_mm is not None)
    )


def body_on_hand(cutter: CutterOnHand, family: CutterFamily, file: CuttersFile) -> CutterBody:
    """Return the body of a cutter that a shop owns; what the shop left out is taken from the nearest size."""
    nearest = min(file.sizes, key=lambda size: (abs(size.nominal_mm - cutter.nominal_mm), size.nominal_mm))
    bore = cutter.bore_mm if cutter.bore_mm is not None else nearest.bore_mm
    size = nearest.model_copy(update={"nominal_mm": cutter.nominal_mm, "bore_mm": bore, "label": cutter.id})
    rows = tuple(row for row in mountings_for(family, size, file) if cutter.mounting in (None, row.mounting))
    material = next(item for item in file.body_materials if item.id == family.body_materials[0])
    pitch = cutter.pitch or _nearest_pitch(cutter.teeth, nearest)
    return CutterBody(family, size, pitch, cutter.teeth, rows, material, file.gullet, cutter)


def _nearest_pitch(teeth: int, size: BodySize) -> Pitch:
    """Return the pitch class whose count is nearest; the coarser one if two are as near."""
    known = [(abs(count - teeth), index) for index, count in enumerate(size.teeth) if count is not None]
    return PITCHES[min(known)[1]]
