"""Hardness scales: conversion by published tables with their limits, and how force moves with hardness."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from pydantic import Field

from millreason.errors import DataError, Finding, OutOfRangeError
from millreason.provenance import Basis, KnowledgeFile, Many, Record, Source, check_bases
from millreason.yaml_source import Document, read_model, read_yaml

Scale = Literal["hb", "hv", "hrc", "mpa"]
Kind = Literal["steel", "austenitic", "grey_iron", "other"]

SCALE_NAMES: Mapping[str, str] = {"hb": "HB", "hv": "HV", "hrc": "HRC", "mpa": "MPa"}


class Table(Record):
    """One conversion table; every column runs from soft to hard, None where the table is empty."""

    title: str
    basis: str
    holds_for: Many[Kind]
    note: str = ""
    columns: dict[Scale, Many[float | None]]


class BrinellLimit(Record):
    """Above which Brinell figure a reading is only a conversion."""

    hb: float
    says: str
    basis: str


class TensileLine(Record):
    """Tensile strength from Brinell hardness as a straight line, for materials without a table."""

    factor: float
    offset: float
    hb: Many[float]
    basis: str
    says: str


class PowerRun(Record):
    """Unit power (J/mm3) or force (N/mm2) over Brinell hardness."""

    for_: str = Field(alias="for")
    hb: Many[float]
    j_mm3: Many[float] = ()
    n_mm2: Many[float] = ()
    basis: str

    @property
    def values(self) -> tuple[float, ...]:
        """The figures of the run, whichever unit it is kept in."""
        return self.j_mm3 or self.n_mm2


class HardnessKnowledge(KnowledgeFile):
    """Content of knowledge/hardness.yaml."""

    tables: dict[str, Table]
    order: Many[str]
    brinell_limit: BrinellLimit
    tensile: dict[Kind, TensileLine]
    not_for: dict[Kind, str]
    unit_power: dict[str, PowerRun]
    force_runs: dict[str, PowerRun]

    @property
    def runs(self) -> dict[str, PowerRun]:
        """All runs over hardness by name."""
        return {**self.unit_power, **self.force_runs}


@dataclass(frozen=True)
class Converted:
    """A converted hardness or strength, its table, and whether that table is meant for the material."""

    value: float
    scale: Scale
    table: str
    basis: Basis
    notes: tuple[str, ...] = ()
    in_scope: bool = True


@dataclass(frozen=True)
class ForceRatio:
    """Factor on the cutting force for another hardness, with its basis and what limits it."""

    ratio: float
    basis: Basis
    limit: str = ""


def load_hardness(root: Path, sources: Mapping[str, Source]) -> HardnessKnowledge:
    """Read knowledge/hardness.yaml below a data root; all errors come at once, with their lines."""
    document = read_yaml(root / "knowledge" / "hardness.yaml", "knowledge/hardness.yaml")
    knowledge = read_model(document, HardnessKnowledge)
    check_bases(document, knowledge.bases, sources)
    findings = _check_columns(document, knowledge)
    if findings:
        raise DataError(findings)
    return knowledge


def _check_columns(document: Document, knowledge: HardnessKnowledge) -> list[Finding]:
    findings = []
    for name, table in knowledge.tables.items():
        if len({len(column) for column in table.columns.values()}) != 1:
            findings.append(
                document.finding(("tables", name, "columns"), "has columns of different length. Fill with null.")
            )
        if table.basis not in knowledge.bases:
            findings.append(document.finding(("tables", name, "basis"), f"{table.basis!r} is not under bases."))
    for name in knowledge.order:
        if name not in knowledge.tables:
            findings.append(document.finding(("order",), f"{name!r} is not a table."))
    for name, run in knowledge.runs.items():
        if len(run.hb) != len(run.values) or list(run.hb) != sorted(set(run.hb)):
            place = "unit_power" if name in knowledge.unit_power else "force_runs"
            findings.append(document.finding((place, name), "needs rising hb and as many figures as hb."))
    return findings


def convert_hardness(
    knowledge: HardnessKnowledge, value: float, scale_from: Scale, scale_to: Scale, kind: Kind = "steel"
) -> Converted:
    """Convert a hardness by the first table that holds for the material and covers the value.

    Raises
    ------
    OutOfRangeError
        if no table holds for the material, or none covers the value on both scales.
    """
    if scale_from == scale_to:
        return Converted(value, scale_to, "as given", Basis(derived="the figure as given"))
    if (scale_from, scale_to) == ("hb", "mpa") and kind in knowledge.tensile:
        return _tensile_by_line(knowledge, value, kind)
    if kind != "steel":
        raise OutOfRangeError(
            "hardness conversion", f"asked for {kind} material", f"for steel. {_scope(knowledge, kind)}"
        )
    return _by_tables(knowledge, value, scale_from, scale_to)


def hardness_as_hb(knowledge: HardnessKnowledge, value: float, scale: Scale, kind: Kind = "steel") -> Converted:
    """Convert to Brinell for finding data: outside the scope of the steel tables too, but then marked so.

    Raises
    ------
    OutOfRangeError
        if no table covers the value.
    """
    if scale == "hb" or kind == "steel":
        return convert_hardness(knowledge, value, scale, "hb")
    found = _by_tables(knowledge, value, scale, "hb")
    return Converted(
        found.value, "hb", found.table, found.basis, (*found.notes, _scope(knowledge, kind)), in_scope=False
    )


def _scope(knowledge: HardnessKnowledge, kind: Kind) -> str:
    return knowledge.not_for.get(kind, knowledge.not_for["other"])


def _tensile_by_line(knowledge: HardnessKnowledge, hb: float, kind: Kind) -> Converted:
    line = knowledge.tensile[kind]
    if not line.hb[0] <= hb <= line.hb[1]:
        raise OutOfRangeError(
            "Brinell hardness",
            f"{hb:g} HB",
            f"between {line.hb[0]:g} and {line.hb[1]:g} HB for this relation",
        )
    strength = line.factor * hb + line.offset
    return Converted(
        round(strength),
        "mpa",
        f"{line.factor:g} HB {line.offset:+g}",
        knowledge.bases[line.basis],
        (line.says,),
    )


def _by_tables(knowledge: HardnessKnowledge, value: float, scale_from: Scale, scale_to: Scale) -> Converted:
    spans = []
    for name in knowledge.order:
        table = knowledge.tables[name]
        points = _points(table, scale_from, scale_to)
        if not points:
            continue
        spans.append(f"{points[0][0]:g} to {points[-1][0]:g} {SCALE_NAMES[scale_from]} ({table.title})")
        if points[0][0] <= value <= points[-1][0]:
            notes = [table.note] if table.note else []
            number = interpolate([x for x, _ in points], [y for _, y in points], value)
            if (
                "hb" in (scale_from, scale_to)
                and (value if scale_from == "hb" else number) > knowledge.brinell_limit.hb
            ):
                notes.append(knowledge.brinell_limit.says)
            return Converted(round(number), scale_to, table.title, knowledge.bases[table.basis], tuple(notes))
    allowed = "; ".join(spans) or "on scales that a table joins"
    raise OutOfRangeError(
        "hardness", f"{value:g} {SCALE_NAMES[scale_from]} to {SCALE_NAMES[scale_to]}", f"within {allowed}"
    )


def _points(table: Table, scale_from: Scale, scale_to: Scale) -> list[tuple[float, float]]:
    pairs = zip(table.columns.get(scale_from, []), table.columns.get(scale_to, []), strict=False)
    return [(x, y) for x, y in pairs if x is not None and y is not None]


def interpolate(xs: Sequence[float], ys: Sequence[float], x: float) -> float:
    """Return y at x on straight lines between rising points; the ends are held beyond them.

    Examples
    --------
    >>> interpolate([100, 200], [1.0, 3.0], 150)
    2.0
    >>> interpolate([100, 200], [1.0, 3.0], 250)
    3.0
    """
    if x <= xs[0]:
        return ys[0]
    if x >= xs[-1]:
        return ys[-1]
    right = bisect_right(xs, x)
    share = (x - xs[right - 1]) / (xs[right] - xs[right - 1])
    return ys[right - 1] + share * (ys[right] - ys[right - 1])


def hardness_force_ratio(knowledge: HardnessKnowledge, run: str | None, hb_from: float, hb_to: float) -> ForceRatio:
    """Return the factor on the cutting force when the hardness is `hb_to` instead of `hb_from` [HB].

    The force moves as unit power does along a run of published figures; without a run it is not moved.
    """
    if run is None:
        return ForceRatio(
            1.0,
            Basis(derived="not moved"),
            "No run of force over hardness is held for this material; the force is not moved.",
        )
    figures = knowledge.runs[run]
    ratio = interpolate(figures.hb, figures.values, hb_to) / interpolate(figures.hb, figures.values, hb_from)
    text = f"force moved as unit power from {hb_from:.0f} to {hb_to:.0f} HB ({figures.for_}): factor {ratio:.3f}"
    limit = ""
    if not figures.hb[0] <= hb_to <= figures.hb[-1]:
        span = f"{figures.hb[0]:g} to {figures.hb[-1]:g} HB"
        limit = f"The run for {figures.for_} covers {span}; beyond that its end is held."
    return ForceRatio(ratio, Basis(derived=f"{text}; {basis_text(knowledge.bases[figures.basis])}"), limit)


def unit_power(knowledge: HardnessKnowledge, run: str, hb: float) -> tuple[float, Basis]:
    """Return unit power [J/mm3] at the cutter for a sharp tool and a feed of 0.30 mm, with its basis.

    Raises
    ------
    OutOfRangeError
        if the hardness lies outside the run, or the run holds no unit power.
    """
    figures = knowledge.unit_power.get(run)
    if figures is None:
        raise OutOfRangeError("unit power run", run, f"one of {', '.join(knowledge.unit_power)}")
    if not figures.hb[0] <= hb <= figures.hb[-1]:
        raise OutOfRangeError(
            "Brinell hardness",
            f"{hb:g} HB",
            f"between {figures.hb[0]:g} and {figures.hb[-1]:g} HB for {figures.for_}",
        )
    return interpolate(figures.hb, figures.values, hb), knowledge.bases[figures.basis]


def basis_text(basis: Basis | None) -> str:
    """Return a basis as a short phrase, for use inside another basis."""
    if basis is None:
        return "the shop's own record"
    if basis.cited is not None:
        return f"{basis.cited.source}, {basis.cited.where} ({basis.cited.seen})"
    return basis.remark
