"""What changed physically: six edits of the night, and the laws of a comparison."""

from __future__ import annotations

import json
import shutil
from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest

from wellseq.pipeline import compile_file
from wellseq.review.comparing import Comparison, compare, matched
from wellseq.review.picture import Picture, StepPicture, picture
from wellseq.review.telling import report, step_rows, verdict, whole_rows
from wellseq.text.tidy import tidy

NIGHT = Path(__file__).parents[2] / "sequences" / "saltmarsh"
Edit = Callable[[str], str]

EDITS: dict[str, Edit] = {
    "layout": lambda text: (tidy(text) or "").replace("\nsequence", "\n\n# a remark\n\nsequence"),
    "moved": lambda text: text.replace(
        'use  "common/gates.well"\n', 'use "common/gates.well"\n\nlet unused_before = 1 V\n'
    ).replace(
        "C4..C8 = bottom; others = 0 V", "others = 0 V * (unused_before / 1 V); C4..C8 = bottom"
    ),
    "shallower": lambda text: text.replace("let bottom = 10 V", "let bottom = 6 V"),
    "longer": lambda text: text.replace("hold for 600 s", "hold for 900 s"),
    "one step more": lambda text: text.replace(
        '  "walk"\n', '  rotate bunch on R6 from 0.6 MHz to 0.7 MHz at 0.3 V for 5 s\n\n  "walk"\n'
    ),
    "warmer": lambda text: text.replace("bunch 140 K ± 40 K", "bunch 170 K ± 40 K"),
    "refused": lambda text: text.replace("to 800 mV over 80 s", "to 200 mV over 80 s"),
}


@pytest.fixture(scope="module")
def night(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str], Comparison]:
    """The comparison of the night with one edit of it."""
    folder = tmp_path_factory.mktemp("nights")

    def edited(name: str, edit: Edit) -> Picture:
        here = folder / name.replace(" ", "_")
        shutil.copytree(NIGHT, here)
        path = here / "night.well"
        text = path.read_text("utf-8")
        changed = edit(text)
        assert changed != text or name == "as it is"
        path.write_text(changed, "utf-8")
        return picture(compile_file(path, shown="night.well"))

    base = edited("as it is", lambda text: text)

    @cache
    def compared(name: str) -> Comparison:
        return compare("", base, edited(name, EDITS[name]), 0.01)

    return compared


def rows(one: Comparison) -> list[str]:
    found = [*step_rows(one), *whole_rows(one)]
    return [" ".join(f"{row.where} {row.what} {row.old} {row.new}".split()) for row in found]


@pytest.mark.parametrize("name", ["layout", "moved"])
def test_what_only_moved_is_no_change(name: str, night) -> None:
    one = night(name)
    assert rows(one) == []
    assert one.empty
    assert not one.worse
    assert verdict(one) == "nothing physical changed"


def test_a_lower_bottom_is_shown_where_it_is_felt_and_is_worse(night) -> None:
    one = night("shallower")
    said = rows(one)
    assert one.worse
    assert not one.came
    assert "highest voltage of C4, C5, C6, C7, C8, C9, C10, C11, C12, R6 10 V 6 V" in said[-12:]
    assert any(row.startswith('"walk": ramp walk_1 over 300 ms depth of bunch') for row in said)
    assert any("margin, requirement-not-met of depth of coolant" in row for row in said)
    # The positrons sit elsewhere: nothing much happens to them.
    assert not any("laid" in row and "depth of positrons" in row for row in said)


def test_a_longer_hold_is_one_step_and_its_consequences(night) -> None:
    one = night("longer")
    steps = [
        " ".join(f"{row.where} {row.what} {row.old} {row.new}".split()) for row in step_rows(one)
    ]
    assert steps == ['"mix": hold for 900 s (was: hold for 600 s) duration 600 s 900 s']
    assert any("time after" in row and "WORSE" in f"{row} WORSE" for row in rows(one))
    worse = [row.what for row in whole_rows(one) if row.worse]
    assert any("time after" in what for what in worse)
    assert any("block duration of 2 bunch_arrival 1442" in row for row in rows(one))


