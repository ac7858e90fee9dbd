"""What a manifest says of the interlock rules: each kept, not applied, or allowed step by step.

The rules are not judged again here; what is read is that no rule that came out otherwise has let a
table through.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.reread.reading import Part, Unsound

FINE = frozenset({"kept", "not applicable"})
FINDINGS = {
    "broken": "interlock-broken",
    "not sure": "interlock-broken",
    "not examined": "interlock-not-examined",
}
"""How a rule may come out, other than well, and the finding that an allowance must name."""


def judge_interlocks(manifest: Part) -> Iterator[Unsound]:
    """Every rule that did not come out well and was not allowed; raises Unsound if unreadable."""
    allowed = {
        (allowance.text("name"), step)
        for allowance in manifest.parts("allowances")
        for step in map(int, allowance.numbers("steps"))
    }
    for rule in manifest.part("interlocks").parts("rules"):
        outcome = rule.text("outcome")
        breaches = list(rule.parts("breaches"))
        if outcome in FINE:
            if breaches:
                yield rule.wrong("outcome", f"not '{outcome}', since it has breaches")
            continue
        finding = FINDINGS.get(outcome)
        if finding is None:
            yield rule.wrong("outcome", "how a rule can come out")
        elif rule.flag("never_waivable") or not breaches:
            yield rule.wrong("outcome", "'kept' in a published folder")
        elif any((finding, breach.whole("step_number", -1)) not in allowed for breach in breaches):
            yield rule.wrong("outcome", "'kept', or allowed at every step of a breach")
