"""Stiffness: how far tool, thin floor and thin wall give way, and the depth of cut that stays stable."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.formulas import _checks as check


@dataclass(frozen=True)
class ToolDeflection:
    """Sideways deflection at the cutter: bending of the arbor, tilt in the interface, and their sum."""

    bending_mm: float
    rotation_mm: float
    total_mm: float


@dataclass(frozen=True)
class StableDepth:
    """Longest edge in the cut that stays stable at any speed, and the depth of cut it means."""

    edge_length_mm: float
    depth_mm: float


def tool_deflection(
    force_n: float,
    gauge_length_mm: float,
    shank_diameter_mm: float,
    youngs_modulus_n_mm2: float,
    interface_stiffness_nmm_rad: float,
) -> ToolDeflection:
    """Sideways deflection: ``F L^3 / (3 E I) + F L^2 / k``, with ``I = pi d^4 / 64``.

    Parameters
    ----------
    force_n : float
        Radial force F at the cutter [N].
    gauge_length_mm : float
        Length L from the gauge line to the edge [mm].
    shank_diameter_mm : float
        Diameter d of the arbor, the thinnest long part [mm].
    youngs_modulus_n_mm2 : float
        Young's modulus E of the arbor [N/mm2].
    interface_stiffness_nmm_rad : float
        Stiffness k of the interface against tilt [N.mm/rad].

    Returns
    -------
    ToolDeflection
        Bending, tilt in the interface and total [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Solid round arbor, fixed at the gauge line. Short face-mill arbors give mostly in the interface.

    Examples
    --------
    >>> d = tool_deflection(1000, 150, 63, 210000, 2e9)
    >>> round(d.bending_mm * 1000, 1), round(d.rotation_mm * 1000, 1)
    (6.9, 11.2)

    References
    ----------
    own derivation
    """
    force = check.positive("force [N]", force_n)
    length = check.positive("gauge length [mm]", gauge_length_mm)
    inertia = math.pi * check.positive("arbor diameter [mm]", shank_diameter_mm) ** 4 / 64.0
    modulus = check.positive("Young's modulus [N/mm2]", youngs_modulus_n_mm2)
    bending = force * length**3 / (3.0 * modulus * inertia)
    stiffness = check.positive("interface stiffness [N.mm/rad]", interface_stiffness_nmm_rad)
    rotation = force * length**2 / stiffness
    return ToolDeflection(bending, rotation, bending + rotation)


def interface_separation_moment(face_force_n: float, outer_mm: float, inner_mm: float) -> float:
    """Bending moment at which a face contact starts to open: ``F (Do^2 + Di^2) / (8 Do)``.

    Parameters
    ----------
    face_force_n : float
        Clamping force on the face F [N].
    outer_mm : float
        Outer diameter of the face Do [mm].
    inner_mm : float
        Inner diameter of the face Di; zero for a full face [mm].

    Returns
    -------
    float
        Moment [N.m].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range, or the inner diameter reaches the outer.

    Notes
    -----
    Even pressure on an elastic ring; an estimate. The builder's figure goes first.

    Examples
    --------
    >>> round(interface_separation_moment(14400, 63, 50))
    185

    References
    ----------
    own derivation
    """
    force = check.positive("force on the face [N]", face_force_n)
    outer = check.positive("outer diameter [mm]", outer_mm)
    inner = check.not_negative("inner diameter [mm]", inner_mm)
    inner = inner and check.inside("inner diameter [mm]", inner, 0.0, outer)
    return force * (outer**2 + inner**2) / (8.0 * outer) / 1000.0


def floor_deflection(
    axial_force_n: float,
    span_mm: float,
    thickness_mm: float,
    youngs_modulus_n_mm2: float,
    poisson_ratio: float,
    edges: str,
) -> float:
    """Spring of an unsupported floor under the axial force: ``w = c F a^2 / (16 pi D)``.

    ``D = E t^3 / (12 (1 - nu^2))``; c is 1 for clamped edges and ``(3 + nu) / (1 + nu)`` for resting ones.

    Parameters
    ----------
    axial_force_n : float
        Axial force F on the floor [N].
    span_mm : float
        Unsupported span, the diameter 2 a of a round plate [mm].
    thickness_mm : float
        Thickness of the floor t [mm].
    youngs_modulus_n_mm2 : float
        Young's modulus E of the work [N/mm2].
    poisson_ratio : float
        Poisson's ratio nu of the work [-].
    edges : str
        ``clamped`` or ``resting`` [-].

    Returns
    -------
    float
        Deflection at the middle; the floor springs back by it [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, Poisson's ratio not from 0 to 0.5, or the edges unknown.

    Notes
    -----
    Round thin plate, force at the middle, deflection below half the thickness. Only the axial force
    counts: a wall that bends under the radial force is `wall_deflection`.

    Examples
    --------
    >>> round(floor_deflection(300, 100, 4, 70000, 0.33, "clamped"), 4)
    0.0356

    References
    ----------
    timoshenko-plates
    """
    check.choice("edges of the floor", edges, ("clamped", "resting"))
    ratio = check.between("Poisson's ratio", poisson_ratio, 0.0, 0.5)
    thickness = check.positive("floor thickness [mm]", thickness_mm)
    modulus = check.positive("Young's modulus [N/mm2]", youngs_modulus_n_mm2)
    rigidity = modulus * thickness**3 / (12.0 * (1.0 - ratio**2))
    form = 1.0 if edges == "clamped" else (3.0 + ratio) / (1.0 + ratio)
    radius = check.positive("unsupported span [mm]", span_mm) / 2.0
    force = check.not_negative("axial force [N]", axial_force_n)
    return form * force * radius**2 / (16.0 * math.pi * rigidity)


def wall_deflection(
    across_force_n: float,
    height_mm: float,
    thickness_mm: float,
    loaded_length_mm: float,
    youngs_modulus_n_mm2: float,
) -> float:
    """Bending of an upright wall under a force across it: ``w = F h^3 / (3 E I)``, ``I = b t^3 / 12``.

    Parameters
    ----------
    across_force_n : float
        Force F across the wall at its top [N].
    height_mm : float
        Free height h [mm].
    thickness_mm : float
        Thickness t [mm].
    loaded_length_mm : float
        Length b of wall that carries the force [mm].
    youngs_modulus_n_mm2 : float
        Young's modulus E of the work [N/mm2].

    Returns
    -------
    float
        Deflection of the top [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite, or not above zero (the force may be zero).

    Notes
    -----
    Strip fixed at its foot, free at its ends. The force across is radial where the wall lies at the side of
    the cutter and tangential where the cutter passes over it.

    Examples
    --------
    >>> round(wall_deflection(200, 60, 4, 60, 210000), 2)
    0.21

    References
    ----------
    own derivation
    """
    height = check.positive("wall height [mm]", height_mm)
    length = check.positive("loaded length of the wall [mm]", loaded_length_mm)
    inertia = length * check.positive("wall thickness [mm]", thickness_mm) ** 3 / 12.0
    modulus = check.positive("Young's modulus [N/mm2]", youngs_modulus_n_mm2)
    force = check.not_negative("force across the wall [N]", across_force_n)
    return force * height**3 / (3.0 * modulus * inertia)


def stable_depth(
    stiffness_n_mm: float,
    damping_ratio: float,
    specific_force_n_mm2: float,
    direction_factor: float,
    mean_teeth: float,
    kappa_deg: float,
) -> StableDepth:
    """Depth that stays stable at any speed: ``b = 2 k zeta (1 + zeta) / (Ks mu z)``, ``ap = b sin kappa``.

    Parameters
    ----------
    stiffness_n_mm : float
        Stiffness k of the softest mode [N/mm].
    damping_ratio : float
        Damping ratio zeta of that mode [-].
    specific_force_n_mm2 : float
        Specific cutting force Ks [N/mm2].
    direction_factor : float
        Direction factor mu between force, mode and chip thickness; see `chatter_gain` [-].
    mean_teeth : float
        Mean number of teeth in the cut z [-].
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].

    Returns
    -------
    StableDepth
        Length of edge and depth of cut [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, the damping ratio not below 1, or kappa_r above 90.

    Notes
    -----
    One mode, mean direction, no pockets of stability: the floor of the stability chart. Between the lobes
    deeper cuts are stable.

    Examples
    --------
    >>> round(stable_depth(20000, 0.03, 2500, 0.5, 1.5, 90).depth_mm, 2)
    0.66

    References
    ----------
    koenigsberger-tlusty-1967, schmitz-smith-dynamics
    """
    damping = check.inside("damping ratio", check.positive("damping ratio", damping_ratio), 0.0, 1.0)
    dynamic = 2.0 * check.positive("stiffness [N/mm]", stiffness_n_mm) * damping * (1.0 + damping)
    force = check.positive("specific cutting force [N/mm2]", specific_force_n_mm2)
    gain = force * check.positive("direction factor", direction_factor)
    edge = dynamic / (gain * check.positive("mean teeth in cut", mean_teeth))
    return StableDepth(edge, edge * math.sin(math.radians(check.cutting_edge_angle(kappa_deg))))


def chatter_gain(kappa_deg: float, soft: str) -> float:
    """Share of kappa_r in the direction factor: radial ``sin^2 kappa``, axial ``cos^2 kappa``.

    Parameters
    ----------
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].
    soft : str
        Direction in which the system is soft: ``radial`` (long tool) or ``axial`` (thin floor) [-].

    Returns
    -------
    float
        Factor on the direction factor of `stable_depth` [-].

    Raises
    ------
    OutOfRangeError
        If kappa_r is not above 0 and at most 90, or the direction unknown.

    Notes
    -----
    The edge-normal force only. With ``ap = b sin kappa`` the stable depth of a long tool goes with
    ``1 / sin kappa`` and that of a thin floor with ``sin kappa / cos^2 kappa``.

    Examples
    --------
    >>> round(chatter_gain(45, "radial"), 3), chatter_gain(90, "axial")
    (0.5, 0.0)

    References
    ----------
    own derivation
    """
    check.choice("soft direction", soft, ("radial", "axial"))
    angle = check.cutting_edge_angle(kappa_deg)
    if soft == "axial":
        return 0.0 if angle == 90.0 else math.cos(math.radians(angle)) ** 2
    return math.sin(math.radians(angle)) ** 2
