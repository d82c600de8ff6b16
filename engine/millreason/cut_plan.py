"""The records of a cut plan: how the passes lie, what each kind of layer asks of the machine, and the whole plan."""

from __future__ import annotations

from dataclasses import dataclass, field

from millreason.candidates import Candidate
from millreason.formulas.engagement import Engagement, teeth_in_cut
from millreason.worksheet import Worksheet


@dataclass(frozen=True)
class Layout:
    """How the passes lie on the face: their number, width, place of the cutter and the arc they cut."""

    passes: int
    width_mm: float
    overlap_mm: float
    offset_mm: float
    entry_gap_mm: float
    arc: Engagement
    one_pass: bool


@dataclass(frozen=True)
class Load:
    """What one kind of layer asks of the machine."""

    name: str
    layers: int
    depth_mm: float
    kappa_top_deg: float
    kappa_mean_deg: float
    cutting_speed_m_min: float
    spindle_speed_rpm: float
    feed_per_tooth_mm: float
    table_feed_mm_min: float
    hex_mm: float
    mean_chip_mm: float
    specific_force_n_mm2: float
    force_factor: float
    removal_cm3_min: float
    net_power_kw: float
    available_kw: float
    torque_nm: float
    peak_torque_nm: float
    peak_tangential_n: float
    tooth_force_n: float
    radial_n: float
    axial_n: float

    def use_worn(self, wear_factor: float) -> float:
        """Share of the power at this speed that worn edges take."""
        return self.net_power_kw * wear_factor / self.available_kw


@dataclass
class Plan:
    """The plan of one candidate, with the worksheet it was computed on."""

    candidate: Candidate
    layout: Layout
    loads: list[Load]
    direction: str
    speed_wanted_m_min: float
    hex_wanted_mm: float
    hex_least_mm: float
    layers_for_power: int
    feed_left: float
    orthogonal_rake_deg: float
    sheet: Worksheet = field(default_factory=Worksheet)

    @property
    def heaviest(self) -> Load:
        """The layer that takes the largest share of the power at its speed."""
        return max(self.loads, key=lambda load: load.net_power_kw / load.available_kw)

    @property
    def last(self) -> Load:
        """The layer that leaves the final surface."""
        return self.loads[-1]

    @property
    def layers(self) -> int:
        """Number of layers in depth."""
        return sum(load.layers for load in self.loads)


def plan_teeth(plan: Plan) -> list[float]:
    """Return least, mean and most teeth in the cut."""
    teeth = plan.sheet.use("plan.teeth_in_cut", "", teeth_in_cut, plan.candidate.teeth, plan.layout.arc.arc_deg)
    return [float(teeth.least), teeth.mean, float(teeth.most)]
