"""Commands that list and show what is known: rules, materials and machines."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from millreason.console import BAD_INPUT, SHOP, guarded, load, say
from millreason.errors import MillreasonError, did_you_mean

if TYPE_CHECKING:
    from millreason.materials import Materials
    from millreason.materials.book import Material
    from millreason.rulebook import Rule


# ---------------------------------------------------------------------- rules
@click.group()
def rules() -> None:
    """Check, list and show the rules behind the answers."""


@rules.command("check")
@click.option("--notes", is_flag=True, help="Show the notes too: trade-offs, repetitions and what little speaks for.")
@SHOP
@guarded
def rules_check(notes: bool, shop: Path | None) -> None:
    """Load every rule and all knowledge, check them as a whole, and report everything that is wrong.

    The exit code is 2 if there is an error.
    """
    from millreason.rule_audit import audit

    result = audit(load(shop))
    for line in result.lines(notes):
        say(line)
    if not result.sound:
        raise SystemExit(BAD_INPUT)


@rules.command("list")
@click.option("--topic", help="Only the rules of one topic.")
@SHOP
@guarded
def rules_list(topic: str | None, shop: Path | None) -> None:
    """List every rule with the sentence that says it."""
    book = load(shop).rulebook
    topics = sorted(set(book.topics.values()))
    if topic is not None and topic not in topics:
        raise MillreasonError(f"unknown topic {topic!r}.{did_you_mean(topic, topics)} Topics: {', '.join(topics)}.")
    for name in topics if topic is None else [topic]:
        say(f"{name}:")
        for rule in book.rules.values():
            if book.topics[rule.id] == name:
                say(f"  {rule.id:<9} {rule.says}")


@rules.command("show")
@click.argument("rule_id", metavar="ID")
@SHOP
@guarded
def rules_show(rule_id: str, shop: Path | None) -> None:
    """Show one rule whole: conditions, conclusion, reason and what it rests on."""
    book = load(shop).rulebook
    rule = book.rules.get(rule_id.upper())
    if rule is None:
        near = did_you_mean(rule_id.upper(), book.rules)
        raise MillreasonError(f"unknown rule {rule_id!r}.{near} See 'millreason rules list'.")
    for line in _rule_lines(rule, book.places[rule.id], book.topics[rule.id]):
        say(line)


def _rule_lines(rule: Rule, place: str, topic: str) -> list[str]:
    from millreason.facts import basis_record
    from millreason.report.words import basis_text
    from millreason.rulebook import describe

    conclusion = rule.then.model_dump(by_alias=True, exclude_none=True, exclude_defaults=True)
    told = "; ".join(f"{name} {_flat(value)}" for name, value in conclusion.items())
    return [
        f"{rule.id} {rule.name}",
        rule.says,
        "",
        f"topic:  {topic} ({place})",
        f"stage:  {rule.stage}",
        *(
            f"{'when:' if place == 0 else '  and'}   {describe(name, condition)}"
            for place, (name, condition) in enumerate(rule.when.items())
        ),
        f"then:   {told}",
        f"why:    {rule.why}",
        f"rests:  {basis_text(basis_record(rule.basis))}",
    ]


def _flat(value: object) -> str:
    if isinstance(value, dict):
        return ", ".join(f"{name} = {_flat(inner)}" for name, inner in value.items())
    if isinstance(value, list | tuple):
        return ", ".join(_flat(inner) for inner in value)
    return f"{value:g}" if isinstance(value, float) else str(value)


# ---------------------------------------------------------------------- materials and machines
@click.group()
def materials() -> None:
    """List, find and show the materials that are known."""


@materials.command("list")
@click.option("--group", type=click.Choice(["P", "M", "K", "N", "S", "H"]), help="Only one ISO 513 group.")
@SHOP
@guarded
def materials_list(group: Any, shop: Path | None) -> None:
    """List every material with its family."""
    known = load(shop).materials
    for material in known.entries(group):
        say(_material_line(known, material))


@materials.command("find")
@click.argument("text")
@SHOP
@guarded
def materials_find(text: str, shop: Path | None) -> None:
    """Find the material a text means, as a job would: '304 stainless plate', 1.2379, brass."""
    from millreason.materials.search import Ambiguous, Found, find_material

    known = load(shop).materials
    result = find_material(known.book, text)
    if isinstance(result, Found):
        say(_material_line(known, result.material))
        say(f"  state {result.state.id.replace('_', ' ')}, {result.state.hb_min:g} to {result.state.hb_max:g} HB")
        for doubt in result.doubts:
            say(f"  {doubt}")
        return
    say(f"{result.why} {result.question}" if isinstance(result, Ambiguous) else result.why)
    near = result.candidates if isinstance(result, Ambiguous) else known.search(text)
    for material in near:
        say(_material_line(known, material))
    if not near and not isinstance(result, Ambiguous):
        names = f" Near names: {', '.join(result.near)}." if result.near else ""
        raise MillreasonError(f"no material is known by {text!r}.{names} See 'millreason materials list'.")


def _material_line(known: Materials, material: Material) -> str:
    groups = "/".join(known.book.groups(material))
    return f"{groups:<4} {material.id:<30} {known.book.family(material).name}"


@materials.command("show")
@click.argument("name", metavar="ID")
@SHOP
@guarded
def materials_show(name: str, shop: Path | None) -> None:
    """Show everything held on one material, with the source of every value."""
    from millreason.facts import basis_record
    from millreason.report.words import basis_text

    known = load(shop).materials
    entries = known.book.materials
    if name not in entries:
        near = did_you_mean(name, entries)
        raise MillreasonError(f"unknown material {name!r}.{near} See 'millreason materials find TEXT'.")
    for fact in known.show(entries[name]):
        rests = basis_text(basis_record(fact.basis)) if fact.basis else ""
        say(f"{fact.name:<34} {_flat(fact.value)}" + (f"  [{rests}]" if rests else ""))


@click.group()
def machines() -> None:
    """List and show the machines that a job can name."""


@machines.command("list")
@SHOP
@guarded
def machines_list(shop: Path | None) -> None:
    """List every machine by the name a job gives it."""
    knowledge = load(shop).knowledge
    for machine in knowledge.machines.values():
        say(f"{machine.id:<28} {machine.title}")


@machines.command("show")
@click.argument("name", metavar="ID")
@SHOP
@guarded
def machines_show(name: str, shop: Path | None) -> None:
    """Show every figure of one machine."""
    known = load(shop).knowledge.machines
    if name not in known:
        raise MillreasonError(f"unknown machine {name!r}.{did_you_mean(name, known)} See 'millreason machines list'.")
    _show(known[name].model_dump(by_alias=True, exclude_none=True))


def _show(fields: dict[str, Any]) -> None:
    for field, value in fields.items():
        if value not in ((), [], {}, ""):
            say(f"{field:<22} {_flat(value)}")