def test_a_step_more_is_told_and_moves_nothing_else(night) -> None:
    one = night("one step more")
    assert rows(one)[0] == (
        '"lay the table": rotate bunch on R6 from 0.6 MHz to 0.7 MHz at 0.3 V for 5 s '
        "this step is new"
    )
    assert len(list(step_rows(one))) == 1


def test_a_warmer_bunch_is_told_once(night) -> None:
    (row,) = step_rows(night("warmer"))
    assert (row.what, row.old, row.new, row.worse) == (
        "temperature stated of bunch",
        "140 K",
        "170 K",
        True,
    )
    assert row.where.startswith('"cool on electrons": assume temperature of bunch 170 K')


def test_a_change_that_is_refused_says_so_first(night) -> None:
    one = night("refused")
    assert one.worse
    assert {finding.name for finding in one.came} >= {"requirement-not-met"}
    assert verdict(one) == "something got worse; it is not clear any more"


def test_as_a_reviewer_reads_it(night) -> None:
    text = report("text", [night("longer")], ("HEAD:night.well", "night.well"))
    assert text.startswith(
        "HEAD:night.well → night.well: something got worse; it is clear, as before\n"
        "\nsteps\n"
        '  "mix": hold for 900 s (was: hold for 600 s)\n'
        "    duration  600 s → 900 s  +300 s (+50 %)\n"
        "\nmargins, outputs, tables\n"
    )
    assert "-300 s (-45.5 %)  WORSE\n" in text


def test_markdown_has_one_table_row_a_change_and_escapes_names(night) -> None:
    text = report("markdown", [night("longer")], ("a_b.well", "<b>"))
    assert text.startswith("### a\\_b.well → \\<b\\>\n\n**Worse.** Something got worse")
    table = [line for line in text.splitlines() if "hold for 900 s" in line]
    assert len(table) == 1
    assert all(line.count("|") in (5, 6) for line in text.splitlines() if line.startswith("|"))


def test_json_has_everything(night) -> None:
    document = json.loads(report("json", [night("refused"), night("warmer")], ("a", "b")))
    assert (document["schema"], document["schema_version"]) == ("wellseq/comparison", 1)
    assert document["worse"] is True
    refused, warmer = document["sequences"]
    assert refused["findings_new"]
    (change,) = [step["change"] for step in warmer["steps"]]
    assert (change["old"], change["new"], change["unit"]) == (140.0, 170.0, "K")


def test_a_comparison_with_itself_is_empty_and_back_again_is_the_opposite(night) -> None:
    one = night("shallower")
    assert one.old is not None
    assert one.new is not None
    assert compare("", one.new, one.new, 0.0).empty
    back = compare("", one.new, one.old, 0.01)
    assert [(a.old, a.new) for a in back.whole] == [(a.new, a.old) for a in one.whole]


@pytest.mark.parametrize(("tolerance", "worse"), [(0.0, True), (0.3, True), (0.5, False)])
def test_the_tolerance_is_a_share_of_the_old_value(tolerance: float, worse: bool, night) -> None:
    one = night("longer")
    assert one.old is not None
    assert one.new is not None
    again = compare("", one.old, one.new, tolerance)
    assert again.worse is worse


def step(words: str, *passes: int) -> StepPicture:
    return StepPicture(words, words, words.split()[0], "", passes, "a:1")


def test_steps_are_matched_by_words_then_subject_then_verb() -> None:
    old = [step("ramp a"), step("hold for 1 s"), step("ramp b"), step("cool x for 1 s")]
    new = [step("set y"), step("ramp a"), step("hold for 2 s"), step("ramp c"), step("throw G")]
    pairs = [(a.words if a else "", b.words if b else "") for a, b in matched(old, new)]
    assert pairs == [
        ("", "set y"),
        ("ramp a", "ramp a"),
        ("hold for 1 s", "hold for 2 s"),
        ("ramp b", "ramp c"),
        ("cool x for 1 s", ""),
        ("", "throw G"),
    ]


def test_passes_tell_equal_steps_apart() -> None:
    old, new = [step("hold for 1 s", 1)], [step("hold for 1 s", 1), step("hold for 1 s", 2)]
    assert [a is None for a, _ in matched(old, new)] == [False, True]
