"""Every shape of the language: what the tree holds and where it says that it stands."""

from __future__ import annotations

import pytest

from wellseq.text.parse import parse


def step(verb, *operands, clauses="", words="", **rest):
    """A statement's outline; `clauses` as 'over 5 s; to x'."""
    parts = {"verb": verb, "operands": list(operands), "words": words.split(), **rest}
    if clauses:
        parts["clauses"] = [
            [clause.partition(" ")[0], *clause.partition(" ")[2].split(", ")]
            for clause in clauses.split("; ")
        ]
    return {key: part for key, part in parts.items() if part}


def sets(value, *targets):
    return {"set": list(targets), "to": value}


SHAPES = [
    ("wellseq 1", step("wellseq", "1")),
    ('trap "a.trap.toml"', step("trap", '"a.trap.toml"')),
    ("hold", step("hold")),
    ("let wall = 90 V", step("let", "wall", value="90 V")),
    ("let a = -b", step("let", "a", value="-b")),
    (
        'let a = 1 V\n allow name-unused because "r"',
        step("let", "a", value="1 V", allow=[["name-unused", "r"]]),
    ),
    ("hold for 1 s", step("hold", clauses="for 1 s")),
    ("throw G1, G2 to lv20", step("throw", "G1", "G2", clauses="to lv20")),
    ("throw G2 to -hv", step("throw", "G2", clauses="to -hv")),
    ("do lift(60 V)", step("do", "lift(60 V)")),
    ("do lift(60 V, -hv, C1..C2)", step("do", "lift(60 V, -hv, C1..C2)")),
    ("do lift()", step("do", "lift()")),
    ("do lift", step("do", "lift")),
    ("procedure lift(height) { }", step("procedure", "lift(height)", [])),
    ("ramp p over 50 ms smoothly", step("ramp", "p", clauses="over 50 ms", words="smoothly")),
    ("ramp p smoothly over 50 ms", step("ramp", "p", clauses="over 50 ms", words="smoothly")),
    ("ramp { C1, C3 = h } over 20 ms", step("ramp", [sets("h", "C1", "C3")], clauses="over 20 ms")),
    (
        "pattern p { C4..C8 = 10 V; others keep }",
        step("pattern", "p", [sets("10 V", "C4..C8"), sets("keep", "others")]),
    ),
    (
        "pattern p { C1, C4..C8, C9 = -w; others = 0 V }",
        step("pattern", "p", [sets("-w", "C1", "C4..C8", "C9"), sets("0 V", "others")]),
    ),
    (
        "cloud c is electron { number 6e7 ± 10 %; radius 0.8 mm }",
        step(
            "cloud",
            "c",
            [step("number", "60000000 ± 10 %"), step("radius", "4/5 mm")],
            clauses="is electron",
        ),
    ),
    (
        "repeat 4 { hold for 1 s; hold for 2 s }",
        step("repeat", "4", [step("hold", clauses="for 1 s"), step("hold", clauses="for 2 s")]),
    ),
    (
        "each v of 1 V, 2 V { ramp p over 1 s }",
        step("each", "v", [step("ramp", "p", clauses="over 1 s")], clauses="of 1 V, 2 V"),
    ),
    ("each n of 1,2,3 { }", step("each", "n", [], clauses="of 1, 2, 3")),
    ("begin with coolant in cradle at C6", step("begin", clauses="with coolant; in cradle; at C6")),
    (
        '"take it" catch bunch { between A and B }',
        step("catch", "bunch", [{"clauses": [["between", "A"], ["and", "B"]]}], label="take it"),
    ),
    (
        "require separation of a from b above 10 mm",
        step("require", "separation", clauses="of a; from b; above 10 mm"),
    ),
    ('require time after "x" below 30 s', step("require", "time", clauses='after "x"; below 30 s')),
    (
        'assume temperature of b 140 K ± 40 K because "m"',
        step("assume", "temperature", "140 K ± 40 K", clauses='of b; because "m"'),
    ),
    (
        "require depth of b above 4 V throughout",
        step("require", "depth", clauses="of b; above 4 V", words="throughout"),
    ),
    (
        "rotate c on R6 from 0.2 MHz to 2 MHz at 1 V for 20 s quadrupole backwards",
        step(
            "rotate",
            "c",
            clauses="on R6; from 1/5 MHz; to 2 MHz; at 1 V; for 20 s",
            words="quadrupole backwards",
        ),
    ),
    ("set mcp_bias off", step("set", "mcp_bias", words="off")),
    ("set mcp_bias on", step("set", "mcp_bias", words="on")),
    (
        '"l" expect mcp_bias on allow a-b because "r"',
        step("expect", "mcp_bias", words="on", label="l", allow=[["a-b", "r"]]),
    ),
    (
        'hold for 1 s allow a-b because "r" allow syntax because "q"',
        step("hold", clauses="for 1 s", allow=[["a-b", "r"], ["syntax", "q"]]),
    ),
    (
        'ramp p allow a-b because "r" over 1 s',
        step("ramp", "p", clauses="over 1 s", allow=[["a-b", "r"]]),
    ),
    ("cool b for 60 s until 150 K", step("cool", "b", clauses="for 60 s; until 150 K")),
]


