"""How far a file gets: the conductor decides that and nothing else."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from wellseq.base.data import data_folder
from wellseq.checks.judging import check_names
from wellseq.pipeline import TrapMistakes, build, compile_file, load_trap, publish, verify


@pytest.fixture
def sequence(tmp_path: Path) -> Path:
    """A copy of the sequence to start from, beside its trap."""
    return (
        Path(shutil.copytree(data_folder("grammar") / "start", tmp_path / "bench")) / "first.well"
    )


def changed(path: Path, old: str, new: str) -> Path:
    text = path.read_text("utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), "utf-8")
    return path


def test_a_sound_file_reaches_every_stage_and_every_check(sequence: Path) -> None:
    case = compile_file(sequence)
    stages = (case.trap, case.sequence, case.timeline, case.shipped, case.wells)
    assert None not in stages
    assert case.ran == check_names()
    assert (case.blocked, case.not_run, case.each) == ((), (), "")


def test_a_file_with_mistakes_is_not_drawn(sequence: Path) -> None:
    case = compile_file(changed(sequence, "ramp cradle", "ramp cradl"))
    assert case.trap is not None
    assert case.timeline is None
    assert {finding.name for finding in case.blocked} == {"unknown-name"}
    assert ("well-lost", "the file did not get as far as its wells") in case.not_run


def test_a_drawing_with_mistakes_is_shipped_but_its_wells_are_not_followed(sequence: Path) -> None:
    two = "alongside { lane { ramp { E3 = 1 V } over 1 s } lane { ramp { E3 = 2 V } over 1 s } }"
    case = compile_file(changed(sequence, "hold for 10 s", two))
    assert case.shipped is not None
    assert case.wells is None
    assert "lanes-clash" in {finding.name for finding in case.blocked}
    # What does not need wells was examined all the same.
    assert "slew-too-fast" in case.ran


@pytest.mark.parametrize("content", [None, b"\xff\xfe\x00", b"", b"{" * 10_000])
def test_nothing_in_a_file_raises(sequence: Path, content: bytes | None) -> None:
    if content is None:
        sequence.unlink()
    else:
        sequence.write_bytes(content)
    case = compile_file(sequence)
    assert case.blocked
    assert not publish(case, sequence.parent / "out")
    assert not (sequence.parent / "out").exists()


def test_sources_are_kept_of_a_broken_text_too(sequence: Path) -> None:
    case = compile_file(changed(sequence, "sequence", "sequense"))
    assert case.sources[0].shown == str(sequence)


def test_each_value_can_be_played_alone(sequence: Path) -> None:
    changed(sequence, "hold for 10 s", "each pause of 1 s, 2 s { hold for pause }")
    whole, second = compile_file(sequence), compile_file(sequence, each=2)
    assert whole.timeline is not None
    assert second.timeline is not None
    assert whole.timeline.duration_s - second.timeline.duration_s == 1
    assert (whole.each, second.each) == ("", "2")


def test_build_and_verify(sequence: Path) -> None:
    folder = sequence.parent / "out"
    assert build(sequence, folder).blocked == ()
    assert verify(folder) == ()


def test_a_wrong_trap_is_an_exception_that_tells_everything(sequence: Path) -> None:
    trap = sequence.with_name("bench.trap.toml")
    changed(trap, 'radius = "15 mm"', 'radios = "15 mm"')
    changed(trap, "bits = 16", "bits = 40")
    with pytest.raises(TrapMistakes) as caught:
        load_trap(trap)
    assert len(caught.value.mistakes) == 2
    assert "bench.trap.toml:" in str(caught.value)
