"""Every command from its arguments to its output and exit status, on the files to start from."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace

import jsonschema
import pytest

import wellseq
from wellseq.base.data import data_folder
from wellseq.reread.folder import CHECKS

Run = Callable[..., SimpleNamespace]


def spoil(bench: Path, old: str, new: str, file: str = "first.well") -> None:
    text = (bench / file).read_text("utf-8")
    assert old in text
    (bench / file).write_text(text.replace(old, new, 1), "utf-8")


# check


def test_the_files_to_start_from_are_clear(bench: Path, run: Run) -> None:
    ran = run("check", "first.well")
    assert (ran.status, ran.err) == (0, "")
    assert ran.out.startswith("first.well: clear; ")


def test_findings_are_1_and_say_where(bench: Path, run: Run) -> None:
    spoil(bench, "ramp cradle", "ramp cradl")
    ran = run("check", "first.well", "--format", "lines")
    assert ran.status == 1
    assert "first.well:14:8: error: 'cradl' is not known as a pattern [unknown-name]\n" in ran.out


@pytest.mark.parametrize("name", ["nowhere.well", ".", "latin.well"])
def test_what_cannot_be_read_is_66(bench: Path, run: Run, name: str) -> None:
    (bench / "latin.well").write_bytes("wellseq 1 # Gerät".encode("latin-1"))
    ran = run("check", name)
    assert ran.status == 66
    assert "unreadable-file" in ran.out


def test_a_missing_trap_file_is_66(bench: Path, run: Run) -> None:
    (bench / "bench.trap.toml").unlink()
    assert run("check", "first.well").status == 66


def test_a_wrong_trap_file_is_78(bench: Path, run: Run) -> None:
    spoil(bench, "bits = 16", "bit = 16", "bench.trap.toml")
    ran = run("check", "first.well")
    assert ran.status == 78
    assert "did you mean 'bits'?" in ran.out


def test_all_files_are_checked_and_the_worst_decides(bench: Path, run: Run) -> None:
    spoil(bench, "over 20 ms smoothly", "over 20 V smoothly")
    ran = run("check", "first.well", "nowhere.well", "first.well")
    assert ran.status == 66
    assert ran.out.count("first.well: not clear") == 2


def test_let_replaces_a_value(bench: Path, run: Run) -> None:
    assert run("check", "first.well", "--let", "wall=60 V").status == 0
    ran = run("check", "first.well", "--let", "wall=80 V")
    assert ran.status == 1
    assert "voltage-out-of-range" in ran.out
    assert run("check", "first.well", "--let", "wal=60 V").status == 1


def test_json_obeys_its_schema(bench: Path, run: Run) -> None:
    spoil(bench, "wall = 50 V", "wall = 80 V")
    ran = run("check", "first.well", "--format", "json")
    document = json.loads(ran.out)
    stored = (data_folder("grammar") / "schemas" / "findings-1.json").read_text("utf-8")
    jsonschema.validate(document, json.loads(stored))
    verdicts = {finding["verdict"] for finding in document["findings"]}
    assert verdicts >= {"pass", "fail"}
    assert document["files"][0]["cleared"] is False


# build and verify


def test_a_build_is_verified_and_a_changed_byte_is_found(bench: Path, run: Run) -> None:
    ran = run("build", "first.well", "-o", "out")
    assert ran.status == 0
    assert ran.err.startswith("out: written, 1 table, ")
    names = {path.name for path in (bench / "out").iterdir()}
    assert {"block-1-run.csv", "cautions.md", "claims.json", "manifest.json", "sources"} < names
    assert run("verify", "out").status == 0
    path = bench / "out" / "block-1-run.csv"
    path.write_bytes(path.read_bytes().replace(b"0,", b"1,", 1))
    ran = run("verify", "out", "--format", "lines")
    assert ran.status == 1
    assert ran.out.startswith("out/block-1-run.csv:1:1: error: ")


def test_the_folder_s_own_copies_compile_to_the_same_content(bench: Path, run: Run) -> None:
    run("build", "first.well", "-o", "out")
    run("build", "out/sources/first.well", "-o", "again")
    one, two = (
        json.loads((bench / name / "manifest.json").read_text()) for name in ("out", "again")
    )
    assert one["content_id"] == two["content_id"]
    assert one == two


def test_a_build_from_elsewhere_gives_the_same_bytes(
    bench: Path, run: Run, monkeypatch: pytest.MonkeyPatch
) -> None:
    run("build", "first.well", "-o", "here")
    monkeypatch.chdir("/")
    run("build", str(bench / "first.well"), "-o", str(bench / "there"))
    for path in sorted((bench / "here").rglob("*")):
        if path.is_file():
            other = bench / "there" / path.relative_to(bench / "here")
            assert other.read_bytes() == path.read_bytes(), path


def test_nothing_is_written_while_a_finding_stands(bench: Path, run: Run) -> None:
    spoil(bench, "wall = 50 V", "wall = 80 V")
    ran = run("build", "first.well", "-o", "out")
    assert ran.status == 1
    assert ran.err == "wellseq: nothing was written\n"
    assert not (bench / "out").exists()


def test_an_old_folder_stays_when_its_sequence_no_longer_passes(bench: Path, run: Run) -> None:
    run("build", "first.well", "-o", "out")
    before = (bench / "out" / "manifest.json").read_bytes()
    spoil(bench, "wall = 50 V", "wall = 80 V")
    assert run("build", "first.well", "-o", "out").status == 1
    assert (bench / "out" / "manifest.json").read_bytes() == before
    assert run("verify", "out").status == 0


def test_somebody_else_s_folder_is_73(bench: Path, run: Run) -> None:
    (bench / "data").mkdir()
    (bench / "data" / "run.dat").write_text("42")
    ran = run("build", "first.well", "-o", "data/")
    assert ran.status == 73
    assert ran.err == "wellseq: data: this folder was not made by wellseq; it is left alone\n"


EACH = """  "wait"
  each pause of 1 s, 2 s { hold for pause }
