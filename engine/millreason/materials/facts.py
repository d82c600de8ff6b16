"""The facts of a material in a state at a hardness, each with its origin."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any, NamedTuple

from millreason.errors import OutOfRangeError
from millreason.materials.book import Material, MaterialBook, State
from millreason.materials.hardness import ForceRatio, basis_text, hardness_force_ratio, interpolate, unit_power
from millreason.materials.records import Group, SpeedRow
from millreason.provenance import Basis


class MaterialFact(NamedTuple):
    """One fact with its basis; no basis means a shop's own record."""

    name: str
    value: Any
    basis: Basis | None


@dataclass(frozen=True)
class SpeedPick:
    """Least, start and most speed and feed for a hardness, and the rows they came from."""

    speed: tuple[float, ...]
    fz45: tuple[float, ...]
    rows: tuple[str, ...]
    edge: str
    basis: Basis
    notes: tuple[str, ...] = ()


def facts_of_state(book: MaterialBook, material: Material, state: State, hb: float | None) -> list[MaterialFact]:
    """Return every fact of a material; without a hardness the middle of the state's range holds."""
    family, bases = book.family(material), book.family_file.bases
    traits = bases[book.family_file.basis_of["traits"]]
    return [
        MaterialFact("material.id", material.id, material.names_basis),
        MaterialFact("material.name", material.name, material.names_basis),
        MaterialFact("material.family", family.name, bases[book.family_file.basis_of["groups"]]),
        MaterialFact("material.iso_group", state.group, _group_basis(book, state)),
        MaterialFact("material.chip_form", state.chip, traits),
        MaterialFact("material.traits", state.traits, traits),
        MaterialFact("material.hazards", material.hazards, traits),
        MaterialFact("material.level", "own" if state.own_force else "group", _level_basis(book, state)),
        *_force_facts(book, state, hb),
        *_speed_facts(book, state, hb),
    ]


def _group_basis(book: MaterialBook, state: State) -> Basis:
    label = book.family_file.hardened.basis if state.group == "H" else book.family_file.basis_of["groups"]
    return book.family_file.bases[label]


def _level_basis(book: MaterialBook, state: State) -> Basis:
    row, _ = book.forces[state.force]
    whose = "the alloy's own" if state.own_force else "its group's only"
    return Basis(derived=f"force is {whose} ({row.for_}, {row.type}); speed and feed are always those of a group")


def _force_facts(book: MaterialBook, state: State, hb: float | None) -> Iterator[MaterialFact]:
    row, basis = book.forces[state.force]
    chip = book.reference_chip_mm
    nominal = row.kc11 * chip**-row.mc
    ratio = _force_ratio(book, state, hb)
    moved = basis
    if ratio.ratio != 1.0:
        origin = f"{row.kc11:g} N/mm2 ({basis_text(basis)})"
        moved = Basis(derived=f"{origin}; {basis_text(ratio.basis)}")
    band = Basis(derived=f"spread of the tables at a chip of {chip:g} mm, nominal {nominal:.0f} N/mm2")
    yield MaterialFact("material.kc11_n_mm2", round(row.kc11 * ratio.ratio), moved)
    yield MaterialFact("material.mc", row.mc, basis)
    yield MaterialFact("material.kc_low_ratio", round(min(row.band[0] / nominal, 1.0), 3), band)
    yield MaterialFact("material.kc_high_ratio", round(max(row.band[1] / nominal, 1.0), 3), band)
    if row.follows in book.hardness.unit_power:
        yield from _unit_power_fact(book, row.follows, state.hb_typical if hb is None else hb)


def _unit_power_fact(book: MaterialBook, run: str | None, hb: float) -> Iterator[MaterialFact]:
    try:
        value, basis = unit_power(book.hardness, run or "", hb)
    except OutOfRangeError:
        return
    yield MaterialFact("material.unit_power_j_mm3", round(value, 3), basis)


def _force_ratio(book: MaterialBook, state: State, hb: float | None) -> ForceRatio:
    if hb is None:
        return ForceRatio(1.0, Basis(derived="no hardness given"))
    row, _ = book.forces[state.force]
    return hardness_force_ratio(book.hardness, row.follows, state.hb_typical, hb)


