"""Whole files: header, trap, sequence, mistakes of all kinds at once, and how time grows."""

from __future__ import annotations

from time import process_time

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from wellseq.model.build import build
from wellseq.model.step import Step
from wellseq.text.parse import parse

STEPS = """  begin with bunch in cradle at E5
  "go" hold for 1 s
  repeat 2 { ramp cradle over 1 s }"""


def test_a_sound_file_is_a_sequence(bench):
    built = bench.build(bench.whole(STEPS, "let spare = 1 V"))
    sequence = built.sequence
    assert sequence is not None
    assert [m.name for m in built.mistakes] == ["name-unused"] * 3
    assert (sequence.name, sequence.file, sequence.trap.name) == ("run", "run.well", "Sandpit")
    assert [item.verb for item in sequence.items] == ["begin", "hold", "ramp", "ramp"]
    assert all(isinstance(item.step, Step) for item in sequence.items)
    assert list(sequence.clouds) == ["cool_ones", "bunch", "plus"]
    assert sequence.steps_written == 3
    assert (sequence.end.line, sequence.end.column) == (13, 1)
    assert sequence.mistakes == built.mistakes
    assert sequence.sources == built.sources


def test_the_bytes_of_a_source_are_kept_as_they_were_read(bench):
    text = "\ufeff" + bench.whole("hold for 1 s").replace("\n", "\r\n")
    built = bench.build(text, content=text.encode())
    assert built.sources[0].content == text.encode()
    assert bench.build(text).sources[0].content == text.removeprefix("\ufeff").encode()
    assert built.sources[1].content == (bench.folder / "sandpit.trap.toml").read_bytes()


def test_a_file_without_a_sequence_is_a_library(bench):
    built = bench.build('wellseq 1\ntrap "sandpit.trap.toml"\nlet span = 1 s\n')
    assert built.sequence is None
    assert built.trap is not None
    assert built.mistakes == ()


def test_without_a_trap_nothing_can_be_played(bench):
    built = bench.build("wellseq 1\nsequence run { hold for 1 s }\n")
    assert (built.sequence, built.trap) == (None, None)
    assert [m.name for m in built.mistakes] == ["syntax"]


@pytest.mark.parametrize(
    ("path", "name", "file"),
    [
        ("/sandpit.trap.toml", "import-refused", "run.well"),
        ("nowhere.trap.toml", "unreadable-file", "run.well"),
    ],
)
def test_a_trap_that_cannot_be_read_hides_no_other_mistake(bench, path, name, file):
    text = f'wellseq 1\ntrap "{path}"\nsequence run {{ ramp {{ E1 = 1 V }} over 1 V }}\n'
    found = [(m.name, m.place.file) for m in bench.build(text).mistakes]
    assert set(found) == {(name, file), ("unit-mismatch", "run.well")}
    assert len(found) == 2


TIRED = """wellseq 1
trap "sandpit.trap.toml"
let wall = 90 V
let wall = 80 V
let spare = 5 V
cloud bunch is antiprotn { number 8e4 }
pattern cradle { E1 = -wal; E2..E8 = 10 s }
procedure idle(x) { hold for x; ramp { Q1 = 1 V } over 1 s }
sequence night {
  ramp cradle over 1 V
  hold to 5 s
  hld for 1 s
  throw G1 to 4 kV
  set valve ajar
  catch bunch { between G1 and G2; at -4.5 kV }
  hold for 1 s allow slew-to-fast because "x"
  require time after "go" below 3 s
}
"""


def test_everything_wrong_in_a_file_is_told_in_one_run(bench):
    told = [(m.place.line, m.name) for m in bench.build(TIRED).mistakes]
    assert told == [
        (4, "name-reused"),
        (5, "name-unused"),
        (6, "unknown-name"),
        (7, "unknown-name"),
        (7, "unit-mismatch"),
        (8, "name-unused"),
        (8, "unknown-name"),
        (10, "unit-mismatch"),
        (11, "syntax"),
        (11, "syntax"),
        (12, "unknown-step"),
        (13, "voltage-out-of-range"),
        (14, "unknown-name"),
        (15, "syntax"),
        (15, "syntax"),
        (16, "unknown-name"),
        (17, "unknown-name"),
    ]


def test_the_steps_without_a_mistake_are_played(bench):
    sequence = bench.build(TIRED).sequence
    assert [item.verb for item in sequence.items] == ["hold", "require"]
    assert [item.origin.number for item in sequence.items] == [5, 6]


def test_every_definition_that_nothing_uses_is_told(bench):
    text = bench.whole("hold for 1 s", "procedure idle() { hold for 1 s }", "let spare = 1 V")
    assert [m.message for m in bench.build(text).mistakes] == [
        "nothing uses cloud 'cool_ones'",
        "nothing uses cloud 'bunch'",
        "nothing uses cloud 'plus'",
        "nothing uses pattern 'cradle'",
        "nothing uses procedure 'idle'",
        "nothing uses let 'spare'",
    ]


def test_nothing_is_called_unused_where_statements_are_missing(bench):
    text = bench.whole("hold for 1 s; ramp cradle over over")
    assert "name-unused" not in [m.name for m in bench.build(text).mistakes]


def test_the_same_text_gives_the_same_sequence(bench):
    first, second = (bench.build(bench.whole(STEPS)) for _ in range(2))
    assert first.mistakes == second.mistakes
    assert first.sequence.items == second.sequence.items


VOCABULARY = """
hold ramp cool catch each repeat do alongside lane for over to of with between and at allow because
bunch cradle E1 E2..E5 wall 5 3 s 2 V ± % ( ) { } = , ; - is smoothly others keep "x" let cloud
pattern procedure use trap
"""
WORDS = st.sampled_from(["\n", *VOCABULARY.split()])


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=150)
@given(st.lists(WORDS, max_size=25).map(" ".join))
def test_no_text_brings_it_down(bench, text):
    built = bench.build(bench.whole(text))
    places = [m.place for m in built.mistakes]
    assert places == sorted(places, key=lambda place: (place.file != "run.well", place))
    assert all(m.message for m in built.mistakes)


def written(bench, count: int, prelude: str):
    """A tree of that many written steps."""
    kinds = (
        "ramp {{ E2, E3 = {n} mV; E4..E6 = wall / 3 }} over 20 ms smoothly",
        "hold for {n} ms",
        "rotate cool_ones on R6 from 0.2 MHz to 1.6 MHz at 0.5 V for 20 s",
        "release cool_ones through E1 to 0 V over 10 ms",
    )
    steps = "\n".join(kinds[n % len(kinds)].format(n=n + 1) for n in range(count))
    return parse(f"{prelude}sequence run {{\n{steps}\n}}\n", "run.well")


def seconds(bench, tree) -> float:
    """The least processor time of three builds, s."""
    times = []
    for _ in range(3):
        start = process_time()
        built = build(tree, bench.folder / "run.well", known_findings=())
        times.append(process_time() - start)
        assert built.sequence is not None
    return min(times)


def test_ten_thousand_steps_take_less_than_a_second_and_grow_in_proportion(bench):
    prelude = bench.whole("").partition("sequence")[0]
    thousand = seconds(bench, written(bench, 1000, prelude))
    ten_thousand = seconds(bench, written(bench, 10_000, prelude))
    assert ten_thousand < 1.0
    assert ten_thousand <= 11 * thousand


def test_repeated_steps_cost_little_more_than_their_number(bench):
    repeated = bench.whole("repeat 5000 { hold for 1 s; ramp cradle over 1 s }")
    assert seconds(bench, parse(repeated, "run.well")) < 0.5
