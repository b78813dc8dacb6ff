"""What is wrong with a page as HTML, by the parser of the standard library."""

from __future__ import annotations

from html.parser import HTMLParser

EMPTY = {"meta", "link", "img", "br", "hr", "input", "col", "wbr"}
LOADED = {"src", "srcset", "poster", "data", "action", "formaction", "background", "xlink:href"}
REFERENCES = {"for", "aria-labelledby", "aria-describedby", "aria-controls", "data-copy"}


class Checked(HTMLParser):
    """A page that was read.

    faults : what is wrong; texts : all text outside of scripts and styles
    """

    def __init__(self, page: str) -> None:
        super().__init__(convert_charrefs=True)
        self.faults: list[str] = []
        self.texts: list[str] = []
        self.links: list[str] = []
        self.images: list[str] = []
        self.headings: list[int] = []
        self.tags: set[str] = set()
        self._open: list[str] = []
        self._ids: set[str] = set()
        self._asked: set[str] = set()
        self.feed(page)
        self.close()
        self.faults += [f"<{name}> is not closed" for name in self._open]
        self.faults += [f'nothing has the id "{name}"' for name in self._asked - self._ids]
        steps = zip(self.headings, self.headings[1:], strict=False)
        self.faults += [f"h{a} is followed by h{b}" for a, b in steps if b > a + 1]

    @property
    def text(self) -> str:
        """All text of the page, spaces as one."""
        return " ".join(" ".join(self.texts).split())

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.add(tag)
        if tag not in EMPTY:
            self._open.append(tag)
        if len(tag) == 2 and tag[0] == "h" and tag[1].isdigit():
            self.headings.append(int(tag[1]))
        for name, value in attrs:
            self._attribute(tag, name, value or "")

    def _attribute(self, tag: str, name: str, value: str) -> None:
        if name == "id":
            self.faults += [f'the id "{value}" is there twice'] * (value in self._ids)
            self._ids.add(value)
        elif name in REFERENCES:
            self._asked |= set(value.split())
        elif name == "href" and tag == "a":
            self.links.append(value)
            if value.startswith("#"):
                self._asked.add(value[1:])
        elif name in LOADED or name == "href":
            if not value.startswith("data:") and name != "data":
                self.faults.append(f"<{tag} {name}> loads {value[:60]}")
        elif name.startswith("on"):
            self.faults.append(f"<{tag}> has {name}")
        elif name == "alt":
            self.images.append(value)

    def handle_endtag(self, tag: str) -> None:
        if not self._open or self._open[-1] != tag:
            self.faults.append(f"</{tag}> closes {self._open[-1:]}")
        if tag in self._open:
            while self._open.pop() != tag:
                pass

    def handle_data(self, data: str) -> None:
        if not self._open or self._open[-1] not in {"script", "style"}:
            self.texts.append(data)
        elif "http://" in data.replace("http://www.w3.org/", "") or "https://" in data:
            self.faults.append("a script or a style names an address")