def notes_of_state(book: MaterialBook, material: Material, state: State, hb: float | None) -> tuple[str, ...]:
    """Return sentences on what limits force and speed here, and the notes of the rows used."""
    row, _ = book.forces[state.force]
    texts = (
        _force_ratio(book, state, hb).limit,
        f"Force data for {row.for_}: {row.note}" if row.note else "",
        *speed_pick(book, state, hb).notes,
        material.note,
    )
    return tuple(dict.fromkeys(text for text in texts if text))


def _speed_facts(book: MaterialBook, state: State, hb: float | None) -> Iterator[MaterialFact]:
    pick = speed_pick(book, state, hb)
    for place, part in enumerate(("min", "start", "max")):
        yield MaterialFact(f"material.speed_{part}_m_min", round(pick.speed[place]), pick.basis)
        yield MaterialFact(f"material.fz45_{part}_mm", round(pick.fz45[place], 3), pick.basis)
    for edge, runs in book.speeds.edges.items():
        if own := runs.get(state.speed):
            for part, value in zip(("min", "start", "max"), own.speed, strict=True):
                yield MaterialFact(f"material.{edge}_speed_{part}_m_min", value, book.speeds.bases[own.basis])


def speed_pick(book: MaterialBook, state: State, hb: float | None = None) -> SpeedPick:
    """Return speed [m/min] and feed per tooth at 45 degrees [mm] along the run of rows at a hardness [HB]."""
    hardness = state.hb_typical if hb is None else hb
    run = book.speeds.runs[state.speed]
    rows = [book.speeds.rows[name] for name in run.rows]
    if len(rows) == 1:
        return _from_one_row(book, rows[0], hardness, run.half_band)
    middles = [sum(row.hb) / 2 for row in rows]
    used = _rows_around(rows, middles, hardness)
    basis = book.speeds.bases[used[0].basis]
    if len(used) > 1:
        between = " and ".join(repr(row.for_) for row in used)
        basis = Basis(derived=f"straight line between {between} at {hardness:.0f} HB; {basis_text(basis)}")
    return SpeedPick(
        tuple(interpolate(middles, [row.speed[part] for row in rows], hardness) for part in range(3)),
        tuple(interpolate(middles, [row.fz45[part] for row in rows], hardness) for part in range(3)),
        tuple(row.for_ for row in used),
        used[-1].edge,
        basis,
        _notes(used, rows, hardness),
    )


def _rows_around(rows: Sequence[SpeedRow], middles: Sequence[float], hb: float) -> list[SpeedRow]:
    """Return the row, or the two rows, that the value at a hardness is made of."""
    below = [place for place, middle in enumerate(middles) if middle <= hb]
    above = [place for place, middle in enumerate(middles) if middle >= hb]
    places = {below[-1] if below else 0, above[0] if above else len(rows) - 1}
    return [rows[place] for place in sorted(places)]


def _from_one_row(book: MaterialBook, row: SpeedRow, hb: float, half_band: bool) -> SpeedPick:
    basis = book.speeds.bases[row.basis]
    least, start, most = row.speed
    if half_band:
        places = [row.hb[0], sum(row.hb) / 2, row.hb[1]]
        moved = interpolate(places, [(start + most) / 2, start, (least + start) / 2], hb)
        if moved != start:
            why = basis_text(book.speeds.bases["half_band"])
            basis = Basis(derived=f"start of the row {row.for_!r} moved to {hb:.0f} HB; {why}")
        start = moved
    return SpeedPick((least, start, most), row.fz45, (row.for_,), row.edge, basis, _notes([row], [row], hb))


def _notes(used: Sequence[SpeedRow], rows: Sequence[SpeedRow], hb: float) -> tuple[str, ...]:
    low, high = min(row.hb[0] for row in rows), max(row.hb[1] for row in rows)
    limit = ""
    if not low <= hb <= high:
        limit = f"Start speeds are held for {low:g} to {high:g} HB; at {hb:.0f} HB the nearest end is used."
    said = [f"Speed data for {row.for_}: {row.note}" for row in used if row.note]
    return (limit, *said) if limit else tuple(said)


def uncoated_factor(book: MaterialBook, group: Group) -> tuple[float, Basis] | None:
    """Return the factor on speed for uncoated carbide, where a source gives one."""
    entry = book.speeds.uncoated.get(group)
    return (entry.factor, book.speeds.bases[entry.basis]) if entry else None
