"""The least size of a body: never more than what is played, and told without reading it."""

from __future__ import annotations

import pytest

from wellseq.model.reporter import Reporter
from wellseq.model.scope import FileScope
from wellseq.model.size import LeastSize
from wellseq.text.parse import parse
from wellseq.text.tree import Block

GO = "procedure go() { hold for 1 s; hold for 2 s }"


def least(text: str, *procedures: str, single: bool = False) -> int:
    """The least size of the steps of a text."""
    tree = parse("\n".join([*procedures, f"sequence run {{ {text} }}"]), "x")
    assert tree.mistakes == ()
    scope = FileScope("x", None, Reporter())
    for item in tree.statements[:-1]:
        made = scope.define(item.operands[0].name, "procedure")
        made.block = item.block()
    block = tree.statements[-1].block()
    assert isinstance(block, Block)
    return LeastSize(single).of(block, scope)


@pytest.mark.parametrize(
    ("text", "count"),
    [
        ("hold for 1 s; hold for 1 s", 2),
        ("repeat 5 { hold for 1 s; hold for 1 s }", 2),
        ("each x of 1 V, 2 V, 3 V { hold for 1 s; hold for 1 s }", 6),
        ("each x of 1 V, 2 V { each y of 1 V, 2 V, 3 V { } }", 6),
        ("do go(); do go", 4),
        ("do went()", 1),
        ("alongside { lane { do go() } lane { hold for 1 s } }", 3),
        ("hld", 1),
        ("", 1),
    ],
)
def test_what_bodies_come_to(text, count):
    assert least(text, GO) == count


def test_a_picked_value_is_one_pass():
    assert least("each x of 1 V, 2 V, 3 V { hold for 1 s }", single=True) == 1


def test_a_procedure_that_calls_itself_comes_to_an_end():
    assert least("do again()", "procedure again() { do again(); hold for 1 s }") == 2


def test_calls_that_double_are_counted_at_once():
    doubling = [f"procedure p{n}() {{ do p{n - 1}(); do p{n - 1}() }}" for n in range(1, 50)]
    assert least("do p49()", GO.replace("go", "p0"), *doubling) == 2**50


def test_a_long_chain_of_calls_needs_no_deep_recursion():
    chain = [f"procedure p{n}() {{ do p{n - 1}() }}" for n in range(1, 3000)]
    assert least("do p2999()", GO.replace("go", "p0"), *chain) >= 1


@pytest.mark.parametrize(
    "steps",
    [
        "repeat 3 { hold for 1 s; each x of 1 V, 2 V { ramp { E1 = x } over 1 s } }",
        "alongside { lane { hold for 1 s } lane { repeat 2 { hold for 1 s } } }; hold for 1 s",
    ],
)
def test_no_less_is_played(bench, steps):
    built = bench.build(bench.whole(steps))
    played = str(built.sequence.items).count("Played(")
    assert least(steps) <= played