"""


def test_each_makes_a_folder_per_value(bench: Path, run: Run) -> None:
    spoil(bench, '  "wait"\n  hold for 10 s\n', EACH)
    ran = run("build", "first.well", "-o", "out", "--each")
    assert ran.status == 0, ran.out
    manifests = [json.loads((bench / f"out-{n}" / "manifest.json").read_text()) for n in (1, 2)]
    assert [one["each"] for one in manifests] == ["1", "2"]
    seconds = [float(one["blocks"][0]["duration_decimal_s"]) for one in manifests]
    assert seconds[1] - seconds[0] == pytest.approx(1.0, abs=1e-9)
    assert not (bench / "out").exists()


def test_one_of_two_eaches_is_chosen_by_its_name(bench: Path, run: Run) -> None:
    two = "each pause of 1 s, 2 s { each more of 1 s, 3 s, 4 s { hold for pause + more } }"
    spoil(bench, "hold for 10 s", two)
    ran = run("build", "first.well", "-o", "out", "--each")
    assert ran.status == 1
    assert ran.out.count("this file has more than one `each`") == 1
    assert run("build", "first.well", "-o", "out", "--each-of", "more").status == 0
    assert sorted(path.name for path in bench.glob("out*")) == ["out-1", "out-2", "out-3"]
    manifests = [json.loads((bench / f"out-{n}" / "manifest.json").read_text()) for n in (1, 2, 3)]
    assert [one["each"] for one in manifests] == ["1", "3", "4"]


def test_each_needs_an_each(bench: Path, run: Run) -> None:
    assert run("build", "first.well", "-o", "out", "--each").status == 1
    assert list(bench.glob("out*")) == []


def test_no_folder_to_verify_is_66(bench: Path, run: Run) -> None:
    assert run("verify", "nowhere").status == 66
    assert run("verify", "first.well").status == 66


# show, new, explain


def test_show_draws_the_stack_and_says_what_parts_can_do(bench: Path, run: Run) -> None:
    ran = run("show", "bench.trap.toml")
    assert ran.status == 0
    lines = ran.out.splitlines()
    assert lines[2].split() == ["0", "30", "60", "90", "120", "149", "mm"]
    assert lines[3].split() == [f"[==E{n}==]" for n in range(1, 6)]
    assert "lv1        -70 V to 70 V  2.136 mV  12 MV/s  1 us   hold" in lines
    assert "E5         29 mm              15 mm            lv5" in lines


def test_show_of_a_wrong_trap_says_what_is_wrong(bench: Path, run: Run) -> None:
    spoil(bench, 'to = "29 mm"', 'to = "31 mm"', "bench.trap.toml")
    ran = run("show", "bench.trap.toml")
    assert ran.status == 78
    assert "bench.trap.toml:" in ran.err
    assert run("show", "nowhere.trap.toml").status == 66


def test_new_writes_files_that_check_and_leaves_others_alone(
    tmp_path: Path, run: Run, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    ran = run("new", "mine")
    assert ran.status == 0
    assert ran.out.splitlines()[:2] == ["mine/bench.trap.toml", "mine/first.well"]
    assert run("check", "mine/first.well").status == 0
    (tmp_path / "mine" / "first.well").write_text("changed")
    (tmp_path / "mine" / "bench.trap.toml").unlink()
    ran = run("new", "mine")
    assert ran.status == 73
    assert ran.err == "wellseq: mine/first.well is there already; nothing was written\n"
    assert not (tmp_path / "mine" / "bench.trap.toml").exists()


@pytest.mark.parametrize(
    ("name", "says"),
    [
        ("file-altered", "SHA-256"),
        ("through", "`evaporate CLOUD through"),
        ("smoothly", "`ramp PATTERN"),
        ("V/us", "1 V/us = 1e+06 V/s"),
        ("because", "assume"),
    ],
)
def test_explain(run: Run, name: str, says: str) -> None:
    ran = run("explain", name)
    assert ran.status == 0
    assert says in ran.out


def test_explain_offers_the_nearest_name(run: Run) -> None:
    ran = run("explain", "evaprate")
    assert ran.status == 64
    assert ran.err == (
        "wellseq: 'evaprate' is not known; did you mean 'evaporate'?; "
        "the rules of a laboratory are known with --trap\n"
    )


def test_everything_that_verify_can_find_has_a_page(run: Run) -> None:
    folder = data_folder("safety") / "verify"
    assert {page.stem for page in folder.glob("*.md")} == set(CHECKS)
    for page in folder.glob("*.md"):
        text = page.read_text("utf-8")
        assert text.startswith(f"# {page.stem}\n")
        assert all(
            f"**{part}.**" in text for part in ("What it says", "Why it matters", "What to do")
        )


# the same from Python


def test_the_package_offers_the_same(bench: Path) -> None:
    trap = wellseq.load_trap("bench.trap.toml")
    assert wellseq.Field(trap).potential({"E3": 1.0}, 0.0745) == pytest.approx(0.8, abs=0.2)
    assert wellseq.species("electron").charge_sign == -1
    case = wellseq.compile_file("first.well", lets={"wall": "60 V"})
    assert case.blocked == ()
    assert case.timeline.duration_s > 13
    assert case.shipped.blocks[0].codes.shape[1] == 5
    wellseq.build("first.well", "out")
    assert wellseq.verify("out") == ()


def test_mistakes_are_values_in_python_too(bench: Path) -> None:
    spoil(bench, "ramp cradle", "ramp cradl")
    assert [finding.name for finding in wellseq.compile_file("first.well").blocked] == [
        "unknown-name"
    ]
    wellseq.build("first.well", "out")
    assert not (bench / "out").exists()
    with pytest.raises(ValueError, match="nowhere"):
        wellseq.load_trap("nowhere.trap.toml")
    with pytest.raises(AttributeError):
        wellseq.nothing  # noqa: B018


# whole outputs

TIRED = """\
FAILS  unknown-name
          'cradl' is not known as a pattern
 written  ramp cradl over 20 ms smoothly
               ~~~~~
      at  first.well, line 14, column 8
     try  did you mean 'cradle'?

