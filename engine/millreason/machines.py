"""Spindle interfaces and machines as they stand in the knowledge."""

from __future__ import annotations

from typing import Any, Literal, Self

from pydantic import ConfigDict, Field, PositiveFloat, model_validator

from millreason.provenance import SHOP_BASIS, KnowledgeFile, Many, Record, Text

Mounting = Literal[
    "shell_arbor", "integral_taper_shank", "spindle_nose_flange", "screw_in_modular", "straight_shank_collet"
]


class Gauge(Record):
    """Gauge diameter at the mouth of the spindle, and the flange where there is one."""

    diameter_mm: PositiveFloat
    flange_mm: PositiveFloat | None = None
    basis: Text


class SpindleNose(Record):
    """What a cutter bolted to the spindle must fit."""

    number: Text
    outer_mm: PositiveFloat
    bolt_circle_mm: PositiveFloat
    screws: Text
    screws_inch: str | None = None
    key_mm: PositiveFloat
    pilot_mm: PositiveFloat | None = None
    basis: Text
    basis_of: dict[str, str] = Field(default_factory=dict)


class Carries(Record):
    """The largest face mill usual on the interface, and the largest for light cuts."""

    largest_mm: PositiveFloat
    light_mm: PositiveFloat
    basis: Text


class ChangerLimits(Record):
    """Usual limits of a tool changer; diameters are over the inserts."""

    full_mm: PositiveFloat
    empty_mm: PositiveFloat
    mass_kg: PositiveFloat
    moment_nm: PositiveFloat
    length_mm: PositiveFloat
    basis: Text


class UsualDrive(Record):
    """Usual motor power and torque of a spindle with this interface."""

    power_kw: PositiveFloat
    power_low_kw: PositiveFloat
    power_high_kw: PositiveFloat
    torque_low_nm: PositiveFloat
    torque_high_nm: PositiveFloat
    basis: Text


class Adapter(Record):
    """A short arbor for the interface: mass, and length from the gauge line to the back of the cutter."""

    mass_kg: PositiveFloat
    length_mm: PositiveFloat
    basis: Text


class Reach(Record):
    """The longest gauge length that is normal."""

    longest_overhang_mm: PositiveFloat
    basis: Text


class FittedMountings(Record):
    """The mountings that a spindle with this interface can take."""

    options: Many[Mounting]
    basis: Text


class SpeedCeiling(Record):
    """Usual highest speed of the joint."""

    most_rpm: PositiveFloat
    basis: Text


class Clamp(Record):
    """Clamping force of the joint."""

    force_kn: PositiveFloat
    basis: Text


class Bending(Record):
    """Estimated bending moment at which the faces begin to part."""

    separation_nm: PositiveFloat
    basis: Text


class Interface(Record):
    """A spindle interface: what it is, what people call it, what it carries."""

    id: Text
    title: Text
    family: Literal["r8", "steep_taper", "hollow_taper", "polygon"]
    size: Literal["small", "medium", "large", "very_large"]
    aliases: Many[str]
    face_contact: bool
    gauge: Gauge
    carries: Carries
    drive: UsualDrive
    adapter: Adapter
    reach: Reach
    mountings: FittedMountings
    speed: SpeedCeiling
    nose: SpindleNose | None = None
    changer: ChangerLimits | None = None
    clamp: Clamp | None = None
    bending: Bending | None = None


class InterfacesFile(KnowledgeFile):
    """knowledge/interfaces.yaml."""

    interfaces: Many[Interface]


MachineClass = Literal[
    "machining_centre_vertical",
    "machining_centre_horizontal",
    "drill_tap_centre",
    "knee_mill",
    "bed_mill",
    "bridge_mill",
    "floor_borer",
    "duplex_mill",
    "high_speed_mill",
    "five_axis_centre",
    "other",
]
CurvePoint = Many[PositiveFloat]
NOT_FACTS = frozenset({"id", "title", "basis", "basis_of", "note", "rapid_m_min", "tool_change_min"})


class Machine(Record):
    """A machine; its fields are the facts of a job's machine, and any may be left out."""

    model_config = ConfigDict(strict=True, frozen=True, extra="forbid", populate_by_name=True)

    id: Text
    title: Text
    kind: MachineClass = Field(alias="class")
    interface: Text
    basis: Text = SHOP_BASIS
    basis_of: dict[str, str] = Field(default_factory=dict)
    note: str | None = None
    power_kw: PositiveFloat | None = None
    duty: Literal["S1", "S3", "S6"] | None = None
    torque_nm: PositiveFloat | None = None
    base_speed_rpm: PositiveFloat | None = None
    curve: Many[CurvePoint] = ()
    speed_min_rpm: PositiveFloat | None = None
    speed_max_rpm: PositiveFloat | None = None
    speed_steps_rpm: Many[PositiveFloat] = ()
    drive: Literal["direct", "belt", "belt_step_pulley", "geared_head", "back_gear", "hydraulic"] | None = None
    efficiency: float | None = Field(default=None, gt=0, le=1)
    changer: Literal["automatic", "none"] | None = None
    changer_full_mm: PositiveFloat | None = None
    changer_empty_mm: PositiveFloat | None = None
    changer_mass_kg: PositiveFloat | None = None
    changer_moment_nm: PositiveFloat | None = None
    fluids: Many[str] = ()
    backlash_mm: float | None = Field(default=None, ge=0)
    control: Literal["cnc", "manual"] | None = None
    feed_max_mm_min: PositiveFloat | None = None
    nose: Literal["bolted_flange", "none"] | None = None
    rotation: Literal["clockwise", "counter_clockwise", "both"] | None = None
    stiffness_n_um: PositiveFloat | None = None
    damping_ratio: PositiveFloat | None = None
    worn: bool | None = None
    rapid_m_min: PositiveFloat | None = None
    tool_change_min: PositiveFloat | None = None

    @model_validator(mode="after")
    def _in_order(self) -> Self:
        if any(len(point) != 2 for point in self.curve):
            raise ValueError("curve must be a list of [rpm, N.m] pairs")
        for name, row in (
            ("curve speeds", [point[0] for point in self.curve]),
            ("speed_steps_rpm", self.speed_steps_rpm),
        ):
            if list(row) != sorted(set(row)):
                raise ValueError(
                    f"{name} must rise without repeats (found: {', '.join(f'{speed:g}' for speed in row)})"
                )
        return self

    def facts(self) -> dict[str, Any]:
        """Return what is known of the machine as facts named `machine.<field>`."""
        known = self.model_dump(by_alias=True, exclude=set(NOT_FACTS), exclude_none=True)
        return {f"machine.{name}": value for name, value in known.items() if value != ()}

    def basis_label(self, name: str) -> str:
        """Return the label of the basis of one field."""
        return self.basis_of.get(name, self.basis)


class MachinesFile(KnowledgeFile):
    """knowledge/machines.yaml, or the machines of a shop."""

    machines: Many[Machine]