@pytest.mark.parametrize(("source", "expected"), SHAPES, ids=[shape[0] for shape in SHAPES])
def test_each_shape_of_the_language(read_clean, source, expected):
    assert read_clean(source) == [expected]


@pytest.mark.parametrize(
    ("source", "expected"),
    [
        ("1 / 2 s", "(1 / 2 s)"),
        ("a + b * c", "(a + (b * c))"),
        ("(a + b) * c", "((a + b) * c)"),
        ("a - b - c", "((a - b) - c)"),
        ("a / b / c", "((a / b) / c)"),
        ("a / b * c", "((a / b) * c)"),
        ("-a * b", "(-a * b)"),
        ("-(a + b)", "-(a + b)"),
        ("2 * -a", "(2 * -a)"),
        ("a - -b", "(a - -b)"),
        ("a − b", "(a - b)"),
        ("−5 V", "-5 V"),
        ("+5 V", "5 V"),
        ("((a))", "a"),
        ("5 V +- 1 V", "5 V ± 1 V"),
        ("-60 V ± 2 * w", "-60 V ± (2 * w)"),
        ("a + b ± c + d", "(a + b) ± (c + d)"),
        ("5 V+3 V", "(5 V + 3 V)"),
        ("C3-5 V", "(C3 - 5 V)"),
    ],
)
def test_values_group_as_in_arithmetic(read_clean, source, expected):
    assert read_clean(f"let x = {source}")[0]["value"] == expected
    assert read_clean(f"C3 = {source}") == [sets(expected, "C3")]
    assert read_clean(f"hold for {source}")[0]["clauses"] == [["for", expected]]


def test_a_value_beside_an_operand_may_be_a_sum(read_clean):
    assert read_clean("assume x of b t0 + 4 K ± 1 K")[0] == step(
        "assume", "x", "(t0 + 4 K) ± 1 K", clauses="of b"
    )


def test_names_are_compared_after_composition():
    (first, second) = parse("hold e\u0301\nhold \u00e9", "run.well").statements
    assert first.operands[0].text == second.operands[0].text == "\u00e9"
    assert first.operands[0].place.end_column == 8


def places(node):
    """Line and column span of a node."""
    place = node.place
    return (place.line, place.column, place.end_line, place.end_column)


def test_places_span_what_was_written():
    source = '"l"\nramp p, C4..C8\n  over (a + 2) * b  smoothly\nC1 = -w ± 5 %\npattern p {\n}\n'
    ramp, assignment, pattern = parse(source, "run.well").statements
    assert ramp.place.file == "run.well"
    assert places(ramp) == (2, 1, 3, 29)
    assert places(ramp.label) == (1, 1, 1, 4)
    assert places(ramp.operands[1]) == (2, 9, 2, 15)
    assert places(ramp.clauses[0]) == (3, 3, 3, 19)
    assert places(ramp.clauses[0].operands[0].left) == (3, 8, 3, 15)
    assert places(ramp.words[0]) == (3, 21, 3, 29)
    assert places(assignment) == (4, 1, 4, 14)
    assert places(assignment.value.value) == (4, 6, 4, 8)
    assert places(pattern) == (5, 1, 6, 2)
    assert places(pattern.block()) == (5, 11, 6, 2)
    assert str(assignment.place) == "run.well:4:1"


def test_the_end_of_a_definition_is_its_value_or_its_allowance():
    plain, allowed = parse('let a = 5 V\nlet b = 6 V allow x-y because "r"', "f").statements
    assert places(plain) == (1, 1, 1, 12)
    assert places(allowed) == (2, 1, 2, 34)
    assert places(allowed.allowances[0]) == (2, 19, 2, 34)
    assert places(allowed.allowances[0].reason) == (2, 31, 2, 34)


def test_a_call_and_a_sign_have_places():
    (call, negative) = parse("do lift(1 V)\nhold -w", "f").statements
    assert places(call.operands[0]) == (1, 4, 1, 13)
    assert places(negative.operands[0]) == (2, 6, 2, 8)
