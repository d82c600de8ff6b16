"""The buying specification: the chosen cutter in ISO 13399 symbols, to search any supplier's list with."""

from __future__ import annotations

from millreason.report.page import Say, Section, Table
from millreason.report.words import corner_size, fact_shown, option
from millreason.trace import Answer, Picks, PlanRecord
from millreason.units import plain, show

Row = tuple[str, str, str]


def buying_section(answer: Answer) -> Section | None:
    """Return the specification of the chosen cutter, or None where none was chosen."""
    picks, plan = answer.picks, answer.plan
    if picks is None or plan is None:
        return None
    rows = (*_body(answer, picks, plan), *_insert(answer, picks, plan), *_connection(answer, plan))
    table = Table(("symbol", "what it is", "ask for"), tuple(row for row in rows if row[2]))
    told = Say(
        "Symbols of ISO 13399 (ISO/TS 13399-2 and -3, some of the meanings recalled). "
        "Hold the supplier's figures against them before you buy."
    )
    return Section("buying", "Buying specification", (told, table), after="plan")


def _body(answer: Answer, picks: Picks, plan: PlanRecord) -> tuple[Row, ...]:
    speed = max((step.spindle_speed_rpm for step in plan.steps), default=0.0)
    return (
        ("DC", "cutting diameter", show(picks.diameter_mm, "mm", answer.units)),
        (
            "DCX",
            "cutting diameter, maximum",
            f"at most {show(picks.largest_diameter_mm, 'mm', answer.units)}",
        ),
        (
            "KAPR",
            "tool cutting edge angle",
            "varies with the depth" if picks.lead_deg is None else f"{plain(picks.kappa_deg, 1)} deg",
        ),
        ("PSIR", "tool lead angle", "" if picks.lead_deg is None else f"{plain(picks.lead_deg, 1)} deg"),
        ("ZEFP", "peripheral effective cutting edges", str(picks.teeth)),
        ("CPDF", "differential pitch", "yes" if picks.spacing == "unequal" else "no"),
        ("HAND", "hand", {"right": "R", "left": "L"}.get(picks.hand, option(picks.hand))),
        ("APMX", "depth of cut, maximum", f"at least {show(plan.depth_of_cut_mm, 'mm', answer.units)}"),
        ("GAMP", "rake angle, axial", f"about {picks.axial_rake_deg:+g} deg"),
        ("GAMF", "rake angle, radial", f"about {picks.radial_rake_deg:+g} deg"),
        ("RPMX", "rotational speed, maximum", f"at least {show(speed, 'rpm')}"),
    )


def _insert(answer: Answer, picks: Picks, plan: PlanRecord) -> tuple[Row, ...]:
    feed = plan.steps[-1].feed_per_rev_mm if plan.steps else 0.0
    size = corner_size(picks.corner)
    land = f"at least {show(feed, 'mm', answer.units)} (feed per revolution)" if picks.wiper != "none" else ""
    return (
        ("RE", "corner radius", show(size, "mm", answer.units) if size else ""),
        (
            "CHW",
            "corner chamfer width",
            "chamfered corner (facet), width as supplied" if picks.corner == "facet" else "",
        ),
        ("BS", "wiper edge length", land),
        ("ISO 513", "application of the cutting material", option(picks.application)),
    )


def _connection(answer: Answer, plan: PlanRecord) -> tuple[Row, ...]:
    mounting = option(answer.picks.mounting) if answer.picks else ""
    limit = fact_shown(answer, "machine.changer_mass_kg")
    return (
        (
            "CCMS",
            "connection, machine side",
            ", ".join(word for word in (mounting, fact_shown(answer, "machine.interface")) if word),
        ),
        (
            "LF",
            "functional length of the assembly",
            f"about {show(plan.gauge_length_mm, 'mm', answer.units)}",
        ),
        (
            "WT",
            "weight of the assembly",
            f"about {show(plan.mass_kg, 'kg', answer.units)}" + (f", at most {limit}" if limit else ""),
        ),
    )
