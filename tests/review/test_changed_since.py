"""Only what a change brought: judged on the whole, against a git revision with all its files."""

from __future__ import annotations

from pathlib import Path

import pytest

from wellseq.review.revisions import NoRevision, at_revision, files_at


def test_what_was_there_before_is_left_out_and_what_is_new_is_told(
    bench: Path, git, wellseq, spoil
) -> None:
    spoil("ramp { E1..E5 = 0 V } over 20 ms", "ramp { E1..E5 = 0 V } over 1 us")
    git("commit", "-q", "-a", "-m", "too fast")
    code, out, _ = wellseq("check", "first.well", "--changed-since", "HEAD")
    assert code == 0
    assert "nothing new" in out
    assert "there already in HEAD; a build refuses it" in out
    spoil("above 20 V", "above 120 V")
    code, out, _ = wellseq("check", "first.well", "--changed-since", "HEAD", "--format", "lines")
    assert code == 1
    assert "[requirement-not-met]" in out
    assert "[slew-too-fast]" not in out
    assert wellseq("check", "first.well")[1].count("slew-too-fast") > 0


def test_a_change_in_the_trap_counts(bench: Path, git, wellseq) -> None:
    trap = bench / "bench.trap.toml"
    trap.write_text(trap.read_text("utf-8").replace('["-70 V"', '["-40 V"'), "utf-8")
    code, out, _ = wellseq("check", "first.well", "--changed-since", "HEAD", "--format", "lines")
    assert code == 1
    assert "[voltage-out-of-range]" in out


def test_a_file_that_is_new_is_told_whole(bench: Path, git, wellseq) -> None:
    (bench / "second.well").write_bytes(
        (bench / "first.well").read_bytes().replace(b"wall = 50", b"wall = 80")
    )
    assert wellseq("check", "second.well", "--changed-since", "HEAD")[0] == 1


def test_a_file_that_could_not_be_examined_before_and_cannot_now_is_no_success(
    bench: Path, git, wellseq, spoil
) -> None:
    spoil("hold for 10 s", "hold for 10 V")
    git("commit", "-q", "-a", "-m", "wrong")
    assert wellseq("check", "first.well", "--changed-since", "HEAD")[0] == 1


@pytest.mark.parametrize("form", ["text", "lines", "json", "sarif", "junit"])
def test_a_revision_that_does_not_exist_is_66_in_every_form(
    bench: Path, git, wellseq, form: str
) -> None:
    words = ("check", "first.well", "--changed-since", "no-such", "--format", form)
    code, out, _ = wellseq(*words)
    assert code == 66
    assert "there is no git revision 'no-such'" in out


@pytest.mark.parametrize("revision", ["--output=x", "-p", "HEAD:first.well", "", "HEAD~9"])
def test_a_revision_is_never_an_option(bench: Path, git, revision: str) -> None:
    with pytest.raises(NoRevision), at_revision(bench / "first.well", revision):
        pass
    assert not (bench / "x").exists()


def test_no_repository_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("GIT_CEILING_DIRECTORIES", str(tmp_path.parent))
    with pytest.raises(NoRevision, match="no git repository"), at_revision(tmp_path / "a", "HEAD"):
        pass
    monkeypatch.setenv("PATH", str(tmp_path))
    with pytest.raises(NoRevision), at_revision(tmp_path / "a", "HEAD"):
        pass


def test_a_copy_has_what_it_needs_and_no_links(bench: Path, git) -> None:
    (bench / "link.well").symlink_to("first.well")
    (bench / "data.bin").write_bytes(b"\0" * 100)
    git("add", ".")
    git("commit", "-q", "-m", "more")
    with at_revision(bench / "first.well", "HEAD") as old:
        assert old is not None
        assert sorted(path.name for path in old.parent.iterdir()) == [
            "bench.trap.toml",
            "first.well",
        ]
        copy = old
    assert not copy.exists()
    assert files_at(bench, "HEAD") == ["first.well"]


def test_the_repository_is_not_touched(bench: Path, git, wellseq) -> None:
    before = git("status", "--porcelain"), git("rev-parse", "HEAD")
    wellseq("check", "first.well", "--changed-since", "HEAD")
    assert (git("status", "--porcelain"), git("rev-parse", "HEAD")) == before
