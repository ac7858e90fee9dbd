"""Hover, completion, definition, rename, layout, folds, hints and colours, over real pipes."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from lsp_client import Client

from wellseq.text.tidy import tidy

TEXT = """\
wellseq 1
trap "bench.trap.toml"

let wall = 50 V   # µ 𝔸

cloud pool is electron { number 2e7 ± 20 %; radius 1 mm; temperature 600 K }

pattern cradle {
  E2, E4 = -wall
  others = 0 V
}

procedure shake(low, time) {
  ramp { E2, E4 = -low } over time smoothly
  ramp cradle over time smoothly
}

sequence first_light {
  ramp cradle over 20 ms smoothly
  set filament on
  load pool at E3 for 2 s
  "wait"
  do shake(40 V, 30 ms)
  repeat 2 { hold for 1 s; do shake(45 V, 20 ms) }
  assume temperature of pool 500 K ± 50 K because "measured"
  require time after "wait" below 1 min
  release pool through E4 to 0 V over 10 ms
  ramp { E1..E5 = 0 V } over 20 ms
  set filament off
}
"""


@pytest.fixture
def file(client: Client, first: Path):
    first.write_text(TEXT, "utf-8")
    assert client.open(first) == []
    yield first
    client.tell("textDocument/didClose", {"textDocument": {"uri": first.as_uri()}})
    client.settle(0.05)


def spot(piece: str, inside: int = 1, text: str = TEXT) -> tuple[int, int]:
    """Line and UTF-16 character of a piece of the text, from 0."""
    before = text[: text.index(piece) + inside]
    line = before.count("\n")
    return line, len(before.split("\n")[-1].encode("utf-16-le")) // 2


def hover(client: Client, file: Path, piece: str, inside: int = 1) -> str:
    answer = client.at("hover", file, *spot(piece, inside))
    return answer["contents"]["value"] if answer else ""


def offered(client: Client, file: Path, piece: str, inside: int) -> list[str]:
    answer = client.at("completion", file, *spot(piece, inside))
    return [item["label"] for item in answer["items"]]


def edited(text: str, edits: list[dict[str, Any]]) -> str:
    """A text after the edits of the protocol, from the last to the first."""
    lines = text.split("\n")
    order = sorted(
        edits, key=lambda one: (one["range"]["start"]["line"], one["range"]["start"]["character"])
    )
    for one in reversed(order):
        start, end = one["range"]["start"], one["range"]["end"]
        assert start["line"] == end["line"]
        encoded = lines[start["line"]].encode("utf-16-le")
        new = encoded[: 2 * start["character"]] + one["newText"].encode("utf-16-le")
        lines[start["line"]] = (new + encoded[2 * end["character"] :]).decode("utf-16-le")
    return "\n".join(lines)


# hover


@pytest.mark.parametrize(
    ("piece", "said"),
    [
        ("20 ms smoothly", "0.02 s"),
        ("600 K", "600 K"),
        ("± 20 %", "0.2"),
        ("cradle over 20 ms", "pattern cradle {\n  E2, E4 = -wall"),
        ("wall\n  others", "let wall = 50 V"),
        ("pool at", "cloud pool is electron"),
        ("shake(40", "procedure shake(low, time)"),
        ("E3 for", "electrode **E3**: "),
        ("filament on", "line **filament**: "),
        ("over 20 ms smoothly", "`ramp PATTERN over T [smoothly]`"),
        ("repeat 2", "`repeat 4 { … }`"),
    ],
)
def test_hover_says_what_stands_there(client: Client, file: Path, piece: str, said: str) -> None:
    inside = 2 if piece.startswith("±") else 1
    assert said in hover(client, file, piece, inside)


def test_hover_on_a_step_has_its_time_its_depth_and_what_is_stated(
    client: Client, file: Path
) -> None:
    said = hover(client, file, "release pool")
    assert "`release CLOUD through" in said
    assert "- begins at " in said
    assert "of block run, lasts 10 ms" in said
    assert "- pool: temperature 500 K, as stated" in said
    inside = hover(client, file, "ramp { E2, E4 = -low }")
    assert "3 times" in inside
    assert "- pool: " in inside
    assert "V deep at least" in inside


def test_hover_says_nothing_of_blanks_and_remarks(client: Client, file: Path) -> None:
    assert hover(client, file, "# µ") == ""
    assert hover(client, file, "\n\nlet wall") == ""


# completion


@pytest.mark.parametrize(
    ("piece", "inside", "some", "none"),
    [
        ("  set filament on", 2, {"ramp", "hold", "repeat", "do"}, {"let", "E1"}),
        ("let wall", 0, {"let", "cloud", "sequence"}, {"ramp"}),
        ("over 20 ms smoothly\n  set", 5, {"wall"}, {"E1", "pool"}),
        ("20 ms smoothly\n  set", 6, {"smoothly", "allow"}, {"over", "E1"}),
        ("load pool", 5, {"pool"}, {"E3", "cradle"}),
        ("load pool at", 10, {"at", "for"}, {"pool"}),
        ("load pool at E3", 13, {"E1", "E5"}, {"pool"}),
        ("set filament on", 4, {"filament"}, {"E1"}),
        ("set filament on", 13, {"on", "off"}, {"E1"}),
        ("ramp cradle over 20", 5, {"cradle"}, {"pool", "E1"}),
        ("do shake(40", 3, {"shake"}, {"cradle"}),
        ("E2, E4 = -wall", 0, {"E1", "others"}, {"ramp"}),
        ("-wall", 1, {"wall"}, {"E1"}),
        ("assume temperature", 7, {"temperature", "number"}, {"pool"}),
        ('after "wait"', 6, {'"wait"'}, {"pool"}),
        ("is electron", 3, {"electron", "antiproton"}, {"pool"}),
        ("number 2e7", 0, {"number", "radius"}, {"ramp"}),
        ("-low }", 1, {"low", "time"}, {"E1"}),
    ],
)
def test_completion_offers_what_may_stand_there(
    client: Client, file: Path, piece: str, inside: int, some: set[str], none: set[str]
) -> None:
    found = set(offered(client, file, piece, inside))
    assert some <= found, found
    assert not none & found, found


def test_completion_works_in_a_text_that_is_not_finished(client: Client, file: Path) -> None:
    text = TEXT.replace("  set filament off\n}\n", "  hold for 5 ")
    client.change(file, text)
    line, character = spot("hold for 5 ", 11, text)
    labels = [one["label"] for one in client.at("completion", file, line, character)["items"]]
    assert {"s", "ms", "min"} <= set(labels)
    client.change(file, TEXT)


def test_completion_knows_names_of_used_files(client: Client, file: Path) -> None:
    (file.parent / "more.well").write_text("wellseq 1\npattern away { E1 = 1 V }\n", "utf-8")
    text = TEXT.replace("\n\nlet", '\nuse "more.well"\n\nlet', 1)
    client.change(file, text)
    line, character = spot("ramp cradle over 20", 5, text)
    labels = [one["label"] for one in client.at("completion", file, line, character)["items"]]
    assert {"away", "cradle"} <= set(labels)


# definition, rename


@pytest.mark.parametrize(
    ("piece", "inside", "target"),
    [
        ("ramp cradle over 20", 6, "cradle {"),
        ("= -wall", 4, "wall = 50"),
        ("load pool", 6, "pool is"),
        ("shake(40", 1, "shake(low"),
        ("-low }", 1, "low, time)"),
        ('after "wait"', 8, '"wait"\n  do'),
    ],
)
def test_a_name_leads_to_where_it_is_given(
    client: Client, file: Path, piece: str, inside: int, target: str
) -> None:
    found = client.at("definition", file, *spot(piece, inside))
    assert found["uri"] == file.as_uri()
    start = found["range"]["start"]
    assert (start["line"], start["character"]) == spot(target, 0)


def test_names_of_the_trap_lead_into_its_file(client: Client, file: Path) -> None:
    trap = file.parent / "bench.trap.toml"
    found = client.at("definition", file, *spot("E3 for"))
    assert found["uri"] == trap.as_uri()
    line = trap.read_text("utf-8").split("\n")[found["range"]["start"]["line"]]
    assert line == 'name = "E3"'
    found = client.at("definition", file, *spot('"bench.trap', 3))
    assert found["uri"] == trap.as_uri()


@pytest.mark.parametrize(
    ("piece", "inside", "new", "count"),
    [
        ("let wall", 5, "rim", 2),
        ("load pool", 6, "τροφή", 4),
        ("-low }", 2, "deep", 2),
        ("cradle {", 1, "bed", 3),
        ("shake(40", 1, "wobble", 3),
        ("over time", 6, "pace", 3),
    ],
)
def test_a_name_is_changed_everywhere_and_nothing_else(
    client: Client, file: Path, piece: str, inside: int, new: str, count: int
) -> None:
    answer = client.at("rename", file, *spot(piece, inside), newName=new)
    (edits,) = answer["changes"].values()
    assert len(edits) == count
    changed = edited(TEXT, edits)
    assert client.change(file, changed) == []
    assert new in changed


def test_a_name_that_others_use_is_changed_in_their_files_too(client: Client, file: Path) -> None:
    more = file.parent / "more.well"
    more.write_text("wellseq 1\nprocedure rest(t) { hold for t }\n", "utf-8")
    text = TEXT.replace("\n\nlet", '\nuse "more.well"\n\nlet', 1)
    text = text.replace("repeat 2 { hold for 1 s;", "repeat 2 { do rest(1 s);")
    other = file.parent / "other.well"
    other.write_text(text, "utf-8")
    assert client.change(file, text) == []
    answer = client.at("rename", file, *spot("rest(1", 1, text), newName="calm")
    assert {uri: len(edits) for uri, edits in answer["changes"].items()} == {
        one.as_uri(): 1 for one in (more, other, file)
    }


@pytest.mark.parametrize(
    ("piece", "inside", "new", "said"),
    [
        ("let wall", 5, "pool", "would say something else"),
        ("let wall", 5, "over", "a word of the language"),
        ("let wall", 5, "kHz", "is a unit"),
        ("let wall", 5, "two words", "not spelled like a name"),
        ("let wall", 5, "E1", "would say something else"),
        ("E3 for", 1, "X", "names of the trap are in its file"),
        ("smoothly\n  set", 1, "x", "no name of a sequence stands here"),
    ],
)
def test_a_rename_that_would_do_harm_is_refused(
    client: Client, file: Path, piece: str, inside: int, new: str, said: str
) -> None:
    with pytest.raises(LookupError, match=said):
        client.at("rename", file, *spot(piece, inside), newName=new)


def test_references_are_the_places_of_a_rename(client: Client, file: Path) -> None:
    found = client.at(
        "references", file, *spot("load pool", 6), context={"includeDeclaration": True}
    )
    assert len(found) == 4


# the whole file


def ask(client: Client, method: str, file: Path, **more: Any) -> Any:
    return client.ask(f"textDocument/{method}", {"textDocument": {"uri": file.as_uri()}, **more})


def test_layout_is_that_of_the_command(client: Client, file: Path) -> None:
    options = {"options": {"tabSize": 8, "insertSpaces": False}}
    (edit,) = ask(client, "formatting", file, **options)
    assert edit["newText"] == tidy(TEXT)
    assert edit["range"]["start"] == {"line": 0, "character": 0}
    assert edit["range"]["end"] == {"line": TEXT.count("\n"), "character": 0}
    assert client.change(file, edit["newText"]) == []
    assert ask(client, "formatting", file, **options) == []
    client.change(file, "let a 3 V\n")
    assert ask(client, "formatting", file, **options) == []


def test_folds_are_blocks_and_runs_of_remarks(client: Client, file: Path) -> None:
    client.change(file, f"# one\n# two\n{TEXT}")
    found = ask(client, "foldingRange", file)
    kinds = {(one["startLine"], one["endLine"], one["kind"]) for one in found}
    assert (0, 1, "comment") in kinds
    assert (9, 11, "region") in kinds
    assert len(kinds) == 4


def test_hints_tell_when_steps_begin(client: Client, file: Path) -> None:
    whole = {"start": {"line": 0, "character": 0}, "end": {"line": 99, "character": 0}}
    found = ask(client, "inlayHint", file, range=whole)
    by_line = {one["position"]["line"]: one["label"] for one in found}
    assert by_line[spot("set filament on")[0]] == "at 20 ms"
    assert by_line[spot("ramp { E2, E4 = -low }")[0]].endswith(", 3 times")
    part = {"start": {"line": 18, "character": 0}, "end": {"line": 19, "character": 0}}
    assert len(ask(client, "inlayHint", file, range=part)) == 2
    client.change(file, TEXT.replace("over 20 ms smoothly", "over 20 V smoothly"))
    assert ask(client, "inlayHint", file, range=whole) == []


def colours(client: Client, file: Path, text: str) -> dict[str, str]:
    """Every coloured piece of the text and its sort."""
    legend = client.capabilities["semanticTokensProvider"]["legend"]["tokenTypes"]
    data = ask(client, "semanticTokens/full", file)["data"]
    lines = text.split("\n")
    line = start = 0
    found: dict[str, str] = {}
    for at in range(0, len(data), 5):
        down, right, length, sort, _ = data[at : at + 5]
        line, start = line + down, right + (0 if down else start)
        encoded = lines[line].encode("utf-16-le")
        piece = encoded[2 * start : 2 * (start + length)].decode("utf-16-le")
        found.setdefault(piece, legend[sort])
    return found


def test_colours_tell_names_apart(client: Client, file: Path) -> None:
    found = colours(client, file, TEXT)
    expected = {
        "ramp": "keyword",
        "over": "keyword",
        "sequence": "keyword",
        "20 ms": "number",
        '"wait"': "string",
        "# µ 𝔸": "comment",
        "wall": "variable",
        "pool": "type",
        "cradle": "property",
        "shake": "function",
        "low": "parameter",
        "E3": "enumMember",
        "filament": "enumMember",
        "=": "operator",
    }
    assert {piece: found.get(piece) for piece in expected} == expected


def test_nothing_is_asked_in_vain_of_a_file_that_is_not_there(client: Client, bench: Path) -> None:
    nowhere = bench / "nowhere.well"
    assert client.at("hover", nowhere, 3, 4) is None
    assert client.at("definition", nowhere, 3, 4) is None
    assert client.at("completion", nowhere, 3, 4)["items"] is not None
    assert ask(client, "foldingRange", nowhere) == []
