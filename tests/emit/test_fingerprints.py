"""Fingerprints: the same after edits elsewhere, another one when the finding is another."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from wellseq.base.data import data_folder
from wellseq.emit.examined import Examined, examined
from wellseq.emit.fingerprints import fingerprints
from wellseq.pipeline import compile_file

SEQUENCE = """\
wellseq 1
trap "bench.trap.toml"

let wall = 50 V

cloud electrons is electron { number 2e7 ± 20 %; radius 1 mm; temperature 600 K }

pattern cradle { E2, E4 = -wall; others = 0 V }

procedure shake(low) {
  ramp { E2, E4 = -low } over 20 us
  ramp cradle over 20 ms
}

procedure wiggle(high) {
  ramp { E3 = high } over 30 us
  ramp { E3 = 0 V } over 30 ms
}

sequence first_light {
  ramp cradle over 20 ms smoothly
  load electrons at E3 for 2 s
  "shake it"
  do shake(40 V)
  repeat 2 { do shake(45 V) }
  do wiggle(1 V)
  require depth of electrons above 120 V
  release electrons through E4 to 0 V over 10 ms
  ramp { E1..E5 = 0 V } over 20 ms
}
"""


@pytest.fixture
def look(tmp_path: Path):
    """Compile a text and give the fingerprints of what blocks, in order."""
    trap = (data_folder("grammar") / "start" / "bench.trap.toml").read_text("utf-8")
    (tmp_path / "bench.trap.toml").write_text(trap, "utf-8")

    def looked(text: str, name: str = "a.well") -> list[str]:
        path = tmp_path / name
        path.parent.mkdir(exist_ok=True)
        path.write_text(text, "utf-8")
        thing = examined(compile_file(path))
        return blocking(thing)

    return looked


def blocking(thing: Examined) -> list[str]:
    pairs = zip(fingerprints(thing, thing.findings), thing.findings, strict=True)
    return [print_ for print_, finding in pairs if finding.blocks]


def moved(text: str) -> str:
    """The same with its procedures in the other order."""
    first, second = re.findall(r"^procedure .*?^}\n\n", text, re.M | re.S)
    return text.replace(first, "").replace(second, second + first)


HARMLESS = {
    "lines inserted": lambda text: text.replace("\nlet", "\n# a remark\n\n\nlet"),
    "labels renamed": lambda text: text.replace("shake it", "stir it, µ"),
    "label taken away": lambda text: text.replace('  "shake it"\n', ""),
    "procedures moved": moved,
    "laid out otherwise": lambda text: text.replace("  ramp", "\tramp").replace("over", "  over"),
    "a comment beside": lambda text: text.replace("over 20 us", "over 20 us  # fast"),
    "units spelled otherwise": lambda text: text.replace("20 us", "20 µs"),
    "a step that changes nothing": lambda text: text.replace(
        "  do wiggle", "  set filament off\n  do wiggle"
    ),
    "line ends": lambda text: text.replace("\n", "\r\n"),
    "a byte order mark": lambda text: f"\ufeff{text}",
}


def test_there_is_something_to_tell_apart(look) -> None:
    found = look(SEQUENCE)
    assert len(found) > 5
    assert len(set(found)) == len(found)


@pytest.mark.parametrize("edit", HARMLESS)
def test_edits_elsewhere_leave_fingerprints_alone(edit: str, look) -> None:
    changed = HARMLESS[edit](SEQUENCE)
    assert changed != SEQUENCE
    assert sorted(look(changed)) == sorted(look(SEQUENCE))


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("over 20 us", "over 15 us"),
        ("above 120 V", "above 125 V"),
        ("do shake(40 V)", "do shake(41 V)"),
        ("let wall = 50 V", "let wall = 49 V"),
        ("repeat 2", "repeat 3"),
    ],
)
def test_a_changed_number_is_another_finding(old: str, new: str, look) -> None:
    assert old in SEQUENCE
    assert sorted(look(SEQUENCE.replace(old, new))) != sorted(look(SEQUENCE))


def test_only_what_concerns_the_number_changes(look) -> None:
    before, after = set(look(SEQUENCE)), set(look(SEQUENCE.replace("over 20 us", "over 15 us")))
    assert before & after
    assert before - after


def test_the_same_twice_is_counted(look) -> None:
    twice = SEQUENCE.replace("  do shake(40 V)\n", "  do shake(40 V)\n  do shake(40 V)\n")
    found = look(twice)
    assert len(set(found)) == len(found) > len(look(SEQUENCE))


def test_texts_with_mistakes_have_fingerprints_too(look) -> None:
    broken = SEQUENCE.replace("over 20 us", "over 20 sec").replace("cradle over", "cradl over")
    found = look(broken)
    assert len(found) == len(set(found)) > 1
    assert look(broken.replace("\nlet", "\n\n\nlet")) == found


def test_a_trap_file_s_mistake_is_known_by_its_table(look, tmp_path: Path) -> None:
    trap = tmp_path / "bench.trap.toml"
    wrong = trap.read_text("utf-8").replace("bits = 16", "bits = 160")
    trap.write_text(wrong, "utf-8")
    before = look(SEQUENCE)
    trap.write_text(f"# remarks\n\n{wrong}", "utf-8")
    assert look(SEQUENCE) == before != []


def test_the_working_directory_takes_no_part(
    look, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = look(SEQUENCE)
    for folder, name in ((tmp_path, "a.well"), (tmp_path.parent, f"{tmp_path.name}/a.well")):
        monkeypatch.chdir(folder)
        assert blocking(examined(compile_file(name))) == before


def test_a_file_that_cannot_be_read_has_one(tmp_path: Path) -> None:
    found = blocking(examined(compile_file(tmp_path / "nowhere.well")))
    assert len(found) == 1
