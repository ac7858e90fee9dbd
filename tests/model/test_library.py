"""`use`: what it brings, and everything that it does not open."""

from __future__ import annotations

import os

import pytest

from wellseq.model.library import USES_MAX

USING = 'wellseq 1\ntrap "sandpit.trap.toml"\nuse "{}"\nsequence run {{ {} }}\n'
GATES = """wellseq 1
let height = 60 V
let span = 20 ms
pattern up { E1 = height; others keep }
procedure lift(where) { ramp { where = height } over span }
"""


def told(built):
    return [(m.name, m.place.file, m.message) for m in built.mistakes]


def test_patterns_procedures_and_lets_are_brought(bench):
    bench.write("common/gates.well", GATES)
    steps = "ramp up over span; do lift(E4); ramp { E2 = height / 2 } over 1 s"
    built = bench.build(USING.format("common/gates.well", steps))
    assert told(built) == []
    volts = [item.step.pattern.volts for item in built.sequence.items]
    assert volts == [{"E1": 60.0}, {"E4": 60.0}, {"E2": 30.0}]
    assert [source.shown for source in built.sources] == [
        "run.well",
        "sandpit.trap.toml",
        "common/gates.well",
    ]
    assert built.sources[2].content == GATES.encode()
    assert built.sequence.items[1].origin.place.file == "common/gates.well"


def test_what_a_used_file_uses_is_its_own(bench):
    bench.write("a.well", 'wellseq 1\nuse "b.well"\nlet twice = 2 * once\n')
    bench.write("b.well", "wellseq 1\nlet once = 1 s\n")
    built = bench.build(USING.format("a.well", "hold for twice; hold for once"))
    assert told(built) == [("unknown-name", "run.well", "'once' is not known as a value")]
    assert built.sequence.items[0].step.for_ == 2


def test_a_file_used_twice_is_opened_once(bench):
    bench.write("a.well", 'wellseq 1\nuse "c.well"\nlet a = c\n')
    bench.write("b.well", 'wellseq 1\nuse "c.well"\nlet b = c\n')
    bench.write("c.well", "wellseq 1\nlet c = 1 s\n")
    text = USING.format("a.well", "hold for a; hold for b; hold for c").replace(
        'use "a.well"', 'use "a.well"; use "b.well"; use "c.well"; use "./c.well"'
    )
    built = bench.build(text)
    assert told(built) == []
    assert len(built.sources) == 5


def test_clouds_and_sequences_are_not_brought(bench):
    bench.write(
        "a.well",
        "wellseq 1\ncloud stranger is positron\nprocedure go() { cool stranger for 1 s }\n"
        "sequence other { hold for 1 s }\n",
    )
    built = bench.build(USING.format("a.well", "cool stranger for 1 s; do other; do go"))
    assert told(built) == [
        ("unknown-name", "run.well", "'stranger' is not known as a cloud"),
        ("unknown-name", "run.well", "'other' is not known as a procedure"),
        (
            "unknown-name",
            "a.well",
            "'stranger' is a cloud of a.well; `use` brings no clouds",
        ),
    ]


def test_a_name_brought_twice_is_reused(bench):
    bench.write("a.well", "wellseq 1\nlet span = 1 s\n")
    text = USING.format("a.well", "hold for span").replace("sequence", "let span = 2 s\nsequence")
    assert told(bench.build(text)) == [
        (
            "name-reused",
            "run.well",
            "'span' is already a let of a.well (line 2) and cannot name a let",
        )
    ]
    bench.write("b.well", "wellseq 1\nlet span = 1 s\n")
    text = USING.format("a.well", "hold for span").replace("sequence", 'use "b.well"\nsequence')
    assert told(bench.build(text)) == [
        (
            "name-reused",
            "run.well",
            "b.well brings 'span', which is already a let of a.well (line 2)",
        )
    ]


def test_mistakes_of_a_used_file_are_told_at_their_place(bench):
    bench.write("a.well", "wellseq 1\nlet span = 1 s + 1 V\n\nhold for 1 s\n")
    built = bench.build(USING.format("a.well", "hold for span"))
    assert [(m.name, m.place.file, m.place.line) for m in built.mistakes] == [
        ("unit-mismatch", "a.well", 2),
        ("syntax", "a.well", 4),
    ]


def refused(bench, path: str) -> str:
    """The one refusal of a `use` of this path."""
    built = bench.build(USING.format(path, "hold for 1 s"))
    ((name, file, message),) = told(built)
    assert (name, file) == ("import-refused", "run.well")
    return message


