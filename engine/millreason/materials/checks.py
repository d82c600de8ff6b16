"""Checks that every label of the material files leads somewhere, with the place of each fault."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from typing import TYPE_CHECKING

from millreason.errors import Finding, did_you_mean
from millreason.materials.hardness import HardnessKnowledge
from millreason.materials.records import (
    FamilyFile,
    ForceFile,
    MaterialFile,
    MaterialRecord,
    SpeedFile,
    StateRecord,
    WordFile,
)
from millreason.yaml_source import Document, Key

if TYPE_CHECKING:
    from millreason.materials.book import MaterialBook

# Rounded tables may miss their own nominal value by this share.
_ROUNDING = 5e-4


def check_record(
    document: Document, name: str, record: MaterialRecord, book: MaterialBook, shop: bool, file: MaterialFile
) -> list[Finding]:
    """Check one material against the tables it points to."""
    key = ("materials", name)
    findings = [*_record_labels(document, key, record, book), *_record_names(document, key, record)]
    labels = {**file.basis_of, **record.basis_of}
    if not shop and set(labels) != {"names", "hb"}:
        findings.append(document.finding(key, "has no basis for its names and hardness. Add basis_of."))
    if not record.states:
        findings.append(document.finding((*key, "states"), "is empty. Give a state with its hardness."))
    for state_name, state in record.states.items():
        findings += _check_state(document, (*key, "states", state_name), state, book)
        findings += _unknown(document, (*key, "states", state_name), state_name, book.words.states, "words.yaml")
    return findings


def _unknown(document: Document, key: Key, word: str, known: Collection[str], where: str) -> Iterator[Finding]:
    if word not in known:
        yield document.finding(key, f"{word!r} is not in {where}.{did_you_mean(word, known)}")


def _record_labels(document: Document, key: Key, record: MaterialRecord, book: MaterialBook) -> Iterator[Finding]:
    yield from _unknown(document, (*key, "family"), record.family, book.families, "families.yaml")
    if record.speed is not None:
        yield from _unknown(document, (*key, "speed"), record.speed, book.speeds.runs, "speeds.yaml, runs")


def _record_names(document: Document, key: Key, record: MaterialRecord) -> Iterator[Finding]:
    names = [name for part in record.names.values() for name in ([part] if isinstance(part, str) else part)]
    if not any(part for system, part in record.names.items() if system != "near"):
        yield document.finding((*key, "names"), "has no exact name. Give one.")
    for name, state in record.state_names.items():
        place = (*key, "state_names", name)
        yield from _unknown(document, place, name, names, "its names")
        yield from _unknown(document, place, state, record.states, "its states")


def _check_state(document: Document, key: Key, state: StateRecord, book: MaterialBook) -> Iterator[Finding]:
    if len(state.hb) != 2 or state.hb[0] >= state.hb[1]:
        yield document.finding((*key, "hb"), f"is {list(state.hb)}; give two rising figures.")
    rows = [row for row in (state.force, state.group_force) if row is not None]
    if len(rows) != 1:
        yield document.finding(key, "needs exactly one of force (its own) and group_force (its group's).")
    for row in rows:
        yield from _unknown(document, key, row, book.forces, "forces.yaml, rows")
    if state.speed is not None:
        yield from _unknown(document, (*key, "speed"), state.speed, book.speeds.runs, "speeds.yaml, runs")


def check_forces(
    document: Document, file: ForceFile | MaterialFile, chip_mm: float, hardness: HardnessKnowledge
) -> Iterator[Finding]:
    """Check that every force row names its family and run, and that its band holds its nominal value."""
    shipped = isinstance(file, ForceFile)
    for name, row in (file.rows if isinstance(file, ForceFile) else file.forces).items():
        key = ("rows" if shipped else "forces", name)
        if isinstance(file, ForceFile):
            yield from _unknown(document, (*key, "family"), row.family, file.families, "families of this file")
        if row.follows is not None:
            yield from _unknown(document, (*key, "follows"), row.follows, hardness.runs, "hardness.yaml")
        nominal = row.kc11 * chip_mm**-row.mc
        low, high = nominal * (1 + _ROUNDING), nominal * (1 - _ROUNDING)
        if len(row.band) != 2 or row.band[0] > low or row.band[1] < high:
            message = f"{list(row.band)} does not hold the nominal {nominal:.0f} N/mm2 at {chip_mm:g} mm."
            yield document.finding((*key, "band"), message)


def check_speeds(document: Document, speeds: SpeedFile, families: FamilyFile) -> Iterator[Finding]:
    """Check that rows rise, runs name rows, and every family and hardened state has its run."""
    for name, row in speeds.rows.items():
        for part, count in ((row.hb, 2), (row.speed, 3), (row.fz45, 3)):
            if len(part) != count or list(part) != sorted(part):
                yield document.finding(("rows", name), f"{list(part)} must be {count} rising figures.")
    for name, run in speeds.runs.items():
        for row_name in run.rows:
            yield from _unknown(document, ("runs", name), row_name, speeds.rows, "rows")
    yield from _check_edges(document, speeds)
    for name, family in families.families.items():
        if family.speed not in speeds.runs:
            message = f"{family.speed!r} is missing; family {name} of families.yaml asks for it."
            yield document.finding(("runs",), message)


def _check_edges(document: Document, speeds: SpeedFile) -> Iterator[Finding]:
    for edge, entries in speeds.edges.items():
        for run, entry in entries.items():
            yield from _unknown(document, ("edges", edge), run, speeds.runs, "runs")
            if len(entry.speed) != 3 or list(entry.speed) != sorted(entry.speed):
                yield document.finding(("edges", edge, run), f"{list(entry.speed)} must be 3 rising figures.")


def check_words(document: Document, words: WordFile, materials: Mapping[str, object]) -> Iterator[Finding]:
    """Check that the words for groups name materials that exist."""
    for place, group in enumerate(words.general):
        for entry in group.such_as:
            yield from _unknown(document, ("general", place, "such_as"), entry, materials, "the materials")
