"""The pen's SVG made accessible and small: a name and a description at the root, titles in words on the parts.

What comes out has no DOCTYPE and no ids but those of its title and description, so that it can stand
inside a page of HTML, several times over.
"""

from __future__ import annotations

import hashlib
import xml.etree.ElementTree as ElementTree

from flowgraph.draw.dot import ink
from flowgraph.draw.picture import Picture

SVG = "http://www.w3.org/2000/svg"
XLINK = "http://www.w3.org/1999/xlink"


def as_svg(picture: Picture) -> bytes:
    """The picture as an SVG document. Raises PenMissing."""
    root = ElementTree.fromstring(ink(picture, "svg"))
    graph = root.find(f"{{{SVG}}}g")
    if graph is not None:
        _clean(graph)
    key = "flowgraph-" + hashlib.sha256((picture.title + picture.description).encode()).hexdigest()[:12]
    title, description = ElementTree.Element(f"{{{SVG}}}title"), ElementTree.Element(f"{{{SVG}}}desc")
    title.text, description.text = printable(picture.title), printable(picture.description)
    title.set("id", f"{key}-title")
    description.set("id", f"{key}-desc")
    root.insert(0, title)
    root.insert(1, description)
    root.set("role", "img")
    root.set("aria-labelledby", f"{key}-title {key}-desc")
    ElementTree.register_namespace("", SVG)
    text = ElementTree.tostring(root, encoding="unicode")
    return b'<?xml version="1.0" encoding="utf-8"?>\n' + text.encode() + b"\n"


def printable(text: str) -> str:
    """The text without the control characters that XML forbids."""
    return "".join(character for character in text if character.isprintable() or character == "\n")


def _clean(graph: ElementTree.Element) -> None:
    """Unwrap the pen's links, keep titles of symbols only and in words, drop its names and ids."""
    graph.attrib.pop("id", None)
    for part in list(graph):
        if part.tag == f"{{{SVG}}}title":
            graph.remove(part)
        if part.tag != f"{{{SVG}}}g":
            continue
        part.attrib.pop("id", None)
        kind = " ".join(word for word in part.get("class", "").split() if word not in ("node", "edge"))
        if kind:
            part.set("class", kind)
        title = part.find(f"{{{SVG}}}title")
        if title is not None:
            part.remove(title)
        for wrapper in part.findall(f"{{{SVG}}}g"):
            link = wrapper.find(f"{{{SVG}}}a")
            if link is None:
                continue
            part.remove(wrapper)
            words = ElementTree.SubElement(part, f"{{{SVG}}}title")
            words.text = link.get(f"{{{XLINK}}}title", "")
            part.extend(list(link))
        part.tail = "\n"
        if not len(part):
            graph.remove(part)
