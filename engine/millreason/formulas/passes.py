"""Passes: how many side by side and in depth, how far each travels, and how long that takes."""

from __future__ import annotations

import math

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check
from millreason.formulas.entry_paths import (
    HelixPath,
    HoleWindow,
    flat_floor_hole_window,
    helix_path,
    ramp_length,
    ramp_limit_angle,
)
from millreason.formulas.travel import (
    approach,
    approach_centred,
    approach_flush,
    feed_travel,
    full_overrun_travel,
    pass_time,
    roll_in_length,
)

__all__ = [
    "HelixPath",
    "HoleWindow",
    "approach",
    "approach_centred",
    "approach_flush",
    "balanced_depth",
    "balanced_width",
    "feed_travel",
    "flat_floor_hole_window",
    "full_overrun_travel",
    "helix_path",
    "pass_time",
    "passes_across",
    "passes_in_depth",
    "ramp_length",
    "ramp_limit_angle",
    "roll_in_length",
]


def passes_across(width_mm: float, diameter_mm: float, overlap_mm: float, largest_ratio: float) -> int:
    """Count of passes side by side: the fewest N with ``(W + (N - 1) overlap) / N <= ratio D``.

    Parameters
    ----------
    width_mm : float
        Width W of the face [mm].
    diameter_mm : float
        Cutter diameter D at the floor [mm].
    overlap_mm : float
        Overlap of neighbouring passes [mm].
    largest_ratio : float
        Largest width of cut over diameter [-].

    Returns
    -------
    int
        Number of passes [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range, or the overlap leaves no progress.

    Notes
    -----
    Every pass is then as wide as the others, see `balanced_width`.

    Examples
    --------
    >>> passes_across(200, 80, 3, 0.80)
    4

    References
    ----------
    common practice
    """
    width = check.positive("width of the face [mm]", width_mm)
    ratio = check.above_up_to("largest width over diameter", largest_ratio, 0.0, 1.0)
    widest = ratio * check.positive("cutter diameter [mm]", diameter_mm)
    overlap = check.not_negative("overlap [mm]", overlap_mm)
    if overlap >= widest:
        raise OutOfRangeError("overlap [mm]", overlap_mm, f"below the widest pass, {widest:g}")
    return max(1, math.ceil((width - overlap) / (widest - overlap) * (1.0 - check.ROUNDING)))


def balanced_width(width_mm: float, passes: int, overlap_mm: float) -> float:
    """Width of each of several equal passes: ``(W + (N - 1) overlap) / N``.

    Parameters
    ----------
    width_mm : float
        Width W of the face [mm].
    passes : int
        Number of passes N side by side [-].
    overlap_mm : float
        Overlap of neighbouring passes [mm].

    Returns
    -------
    float
        Width of cut of one pass [mm]; the first pass alone cuts all of it.

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range, or the overlap is as wide as a pass.

    Notes
    -----
    Avoids a narrow last strip.

    Examples
    --------
    >>> balanced_width(200, 4, 4)
    53.0

    References
    ----------
    common practice
    """
    number = check.count("number of passes", passes)
    width = check.positive("width of the face [mm]", width_mm)
    each = (width + (number - 1) * check.not_negative("overlap [mm]", overlap_mm)) / number
    if number > 1 and overlap_mm >= each:
        raise OutOfRangeError("overlap [mm]", overlap_mm, "below the width of one pass")
    return each


def passes_in_depth(stock_mm: float, largest_depth_mm: float) -> int:
    """Layers in depth: the fewest N with ``stock / N <= largest depth``.

    Parameters
    ----------
    stock_mm : float
        Stock to remove [mm].
    largest_depth_mm : float
        Largest depth of one layer [mm].

    Returns
    -------
    int
        Number of layers [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the layers are past counting.

    Notes
    -----
    A finishing layer of its own is taken off the stock first.

    Examples
    --------
    >>> passes_in_depth(3.0, 1.0), passes_in_depth(3.1, 1.0)
    (3, 4)

    References
    ----------
    own derivation
    """
    stock = check.positive("stock [mm]", stock_mm)
    layers = stock / check.positive("largest depth [mm]", largest_depth_mm)
    return max(1, math.ceil(check.finite("number of layers", layers) * (1.0 - check.ROUNDING)))


def balanced_depth(stock_mm: float, passes: int) -> float:
    """Depth of each of several equal layers: ``stock / N``.

    Parameters
    ----------
    stock_mm : float
        Stock to remove [mm].
    passes : int
        Number of layers N [-].

    Returns
    -------
    float
        Depth of cut of one layer [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the layers are not a whole number.

    Notes
    -----
    Keeps the last layer from rubbing.

    Examples
    --------
    >>> balanced_depth(3.0, 2)
    1.5

    References
    ----------
    common practice
    """
    return check.positive("stock [mm]", stock_mm) / check.count("number of passes", passes)
