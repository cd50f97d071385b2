"""Vector graphics made fit to stand inside the page and to be read aloud."""

import re
from xml.etree import ElementTree as ET

_SVG = "http://www.w3.org/2000/svg"
_XLINK = "{http://www.w3.org/1999/xlink}href"
_REFERENCE = re.compile(r"url\(#([^)]+)\)")
# `font-family` is left to the page; the others have an attribute of the same name.
_DROPPED_STYLES = frozenset({"font-family"})
_DROPPED_TAGS = frozenset({f"{{{_SVG}}}metadata", f"{{{_SVG}}}style"})


def tidy_svg(text: str, *, name: str, title: str, description: str) -> str:
    """Turn a plotted vector graphic into one that may stand inline under a strict content policy.

    Inline styles become attributes (the page forbids inline styles and recolours by attribute), identifiers
    get the figure's name in front (several figures share one page), and a title and description are
    added for those who cannot see it.

    Parameters
    ----------
    text : str
        SVG document.
    name : str
        Name of the figure, unique on the page.
    title, description : str
        What it is, and what it says in numbers.

    Returns
    -------
    svg : str
        One ``svg`` element without an XML declaration.
    """
    ET.register_namespace("", _SVG)
    ET.register_namespace("xlink", "http://www.w3.org/1999/xlink")
    root = ET.fromstring(text)
    _drop(root)
    referenced = _references(root)
    for element in root.iter():
        _style_to_attributes(element)
        _rename(element, referenced, name)
    _describe(root, name, title, description)
    return ET.tostring(root, encoding="unicode") + "\n"


def _drop(parent: ET.Element) -> None:
    for child in list(parent):
        if child.tag in _DROPPED_TAGS:
            parent.remove(child)
        else:
            _drop(child)


def _references(root: ET.Element) -> set[str]:
    found: set[str] = set()
    for element in root.iter():
        for value in element.attrib.values():
            found.update(_REFERENCE.findall(value))
        if element.get(_XLINK, "").startswith("#"):
            found.add(element.attrib[_XLINK][1:])
    return found


def _style_to_attributes(element: ET.Element) -> None:
    for declaration in element.attrib.pop("style", "").split(";"):
        prop, _, value = declaration.partition(":")
        if value and prop.strip() not in _DROPPED_STYLES:
            element.set(prop.strip(), value.strip())


def _rename(element: ET.Element, referenced: set[str], name: str) -> None:
    own = element.attrib.pop("id", None)
    if own in referenced:
        element.set("id", f"{name}-{own}")
    for key, value in element.attrib.items():
        if key == _XLINK and value.startswith("#"):
            element.set(key, f"#{name}-{value[1:]}")
        elif "url(#" in value:
            element.set(key, _REFERENCE.sub(rf"url(#{name}-\1)", value))


def _describe(root: ET.Element, name: str, title: str, description: str) -> None:
    for place, (tag, words) in enumerate((("title", title), ("desc", description))):
        node = ET.Element(f"{{{_SVG}}}{tag}", {"id": f"{name}-{tag}"})
        node.text = words
        node.tail = "\n"
        root.insert(place, node)
    for key in ("width", "height"):
        root.attrib.pop(key, None)
    root.set("role", "img")
    root.set("aria-labelledby", f"{name}-title {name}-desc")
    root.set("font-family", "sans-serif")
    root.set("stroke-linejoin", "round")
