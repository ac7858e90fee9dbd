"""Every mistake that a trap file can hold: its name, its place, what is said to be right."""

from __future__ import annotations

from pathlib import Path

import pytest

from wellseq.base.finding import Mistake
from wellseq.base.place import Place
from wellseq.model.trap_file import trap_from

POOL = Path(__file__).with_name("pool.trap.toml").read_text(encoding="utf-8")


def cases() -> list[list[str]]:
    """The rows of the case file, six columns each."""
    rows = Path(__file__).with_name("trap_mistakes.txt").read_text(encoding="utf-8").splitlines()
    found = []
    for row in rows:
        if not row.startswith("#"):
            columns = [column.strip() for column in f"{row} ".split(" | ")]
            columns += [""] * (6 - len(columns))
            found.append([column.replace("\\n", "\n").replace("\\\\", "\\") for column in columns])
    return found


def place_of(source: str, text: str) -> Place:
    """Line and column of a piece of the source, the simple way."""
    before = source[: source.index(text)] if text else ""
    return Place("p", before.count("\n") + 1, len(before) - (before.rfind("\n") + 1) + 1)


def begin(mistake: Mistake) -> tuple[int, int]:
    return mistake.place.line, mistake.place.column


@pytest.mark.parametrize(
    ("written", "instead", "name", "at", "message", "hint"),
    cases(),
    ids=[f"{written}->{instead}"[:60] for written, instead, *_ in cases()],
)
def test_one_mistake_is_told_once_at_its_place(
    written: str, instead: str, name: str, at: str, message: str, hint: str
) -> None:
    assert written in POOL
    source = POOL.replace(written, instead, 1)
    trap, mistakes = trap_from(source, "p")
    assert trap is None
    assert [mistake.name for mistake in mistakes] == [name], mistakes
    assert message in mistakes[0].message
    assert hint in mistakes[0].hint
    where = place_of(source, at)
    assert begin(mistakes[0]) == (where.line, where.column), mistakes


def names_at(mistakes: tuple[Mistake, ...]) -> list[tuple[str, int]]:
    return [(mistake.name, mistake.place.line) for mistake in mistakes]


def test_the_whole_file_is_told_in_one_run() -> None:
    source = POOL
    changes = [
        ('temperature = "6 K"', "temperature = 6"),
        ("sectors = 6", "sectors = 5"),
        ('to = "12.4 mm"', 'to = "14 mm"'),
        ('from = "40.2 mm"', 'from = "30 mm"'),
        ("bits = 16", "bits = 99"),
        ('slew = "12 V/us"', 'slew = "12 V"'),
        ('name = "lv20"', 'name = "lv02"'),
        ("hazardous = true", "hazard = true"),
        ('initial = "closed"', 'initial = "shut"'),
        ('jitter = "20 ns"', 'jitter = "20 V"'),
        ("table_rows = 65536", "table_rows = 0"),
        ('lv20 = "10 V"', 'lv20 = "10 V"\nlv21 = "0 V"'),
    ]
    for written, instead in changes:
        assert written in source
        source = source.replace(written, instead, 1)
    trap, mistakes = trap_from(source, "p")
    assert trap is None
    assert sorted(names_at(mistakes)) == sorted(
        [
            ("unit-mismatch", place_of(source, "temperature = 6").line),
            ("trap-not-sound", place_of(source, "sectors = 5").line),
            ("trap-not-sound", place_of(source, 'from = "13.4').line),
            ("trap-not-sound", place_of(source, 'from = "30 mm').line),
            ("trap-not-sound", place_of(source, "bits = 99").line),
            ("unit-mismatch", place_of(source, 'slew = "12 V"').line),
            ("name-reused", place_of(source, 'name = "lv02"\nrange = ["-200').line),
            ("unknown-name", place_of(source, '"lv20", "-4.5').line),
            ("unknown-name", place_of(source, "hazard = ").line),
            ("unknown-name", place_of(source, 'initial = "shut').line),
            ("unit-mismatch", place_of(source, 'jitter = "20 V').line),
            ("trap-not-sound", place_of(source, "table_rows = 0").line),
            ("unknown-name", place_of(source, 'lv20 = "10 V"').line),
            ("unknown-name", place_of(source, "lv21 = ").line),
        ]
    )
    assert list(mistakes) == sorted(mistakes, key=lambda mistake: mistake.place)


