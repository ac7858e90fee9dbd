"""Fifty thousand random rules on random timelines: judged exactly, and by looking everywhere."""

from __future__ import annotations

from random import Random

import brute
import pytest
import random_rules

from wellseq.base.place import Place
from wellseq.model import rulebook as book
from wellseq.rules.examine import SEVERAL, examine
from wellseq.rules.rulings import Outcome
from wellseq.wells.wells import Wells

NO_WELLS = Wells((), (), (), (), 0.0)
PARTS = 20
TIMELINES = 13
RULES = 200


def rule(sentence: book.Sentence) -> book.Rule:
    return book.Rule("some", sentence, False, False, "", "", Place("some.rules"))


def expected(sentence: book.Sentence, runs: list[brute.Atoms]) -> str:
    """Broken when some arrival surely breaks it, kept when none even may."""
    found = [brute.judged(sentence, atoms) for atoms in runs]
    if any(surely for surely, _ in found):
        return "broken"
    return "unsure" if any(perhaps for _, perhaps in found) else "kept"


def compared(seed: int) -> tuple[list[str], dict[str, int]]:
    """Disagreements in words, and how often each outcome was met."""
    wrong: list[str] = []
    counts = {"broken": 0, "kept": 0, "unsure": 0, "several waits": 0}
    for number in range(TIMELINES):
        random = Random(f"{seed}/{number}")
        timeline, shipped, step_s = random_rules.timeline(random)
        looked: dict[tuple[object, ...], bool | None] = {}
        runs = [brute.Atoms(run, looked) for run in brute.runs(timeline, shipped, step_s)]
        atoms = random_rules.pool(random, step_s)
        sentences = [random_rules.sentence(random, step_s, atoms) for _ in range(RULES)]
        rules = book.Rulebook(tuple(rule(sentence) for sentence in sentences))
        rulings = examine(rules, timeline, shipped, NO_WELLS, shown_most=0)
        for sentence, ruling in zip(sentences, rulings.all, strict=True):
            wanted = expected(sentence, runs)
            if ruling.why == SEVERAL:
                # Not decided, and said so: it must never have been taken for kept.
                counts["several waits"] += 1
                continue
            found = {Outcome.KEPT: "kept", Outcome.BROKEN: "broken"}.get(ruling.outcome, "unsure")
            counts[found] += 1
            if found != wanted:
                wrong.append(f"{seed}/{number}: {found}, not {wanted}: {sentence}")
    return wrong, counts


@pytest.mark.parametrize("seed", range(PARTS))
def test_no_rule_is_judged_otherwise_than_by_looking_at_every_instant(seed: int) -> None:
    wrong, counts = compared(seed)
    assert wrong == []
    assert sum(counts.values()) == TIMELINES * RULES
    assert min(counts["broken"], counts["kept"], counts["unsure"]) > 200
    assert counts["several waits"] < 50


def test_there_are_fifty_thousand_pairs() -> None:
    assert PARTS * TIMELINES * RULES >= 50_000
