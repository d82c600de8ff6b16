"""The rule base checks itself: every rule against the vocabulary, the others, the knowledge and its tests."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from millreason.rule_audit.conditions import check_conditions
from millreason.rule_audit.counts import count_lines
from millreason.rule_audit.coverage import check_options, check_regions
from millreason.rule_audit.findings import SEVERITIES, AuditFinding, Found, Severity, Subject
from millreason.rule_audit.pairs import check_contradictions, check_repetitions
from millreason.rule_audit.texts import check_bases, check_texts, check_trials
from millreason.rule_audit.usage import check_circles, check_facts, check_knowledge, check_sources

if TYPE_CHECKING:
    from millreason.choice import Adviser

__all__ = ["Audit", "AuditFinding", "audit"]

CHECKS: tuple[Callable[[Subject], Found], ...] = (
    check_conditions,
    check_repetitions,
    check_contradictions,
    check_options,
    check_regions,
    check_circles,
    check_facts,
    check_knowledge,
    check_sources,
    check_texts,
    check_bases,
    check_trials,
)


@dataclass(frozen=True)
class Audit:
    """What was found in a rule base, gravest first, and its counts."""

    findings: tuple[AuditFinding, ...]
    counts: tuple[str, ...]

    def of(self, severity: Severity) -> list[AuditFinding]:
        """Return the findings of one severity."""
        return [finding for finding in self.findings if finding.severity == severity]

    @property
    def sound(self) -> bool:
        """Whether there is no error."""
        return not self.of("error")

    def lines(self, notes: bool = False) -> list[str]:
        """Return the findings and counts as lines; the notes in full only where they are asked for."""
        shown = [str(finding) for finding in self.findings if notes or finding.severity != "note"]
        kinds = Counter(finding.kind for finding in self.of("note"))
        folded = ", ".join(f"{count} {kind}" for kind, count in sorted(kinds.items()))
        if folded and not notes:
            shown.append(f"notes ({folded}): shown with --notes")
        total = ", ".join(f"{len(self.of(severity))} {severity}s" for severity in SEVERITIES)
        return [*shown, *self.counts, f"findings: {total}"]


def audit(adviser: Adviser) -> Audit:
    """Run every check on a loaded rule base.

    Unknown facts, options, strengths and sources never get this far: loading refuses them, each located.
    """
    subject = Subject(adviser)
    found = {finding for check in CHECKS for finding in check(subject)}
    order = {severity: place for place, severity in enumerate(SEVERITIES)}
    ranked = sorted(found, key=lambda entry: (order[entry.severity], entry.finding, entry.kind))
    return Audit(tuple(ranked), tuple(count_lines(subject)))
