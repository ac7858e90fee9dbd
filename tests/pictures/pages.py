"""A page read by a parser of the standard library: its elements, texts and everything it names."""

from __future__ import annotations

from dataclasses import dataclass, field
from html.parser import HTMLParser

VOID = {"meta", "br", "input", "link", "hr", "wbr"}


@dataclass
class Element:
    """One element: its attributes, its own text and that of all within, its children."""

    name: str
    attributes: dict[str, str | None]
    children: list[Element] = field(default_factory=list)
    pieces: list[str | Element] = field(default_factory=list)

    def text(self) -> str:
        """All text inside, in order."""
        return "".join(one if isinstance(one, str) else one.text() for one in self.pieces)

    def all(self, name: str = "") -> list[Element]:
        """Every element inside with that name, in order; every one without a name."""
        found = []
        for child in self.children:
            if not name or child.name == name:
                found.append(child)
            found += child.all(name)
        return found


class _Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.root = Element("root", {})
        self.open = [self.root]

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        names = [name for name, _ in attrs]
        assert len(names) == len(set(names)), f"an attribute twice in {tag}: {names}"
        one = Element(tag, dict(attrs))
        self.open[-1].children.append(one)
        self.open[-1].pieces.append(one)
        if tag not in VOID:
            self.open.append(one)

    def handle_endtag(self, tag: str) -> None:
        assert self.open[-1].name == tag, f"{self.open[-1].name} is closed by {tag}"
        self.open.pop()

    def handle_data(self, data: str) -> None:
        self.open[-1].pieces.append(data)


def read(page: bytes) -> Element:
    """The elements of a page; fails where they are not nested rightly."""
    reader = _Reader()
    reader.feed(page.decode("utf-8"))
    reader.close()
    assert len(reader.open) == 1, [one.name for one in reader.open]
    return reader.root


def wrongs(page: Element) -> list[str]:
    """What keeps a page from being self-contained, safe and readable by a screen reader."""
    found = []
    everything = page.all()
    ids = [one.attributes["id"] for one in everything if "id" in one.attributes]
    found += [f"id {one} twice" for one in sorted(set(map(str, ids))) if ids.count(one) > 1]
    for one in everything:
        for name, value in one.attributes.items():
            if name == "style" or name.startswith("on"):
                found.append(f"{one.name} has {name}")
            if name in ("src", "action", "srcset", "data", "poster", "ping"):
                found.append(f"{one.name} asks for {value}")
            if name == "href" and str(value)[:1] == "#" and str(value)[1:] not in ids:
                found.append(f"{value} leads nowhere")
            if name == "href" and str(value)[:1] != "#" and str(value) != "cautions.html":
                found.append(f"{value} leads out")
        if one.name in ("iframe", "object", "embed", "link", "base", "form", "img"):
            found.append(f"there is a {one.name}")
        if one.name == "svg" and one.attributes.get("role") == "img":
            title = one.children[0] if one.children else Element("", {})
            if title.name != "title" or not title.text().strip():
                found.append("a drawing without a name")
        hidden = one.attributes.get("aria-hidden") == "true"
        if hidden and any("tabindex" in inner.attributes for inner in one.all()):
            found.append("something hidden takes the keyboard")
    return found