@pytest.mark.parametrize(
    ("path", "message"),
    [
        ("/etc/passwd", "no absolute path may stand here; write it relative to this file"),
        ("C:/gates.well", "no absolute path may stand here; write it relative to this file"),
        ("common\\gates.well", "between folders stands '/'"),
        (" ", "a path is needed here"),
        ("../outside.well", "'../outside.well' lies outside the trap's folder"),
        ("common/../../outside.well", "'common/../../outside.well' lies outside the trap's folder"),
        ("nothing.well", "there is no file 'nothing.well'"),
        ("common", "'common' is no regular file"),
        ("leading_out.well", "'leading_out.well' lies outside the trap's folder"),
        ("folder_out/outside.well", "'folder_out/outside.well' lies outside the trap's folder"),
        ("circle.well", "there is no file 'circle.well'"),
        ("pipe.well", "'pipe.well' is no regular file"),
        ("run.well", "files use each other in a circle: run.well → run.well"),
    ],
)
def test_what_is_not_opened(bench, tmp_path, path, message):
    inner = tmp_path / "inner"
    inner.mkdir()
    (tmp_path / "outside.well").write_text("wellseq 1\nlet secret = 1 s\n")
    (tmp_path / "sandpit.trap.toml").rename(inner / "sandpit.trap.toml")
    bench.folder = inner
    (inner / "common").mkdir()
    (inner / "leading_out.well").symlink_to(tmp_path / "outside.well")
    (inner / "folder_out").symlink_to(tmp_path)
    (inner / "circle.well").symlink_to(inner / "circle.well")
    os.mkfifo(inner / "pipe.well")
    assert refused(bench, path) == message


def test_a_link_that_stays_inside_may_be_used(bench):
    bench.write("common/gates.well", GATES)
    (bench.folder / "gates.well").symlink_to(bench.folder / "common" / "gates.well")
    assert told(bench.build(USING.format("gates.well", "do lift(E4)"))) == []


def test_a_file_that_cannot_be_read_is_refused_with_the_reason(bench):
    bench.write("latin.well", b"wellseq 1\n# \xe9\n")
    message = refused(bench, "latin.well")
    assert message.startswith("'latin.well' cannot be used: the byte 0xe9 is not UTF-8")


def test_a_circle_is_shown_as_a_chain(bench):
    bench.write("a.well", 'wellseq 1\nuse "common/b.well"\n')
    bench.write("common/b.well", 'wellseq 1\nuse "../a.well"\n')
    built = bench.build(USING.format("a.well", "hold for 1 s"))
    assert told(built) == [
        (
            "import-refused",
            "common/b.well",
            "files use each other in a circle: a.well → common/b.well → a.well",
        )
    ]


def test_files_use_files_sixteen_deep_and_no_deeper(bench):
    for number in range(1, 17):
        bench.write(
            f"f{number}.well", f'wellseq 1\nuse "f{number + 1}.well"\nlet l{number} = 1 s\n'
        )
    bench.write("f16.well", "wellseq 1\nlet l16 = 1 s\n")
    assert told(bench.build(USING.format("f1.well", "hold for l1"))) == []
    bench.write("f16.well", 'wellseq 1\nuse "f17.well"\n')
    bench.write("f17.well", "wellseq 1\n")
    built = bench.build(USING.format("f1.well", "hold for l1"))
    assert [(name, file) for name, file, _ in told(built)] == [("import-refused", "f16.well")]


def test_a_file_uses_so_many_others_and_no_more(bench):
    bench.write("a.well", "wellseq 1\nlet span = 1 s\n")
    text = USING.format("a.well", "hold for span")
    fine = text.replace("sequence", 'use "a.well"; ' * (USES_MAX - 1) + "\nsequence")
    assert told(bench.build(fine)) == []
    more = text.replace("sequence", 'use "a.well"; ' * USES_MAX + "\nsequence")
    assert [name for name, _, _ in told(bench.build(more))] == ["import-refused"]


def test_a_used_file_is_for_the_same_trap_or_says_nothing(bench):
    bench.write("common/a.well", 'wellseq 1\ntrap "../sandpit.trap.toml"\nlet span = 1 s\n')
    assert told(bench.build(USING.format("common/a.well", "hold for span"))) == []
    bench.write("common/a.well", 'wellseq 1\ntrap "../other.trap.toml"\nlet span = 1 s\n')
    built = bench.build(USING.format("common/a.well", "hold for span"))
    assert told(built) == [("import-refused", "common/a.well", "this file is for another trap")]