def test_an_output_without_name_hides_nothing_but_what_depends_on_it() -> None:
    source = POOL.replace('name = "lv02"', "", 1).replace("bits = 18", "bits = 0")
    _, mistakes = trap_from(source, "p")
    assert [mistake.message for mistake in mistakes] == [
        "output 2 has no 'name'",
        "'bits' of output 'lv20': 0 is out of range",
    ]


def test_an_electrode_without_output_makes_no_output_unused() -> None:
    _, mistakes = trap_from(POOL.replace('output = "lv02"', "", 1), "p")
    assert [mistake.message for mistake in mistakes] == ["electrode 'R2' has no 'output'"]


def test_a_mention_of_nothing_near_leaves_the_output_unused() -> None:
    _, mistakes = trap_from(POOL.replace('output = "hv1"', 'output = "zz"', 1), "p")
    assert sorted(mistake.name for mistake in mistakes) == ["name-unused", "unknown-name"]


def test_a_level_that_is_a_switch_and_the_converter_it_should_have_been() -> None:
    _, mistakes = trap_from(POOL.replace('["lv20"', '["hv1"'), "p")
    assert [mistake.message for mistake in mistakes] == [
        "output 'lv20' drives no electrode and passes through no switch",
        "'hv1' is another switch",
    ]


@pytest.mark.parametrize(
    ("section", "said"),
    [
        ("electrode", "the trap has no electrode"),
        ("output", "the trap has no output"),
        ("field", "the trap has no field"),
    ],
)
def test_what_a_trap_cannot_do_without(section: str, said: str) -> None:
    blocks = [block for block in POOL.split("\n\n") if f"[{section}]" not in block]
    _, mistakes = trap_from("\n\n".join(blocks), "p")
    assert said in [mistake.message for mistake in mistakes]


def test_no_electrode_is_the_same_as_an_empty_list() -> None:
    head = 'wellseq-trap = 1\nname = "x"\nelectrode = []\noutput = []\n[field]\nuniform = "1 T"\n'
    _, mistakes = trap_from(head, "p")
    assert names_at(mistakes) == [("syntax", 3), ("syntax", 4)]


@pytest.mark.parametrize(
    ("source", "line", "said"),
    [
        ("electrode = 3", 1, "'electrode' is a single value"),
        ("[electrode]", 1, "'electrode' is a table"),
        ("[[field]]", 1, "'field' is a list"),
        ("margins = 1", 1, "'margins' is a single value"),
        ("[margins]\npair = 1", 2, "'pair' is a single value"),
        ("rest = 'cradle'", 1, "'rest' is a single value"),
        ("[rest]\nA = {b = 1}", 2, "a table is not a quantity"),
        ("output = [\n1]", 2, "a single value is no table"),
    ],
)
def test_wrong_shapes(source: str, line: int, said: str) -> None:
    _, mistakes = trap_from(source, "p")
    found = [mistake for mistake in mistakes if said in mistake.message]
    assert [mistake.place.line for mistake in found] == [line], mistakes
    assert {mistake.name for mistake in found} == {"syntax"}


def test_a_field_needs_one_of_its_two_forms() -> None:
    block = POOL[POOL.index("along") : POOL.index("[bore]")]
    _, mistakes = trap_from(POOL.replace(block, "\n"), "p")
    assert [mistake.message for mistake in mistakes] == ["[field]: it says nothing"]
    _, mistakes = trap_from(POOL.replace("along", "allong"), "p")
    assert [mistake.hint for mistake in mistakes] == ["did you mean 'along'?"]


def test_a_pair_given_twice() -> None:
    again = '[[margins.pair]]\nbetween = ["C1", "G1"]\ndifference = "5 kV"\n\n[rest]'
    source = POOL.replace("[rest]", again)
    _, mistakes = trap_from(source, "p")
    assert names_at(mistakes) == [("name-reused", place_of(source, 'between = ["C1"').line)]


def test_more_than_a_hundred_mistakes_are_counted() -> None:
    source = POOL.replace("[rest]", "[rest]\n" + "".join(f"x{n} = '1 V'\n" for n in range(120)))
    _, mistakes = trap_from(source, "p")
    assert len(mistakes) == 101
    assert mistakes[-1].message == "20 more mistakes in this file are not listed"
    source = POOL.replace("[rest]", "[rest]\n" + "".join(f"x{n} = '1 V'\n" for n in range(100)))
    _, mistakes = trap_from(source, "p")
    assert len(mistakes) == 100
    assert all("not listed" not in mistake.message for mistake in mistakes)