FAILS  unit-mismatch
          `for` needs a time (s), and this is 10 V
 written  hold for 10 V
                   ~~~~
      at  first.well, line 21, column 12
     try  write for example '20 ms'

"""


def test_two_mistakes_as_a_person_reads_them(bench: Path, run: Run) -> None:
    spoil(bench, "ramp cradle", "ramp cradl")
    spoil(bench, "hold for 10 s", "hold for 10 V")
    told = run("check", "first.well").out
    assert told.startswith(TIRED)
    assert told.splitlines()[-1].startswith("first.well: not clear; 2 fail, ")


@pytest.mark.parametrize("seed", ["0", "1", "random"])
def test_no_seed_zone_or_locale_changes_a_byte(bench: Path, run: Run, seed: str) -> None:
    run("build", "first.well", "-o", "here")
    root = str(Path(wellseq.__file__).parents[1])
    changed = {"PYTHONHASHSEED": seed, "TZ": "Pacific/Apia", "LC_ALL": "tr_TR", "COLUMNS": "40"}
    subprocess.run(
        [sys.executable, "-m", "wellseq", "build", "first.well", "-o", "there"],
        env={**os.environ, "PYTHONPATH": root, **changed},
        capture_output=True,
        check=True,
    )
    for path in sorted((bench / "here").rglob("*")):
        if path.is_file():
            other = bench / "there" / path.relative_to(bench / "here")
            assert other.read_bytes() == path.read_bytes(), path
