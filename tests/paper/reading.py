"""A page read back by the standard library, strictly: what a browser would forgive is an error here."""

from __future__ import annotations

from dataclasses import dataclass, field
from html.parser import HTMLParser

# HTML, 13.1.2: void elements, which have no end tag.
VOID = {"area", "base", "br", "col", "embed", "hr", "img", "input", "link", "meta", "source", "track", "wbr"}

NEVER = {"script", "iframe", "object", "embed", "form", "img", "image", "use", "a", "b", "i"}


@dataclass
class Node:
    """One element."""

    name: str
    attributes: dict[str, str]
    parts: list[Node | str] = field(default_factory=list)

    @property
    def text(self) -> str:
        """All text within it, a blank where no line may end for a blank."""
        text = "".join(part if isinstance(part, str) else part.text for part in self.parts)
        return text.replace("\u00a0", " ")

    def all(self, *names: str) -> list[Node]:
        """Elements of these names within it, in order."""
        found = []
        for part in self.parts:
            if isinstance(part, Node):
                found += [part] if part.name in names else []
                found += part.all(*names)
        return found

    def every(self) -> list[Node]:
        """Every element within it."""
        found: list[Node] = []
        for part in self.parts:
            if isinstance(part, Node):
                found += [part, *part.every()]
        return found


class _Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.root = Node("", {})
        self.open = [self.root]

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        names = [name for name, _ in attrs]
        assert len(names) == len(set(names)), f"<{tag}> has an attribute twice: {names}"
        node = Node(tag, {name: value or "" for name, value in attrs})
        self.open[-1].parts.append(node)
        if tag not in VOID:
            self.open.append(node)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        assert any(node.name == "svg" for node in self.open), f"<{tag}/> outside of a drawing"
        self.handle_starttag(tag, attrs)
        if tag not in VOID:
            self.open.pop()

    def handle_endtag(self, tag: str) -> None:
        assert self.open[-1].name == tag, f"</{tag}> where <{self.open[-1].name}> is open"
        self.open.pop()

    def handle_data(self, data: str) -> None:
        self.open[-1].parts.append(data)


def page(text: str) -> Node:
    """The root of a page. AssertionError where tags do not match."""
    assert text.startswith("<!DOCTYPE html>\n")
    reader = _Reader()
    reader.feed(text)
    reader.close()
    assert reader.open == [reader.root], f"not closed: {[node.name for node in reader.open[1:]]}"
    return reader.root


def rows(table: Node) -> list[list[str]]:
    """A table's cells, row by row."""
    return [[cell.text for cell in row.all("th", "td")] for row in table.all("tr")]


def table(root: Node, caption: str) -> Node:
    """The one table whose caption begins so."""
    (found,) = [one for one in root.all("table") if one.all("caption")[0].text.startswith(caption)]
    return found


def stands_alone(root: Node) -> None:
    """Checks what every page of ours must hold: named, accessible, and nothing asked for from outside."""
    (html,) = root.all("html")
    assert html.attributes["lang"] == "en"
    (title,) = root.all("head")[0].all("title")
    assert title.text.strip()
    every = root.every()
    idents = [node.attributes["id"] for node in every if "id" in node.attributes]
    assert len(idents) == len(set(idents)), "an id stands twice"
    for node in every:
        for name, value in node.attributes.items():
            assert not name.startswith("on"), f"<{node.name}> would run {value!r}"
            if name in ("src", "href", "action", "data", "srcset", "poster", "xlink:href"):
                assert value.startswith(("data:", "#")), f"<{node.name} {name}> leads to {value!r}"
            if name == "aria-labelledby":
                assert set(value.split()) <= set(idents)
            if name != "xmlns":
                assert "http:" not in value and "https:" not in value
    assert not {node.name for node in every} & {
        "script",
        "iframe",
        "object",
        "embed",
        "form",
        "img",
        "a",
        "b",
        "i",
    }
    for drawing in root.all("svg"):
        assert drawing.attributes["role"] == "img"
        assert drawing.all("title")[0].text and drawing.all("desc")[0].text
    for one in root.all("table"):
        assert one.all("caption")[0].text
        assert all(head.attributes.get("scope") in ("row", "col") for head in one.all("th"))
        widths = {len(row) for row in rows(one)}
        assert len(widths) == 1, f"rows of {widths} cells under {one.all('caption')[0].text!r}"
    style = root.all("style")[0].text
    assert "url(" not in style and "@import" not in style
